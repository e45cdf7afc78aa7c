/** Student's t, chi-square and F: what holds for each of the three laws. Printed tables are in test/published. */
import { describe, expect, it } from "vitest";
import {
  chiSquareCdf,
  chiSquarePdf,
  chiSquareQuantile,
  chiSquareUpper,
  fCdf,
  fQuantile,
  fUpper,
  normalCdf,
  studentTCdf,
  studentTPdf,
  studentTQuantile,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const because = "an exact identity; rounding of a few dozen operations";
const probabilities = [1e-9, 1e-3, 0.025, 0.3, 0.5, 0.8, 0.975, 0.9999];

describe("Student's t", () => {
  it("returns p for the quantile of p, from a tenth to a million degrees of freedom", () => {
    for (const degrees of [0.1, 1, 2.5, 9, 60, 1e6]) {
      for (const p of probabilities) {
        expectClose(studentTCdf(studentTQuantile(p, degrees), degrees), p, { relative: 1e-12, because });
      }
    }
  });

  it("is Cauchy's law for one degree of freedom and has a closed form for two", () => {
    for (const t of [-40, -1, -0.2, 0, 0.7, 3]) {
      expectClose(studentTCdf(t, 1), 0.5 + Math.atan(t) / Math.PI, { absolute: 5e-15, because });
      expectClose(studentTPdf(t, 1), 1 / (Math.PI * (1 + t * t)), { relative: 1e-14, because });
      expectClose(studentTCdf(t, 2), 0.5 + t / (2 * Math.sqrt(2 + t * t)), { absolute: 5e-15, because });
    }
  });

  it("becomes normal", () => {
    const because = "the difference is of order 1/(4 degrees) = 2.5e-9";
    for (const t of [-3, -1, 0.5]) expectClose(studentTCdf(t, 1e8), normalCdf(t), { absolute: 2.5e-9, because });
  });

  it("has the density that is the slope of its distribution", () => {
    for (const [t, degrees] of [
      [0, 3],
      [-2, 5],
      [1, 200],
    ]) {
      const slope = (studentTCdf(t + 1e-5, degrees) - studentTCdf(t - 1e-5, degrees)) / 2e-5;
      expectClose(studentTPdf(t, degrees), slope, { absolute: 1e-9, because: "central difference, h = 1e-5" });
    }
  });

  it("has infinite ends and refuses what is no number of degrees", () => {
    expect([studentTQuantile(0, 3), studentTQuantile(1, 3), studentTQuantile(0.5, 3)]).toEqual([
      -Infinity,
      Infinity,
      0,
    ]);
    expect([studentTCdf(-Infinity, 3), studentTCdf(Infinity, 3)]).toEqual([0, 1]);
    for (const degrees of [0, -2, Infinity, Number.NaN]) {
      expect(refusalCode(() => studentTCdf(1, degrees))).toBe("bad-degrees");
    }
    expect(refusalCode(() => studentTQuantile(2, 3))).toBe("bad-probability");
    expect(refusalCode(() => studentTCdf(Number.NaN, 3))).toBe("not-a-number");
  });
});

describe("chi-square", () => {
  it("returns p for the quantile of p, from a tenth to ten thousand degrees of freedom", () => {
    for (const degrees of [0.1, 1, 2, 7.5, 100, 1e4]) {
      for (const p of probabilities) {
        const x = chiSquareQuantile(p, degrees);
        expectClose(chiSquareCdf(x, degrees), p, { relative: 1e-12, because });
        expectClose(chiSquareUpper(x, degrees), 1 - p, { relative: 1e-12, because });
      }
    }
  });

  it("is the square of a normal for one degree of freedom, exponential for two", () => {
    for (const x of [0.01, 1, 9, 40]) {
      expectClose(chiSquareUpper(x, 1), 2 * normalCdf(-Math.sqrt(x)), { relative: 1e-13, because });
      expectClose(chiSquareUpper(x, 2), Math.exp(-x / 2), { relative: 1e-13, because });
      expectClose(chiSquarePdf(x, 2), Math.exp(-x / 2) / 2, { relative: 1e-13, because });
    }
    expect([chiSquareCdf(-1, 3), chiSquareUpper(-1, 3), chiSquarePdf(-1, 3)]).toEqual([0, 1, 0]);
    expect([chiSquarePdf(0, 1), chiSquarePdf(0, 2), chiSquarePdf(0, 3)]).toEqual([Infinity, 0.5, 0]);
    expect([chiSquareQuantile(0, 3), chiSquareQuantile(1, 3)]).toEqual([0, Infinity]);
  });
});

describe("F", () => {
  it("returns p for the quantile of p", () => {
    for (const [above, below] of [
      [1, 1],
      [3, 7],
      [40, 2.5],
      [500, 800],
    ]) {
      for (const p of probabilities) {
        const f = fQuantile(p, above, below);
        expectClose(fCdf(f, above, below), p, { relative: 1e-12, because });
        expectClose(fUpper(f, above, below), 1 - p, { relative: 1e-12, because });
      }
    }
  });

  it("is the square of t for one degree above, and its reciprocal with the degrees exchanged", () => {
    for (const t of [0.1, 1, 4]) {
      expectClose(fUpper(t * t, 1, 9), 2 * studentTCdf(-t, 9), { relative: 1e-13, because });
      expectClose(fCdf(t, 4, 11), fUpper(1 / t, 11, 4), { relative: 1e-13, because });
    }
    expect([fCdf(0, 2, 3), fUpper(-1, 2, 3), fCdf(Infinity, 2, 3)]).toEqual([0, 1, 1]);
    expect([fQuantile(0, 2, 3), fQuantile(1, 2, 3)]).toEqual([0, Infinity]);
    expect(refusalCode(() => fCdf(1, 0, 3))).toBe("bad-degrees");
    expect(refusalCode(() => fQuantile(0.5, 3, Number.NaN))).toBe("bad-degrees");
  });
});
