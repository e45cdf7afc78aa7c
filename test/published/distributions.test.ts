/**
 * Distributions against printed tables, and against 40-digit values computed with mpmath 1.3 (an independent
 * implementation: hypergeometric series at 40 digits) rounded here to 17.
 */
import { describe, expect, it } from "vitest";
import {
  chiSquareCdf,
  chiSquareQuantile,
  chiSquareUpper,
  erfc,
  fCdf,
  fQuantile,
  fUpper,
  incompleteBeta,
  logGamma,
  normalCdf,
  normalQuantile,
  studentTCdf,
  studentTQuantile,
} from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";

const printedTo = (decimals: number) => ({
  absolute: 0.51 * 10 ** -decimals,
  because: `printed to ${decimals} decimals`,
});
const rounding = (relative: number) => ({
  relative,
  because: "rounding of a few dozen operations in double precision",
});

describe("printed tables", () => {
  it("normal: areas of NIST/SEMATECH e-Handbook table 1.3.6.7.1 (areas from 0 to z, from memory)", () => {
    for (const [z, area] of [
      [0.1, 0.03983],
      [0.5, 0.19146],
      [1, 0.34134],
      [1.96, 0.475],
      [2.33, 0.4901],
      [3, 0.49865],
    ]) {
      expectClose(normalCdf(z) - 0.5, area, printedTo(5));
    }
  });

  it("t: coverage factors of NIST Technical Note 1297, appendix B, table B.1", () => {
    const fractions = [68.27, 90, 95, 95.45, 99, 99.73];
    const rows: [number, number[]][] = [
      [1, [1.84, 6.31, 12.71, 13.97, 63.66, 235.8]],
      [2, [1.32, 2.92, 4.3, 4.53, 9.92, 19.21]],
      [5, [1.11, 2.02, 2.57, 2.65, 4.03, 5.51]],
      [10, [1.05, 1.81, 2.23, 2.28, 3.17, 3.96]],
      [25, [1.02, 1.71, 2.06, 2.11, 2.79, 3.33]],
    ];
    for (const [degrees, factors] of rows) {
      fractions.forEach((percent, i) => {
        // The note says that 68.27, 95.45 and 99.73 % stand for exactly 1, 2 and 3 standard deviations.
        const sds = [1, 0, 0, 2, 0, 3][i];
        const tail = sds > 0 ? normalCdf(-sds) : (100 - percent) / 200;
        expectClose(-studentTQuantile(tail, degrees), factors[i], printedTo(2));
      });
    }
  });

  it("t: e-Handbook table 1.3.6.7.2, upper tails 0.10, 0.05, 0.025, 0.01, 0.005", () => {
    const tails = [0.1, 0.05, 0.025, 0.01, 0.005];
    const rows: [number, number[]][] = [
      [1, [3.078, 6.314, 12.706, 31.821, 63.657]],
      [4, [1.533, 2.132, 2.776, 3.747, 4.604]],
      [12, [1.356, 1.782, 2.179, 2.681, 3.055]],
      [30, [1.31, 1.697, 2.042, 2.457, 2.75]],
      [100, [1.29, 1.66, 1.984, 2.364, 2.626]],
    ];
    for (const [degrees, values] of rows) {
      tails.forEach((tail, i) => {
        expectClose(studentTQuantile(1 - tail, degrees), values[i], printedTo(3));
      });
    }
  });

  it("chi-square: e-Handbook table 1.3.6.7.4, probabilities below 0.90, 0.95, 0.975, 0.99 (from memory)", () => {
    const rows: [number, number[]][] = [
      [1, [2.706, 3.841, 5.024, 6.635]],
      [5, [9.236, 11.07, 12.833, 15.086]],
      [10, [15.987, 18.307, 20.483, 23.209]],
      [29, [39.087, 42.557, 45.722, 49.588]],
    ];
    for (const [degrees, values] of rows) {
      [0.9, 0.95, 0.975, 0.99].forEach((p, i) => {
        expectClose(chiSquareQuantile(p, degrees), values[i], printedTo(3));
      });
    }
  });

  it("F: upper 5 % points of e-Handbook table 1.3.6.7.3 (from memory; four decimals by several printed tables)", () => {
    for (const [above, below, value] of [
      [1, 1, 161.4476],
      [5, 1, 230.1619],
      [3, 2, 19.1643],
      [4, 3, 9.1172],
      [10, 3, 8.7855],
    ]) {
      expectClose(fQuantile(0.95, above, below), value, printedTo(4));
    }
  });
});

describe("40-digit values", () => {
  it("erfc to 15 digits from 0.25 to the edge of the range", () => {
    for (const [x, value] of [
      [0.25, 0.7236736098317631],
      [0.5, 0.4795001221869535],
      [1, 0.15729920705028513],
      [2, 0.004677734981047266],
      [3.5, 7.430983723414128e-7],
      [5, 1.537459794428035e-12],
      [10, 2.088487583762545e-45],
      [25, 8.300172571196523e-274],
    ]) {
      expectClose(erfc(x), value, rounding(1e-15));
    }
  });

  it("normal quantile to 15 digits from p = 1e-300 to 0.975", () => {
    for (const [p, value] of [
      [1e-300, -37.0470962993612],
      [1e-10, -6.361340902404057],
      [1e-5, -4.264890793922825],
      [0.001, -3.0902323061678136],
      [0.05, -1.6448536269514726],
      [0.3, -0.5244005127080408],
      [0.45, -0.12566134685507402],
      [0.975, 1.9599639845400543],
    ]) {
      expectClose(normalQuantile(p), value, rounding(1e-15));
    }
  });

  it("t probabilities to 13 digits for 0.5 to ten million degrees of freedom", () => {
    for (const [t, degrees, value] of [
      [-1, 0.5, 0.3011216108413221],
      [-2, 1, 0.14758361765043326],
      [-3, 2.5, 0.03628804777451592],
      [-0.1, 7, 0.4615740298023962],
      [-4, 9, 0.0015552141551929276],
      [-12, 30, 2.790092707599628e-13],
      [-2, 1000, 0.02288517324662582],
      [-3, 100000, 0.0013502304420323595],
      [-1.5, 1e7, 0.06680721705381472],
    ]) {
      expectClose(studentTCdf(t, degrees), value, rounding(1e-13));
      expectClose(studentTCdf(-t, degrees), 1 - value, rounding(1e-14));
    }
  });

  it("t quantiles to 13 digits, far tails included", () => {
    for (const [p, degrees, value] of [
      [0.975, 3, 3.1824463052837095],
      [1e-10, 1, -3183098861.8379068],
      [1e-6, 5, -24.771029720515944],
      [0.4, 12, -0.25903274567688706],
      [0.001, 40, -3.3068777140858225],
      [0.025, 100000, -1.9599877075346095],
    ]) {
      expectClose(studentTQuantile(p, degrees), value, rounding(1e-13));
    }
  });

  it("chi-square probabilities to 13 digits in both tails", () => {
    for (const [x, degrees, lower, upper] of [
      [0.001, 1, 0.02522712063003961, 0.9747728793699604],
      [1, 0.5, 0.8464864041916775, 0.15351359580832247],
      [3, 4, 0.4421745996289254, 0.5578254003710745],
      [18.3, 10, 0.9498909385885376, 0.050109061411462465],
      [80, 50, 0.9955173434344268, 0.004482656565573204],
      [200, 100, 0.9999999882154993, 1.1784500720979422e-8],
      [1000, 1100, 0.014409727889913472, 0.9855902721100865],
    ]) {
      expectClose(chiSquareCdf(x, degrees), lower, rounding(1e-13));
      expectClose(chiSquareUpper(x, degrees), upper, rounding(1e-13));
    }
  });

  it("F probabilities to 13 digits in both tails", () => {
    for (const [f, above, below, lower, upper] of [
      [119.8, 5, 5, 0.999966428663825, 0.00003357133617497828],
      [0.01, 3, 7, 0.0015047529598883, 0.9984952470401117],
      [2.5, 1, 30, 0.8756665799534348, 0.12433342004656524],
      [1.1, 200, 300, 0.7728736711229192, 0.22712632887708087],
      [15.66, 3, 7, 0.9982664810372384, 0.0017335189627616578],
    ]) {
      expectClose(fCdf(f, above, below), lower, rounding(1e-13));
      expectClose(fUpper(f, above, below), upper, rounding(1e-13));
    }
  });

  it("ln gamma to 14 digits and the incomplete beta function to 13", () => {
    for (const [x, value] of [
      [0.001, 6.907178885383853],
      [0.5, 0.5723649429247001],
      [1.5, -0.12078223763524522],
      [3.7, 1.4280723266653879],
      [10, 12.80182748008147],
      [123.4, 469.3360974421906],
      [1e6, 12815504.569147613],
    ]) {
      expectClose(logGamma(x), value, {
        relative: 1e-14,
        absolute: 3e-15,
        because: "a difference of terms of size 20",
      });
    }
    for (const [a, b, x, value] of [
      [0.5, 0.5, 0.3, 0.36901011956554536],
      [2, 3, 0.4, 0.5248],
      [30, 20, 0.7, 0.9300129066994927],
      [500, 1, 0.99, 0.006570483042414633],
      [0.01, 5, 0.001, 0.9527958800070773],
      [50000, 0.5, 0.9999, 0.001565019762172559],
    ]) {
      // The last case amplifies the rounding of 0.9999 itself by 5e4 x 1e-16.
      const tolerance =
        a === 50000 ? { relative: 1e-11, because: "x^50000 amplifies the rounding of x" } : rounding(1e-13);
      expectClose(incompleteBeta(a, b, x).lower, value, tolerance);
    }
    expect(incompleteBeta(2, 3, 0.4).upper).toBeCloseTo(0.4752, 14);
  });
});
