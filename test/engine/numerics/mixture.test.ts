import { describe, expect, it } from "vitest";
import {
  integrate,
  logSumExp,
  mixtureBetween,
  mixtureCdf,
  mixtureMoments,
  mixturePdf,
  mixtureQuantile,
  normalCdf,
  normalQuantile,
  random,
  weightsFromLogs,
} from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const three = { weights: [0.7, 0.2, 0.1], means: [2, 2.1, -5], sds: [0.01, 0.3, 1] };

describe("a mixture of normals", () => {
  it("of one part is that part", () => {
    const one = { weights: [3], means: [10], sds: [2] };
    expectClose(mixtureCdf(11, one), normalCdf(11, 10, 2), { relative: 1e-15, because: "the same" });
    for (const p of [1e-8, 0.025, 0.5, 0.99]) {
      expectClose(mixtureQuantile(p, one), normalQuantile(p, 10, 2), { relative: 1e-15, because: "the same" });
    }
  });

  it("returns p for the quantile of p, parts far apart and of unlike width", () => {
    for (const mixture of [three, { weights: [0.5, 0.5], means: [-100, 100], sds: [1, 1e-6] }]) {
      for (const p of [1e-12, 0.01, 0.05, 0.1, 0.3, 0.5, 0.75, 0.95, 0.999, 1 - 1e-12]) {
        const x = mixtureQuantile(p, mixture);
        // Between the far parts the distribution is flat at one half: any x there is right.
        const absolute = 1e-15 + 2e-15 * Math.abs(x) * mixturePdf(x, mixture);
        expectClose(mixtureCdf(x, mixture), p, {
          absolute,
          because: "x ends within 2e-15 of itself; times the density",
        });
      }
    }
  });

  it("keeps the digits of its upper tail", () => {
    const mirrored = { ...three, means: three.means.map((m) => -m) };
    for (const p of [0.9, 0.999, 1 - 2 ** -40]) {
      const because = "mirror image; both solved in their own small tail";
      expectClose(mixtureQuantile(p, three), -mixtureQuantile(1 - p, mirrored), { relative: 1e-13, because });
    }
  });

  it("has the moments and probabilities of its own density, by quadrature", () => {
    const smooth = { weights: [1, 3], means: [0, 1], sds: [0.7, 0.5] };
    const over = (f: (x: number) => number) => integrate(f, -6, 6, 64);
    const { mean, variance } = mixtureMoments(smooth);
    const because = "64-point quadrature over more than eight standard deviations";
    expectClose(
      over((x) => x * mixturePdf(x, smooth)),
      mean,
      { absolute: 1e-9, because },
    );
    expectClose(
      over((x) => (x - mean) ** 2 * mixturePdf(x, smooth)),
      variance,
      { absolute: 1e-9, because },
    );
    expectClose(
      integrate((x) => mixturePdf(x, smooth), 0.2, 1.4),
      mixtureBetween(0.2, 1.4, smooth),
      {
        absolute: 1e-12,
        because: "20-point quadrature of a smooth density",
      },
    );
  });

  it("agrees with 20000 draws from itself", () => {
    const draw = random("mixture");
    let below = 0;
    for (let i = 0; i < 20000; i++) {
      const u = draw.uniform();
      const part = u < 0.7 ? 0 : u < 0.9 ? 1 : 2;
      if (draw.normal(three.means[part], three.sds[part]) <= 2) below++;
    }
    expectClose(below / 20000, mixtureCdf(2, three), { absolute: 0.011, because: "three standard errors of a share" });
  });

  it("ignores parts of no weight, whatever their place", () => {
    const padded = { weights: [0.7, 0, 0.2, 0.1], means: [2, 1e9, 2.1, -5], sds: [0.01, 1, 0.3, 1] };
    expect(mixtureQuantile(0.3, padded)).toBe(mixtureQuantile(0.3, three));
    expect([mixtureQuantile(0, three), mixtureQuantile(1, three)]).toEqual([-Infinity, Infinity]);
  });

  it("is refused when the lists are not a mixture", () => {
    const bad = [
      { weights: [], means: [], sds: [] },
      { weights: [1], means: [1, 2], sds: [1] },
      { weights: [-1, 2], means: [1, 2], sds: [1, 1] },
      { weights: [0, 0], means: [1, 2], sds: [1, 1] },
      { weights: [1], means: [Number.NaN], sds: [1] },
      { weights: [1], means: [0], sds: [0] },
    ];
    for (const mixture of bad) expect(refusalCode(() => mixtureCdf(0, mixture))).toBe("bad-mixture");
    expect(refusalCode(() => mixtureQuantile(1.5, three))).toBe("bad-probability");
  });
});

describe("sums of exponentials", () => {
  it("survive where the exponentials do not", () => {
    expectClose(logSumExp([-1e4, -1e4]), -1e4 + Math.LN2, { relative: 1e-15, because: "ln 2 more than each" });
    expectClose(logSumExp([1e4, 0]), 1e4, { relative: 1e-15, because: "the other is nothing" });
    expect([logSumExp([]), logSumExp([-Infinity])]).toEqual([-Infinity, -Infinity]);
    expect(refusalCode(() => logSumExp([0, Number.NaN]))).toBe("not-a-number");
  });

  it("turn log-likelihoods into weights that sum to one", () => {
    const weights = weightsFromLogs([-5000, -5000 + Math.log(3), -Infinity]);
    expectAllClose(weights, [0.25, 0.75, 0], { absolute: 1e-12, because: "exp of a rounding of 5000, 1e-12" });
    const own = Float64Array.of(1, 1);
    expect(weightsFromLogs(own, own)).toBe(own);
    expect(refusalCode(() => weightsFromLogs([-Infinity, -Infinity]))).toBe("no-weight");
  });
});
