/**
 * Response surfaces of a CVD tungsten process, NIST/SEMATECH e-Handbook of Statistical Methods, section 5.4.7.3
 * (https://doi.org/10.18434/M32189, U.S. Government work). Runs from V. Czitrom and P. D. Spagon (1997), Statistical Case
 * Studies for Industrial Process Improvement, chapter 15: 11 runs of an inscribed central composite design in pressure
 * (coded P) and gas ratio (coded H). The printed full model of stress mixes coded terms with the square of the UNCODED
 * ratio (an erratum of the page); it is reproduced as printed.
 */
import { describe, expect, it } from "vitest";
import { fUpper, type LinearFit, leastSquares } from "../../engine/index.ts";
import { expectAllClose, expectClose } from "../support/close.ts";

interface Run {
  P: number;
  H: number;
  ratio: number;
  uniformity: number;
  stress: number;
}

const runs: Run[] = [
  { P: 1, H: 0, ratio: 6, uniformity: 4.6, stress: 8.04 },
  { P: 0, H: 0, ratio: 6, uniformity: 6.2, stress: 7.78 },
  { P: 0.71, H: -0.71, ratio: 3.17, uniformity: 3.4, stress: 7.58 },
  { P: -0.71, H: 0.71, ratio: 8.83, uniformity: 6.9, stress: 7.27 },
  { P: -1, H: 0, ratio: 6, uniformity: 7.3, stress: 6.49 },
  { P: 0, H: 0, ratio: 6, uniformity: 6.4, stress: 7.69 },
  { P: -0.71, H: -0.71, ratio: 3.17, uniformity: 8.6, stress: 6.66 },
  { P: 0, H: -1, ratio: 2, uniformity: 6.3, stress: 7.16 },
  { P: 0.71, H: 0.71, ratio: 8.83, uniformity: 5.1, stress: 8.33 },
  { P: 0, H: 1, ratio: 10, uniformity: 5.4, stress: 8.19 },
  { P: 0, H: 0, ratio: 6, uniformity: 5.0, stress: 7.9 },
];

function surface(response: "uniformity" | "stress", terms: (run: Run) => number[]): LinearFit {
  const rows = runs.map(terms);
  const y = Float64Array.from(runs, (run) => run[response]);
  return leastSquares(Float64Array.from(rows.flat()), rows.length, rows[0].length, y);
}

/** F of the whole model against its residuals. */
function modelF(fitted: LinearFit): number {
  const r = fitted.rSquared ?? Number.NaN;
  return r / (fitted.coefficients.length - 1) / ((1 - r) / fitted.degreesOfFreedom);
}

const last = (digits: number) => ({
  absolute: 0.51 * 10 ** -digits,
  because: `printed to ${digits} decimals; 0.51 leaves room for exact halves`,
});

describe("the e-Handbook's CVD tungsten response surfaces (section 5.4.7.3)", () => {
  it("uniformity, full quadratic: coefficients, standard errors and summary as printed", () => {
    const fitted = surface("uniformity", ({ P, H }) => [1, P, H, P * H, P * P, H * H]);
    expectAllClose(fitted.coefficients, [5.86613, -1.90967, -0.22408, 1.68617, 0.13373, 0.03373], last(5));
    expectAllClose(fitted.standardErrors, [0.41773, 0.36103, 0.36103, 0.71766, 0.60733, 0.60733], last(5));
    expectClose(fitted.residualSd, 0.7235, last(4));
    expect(fitted.degreesOfFreedom).toBe(5);
    expectClose(fitted.rSquared ?? 0, 0.8716, last(4));
    expectClose(modelF(fitted), 6.787, last(3));
    expectClose(fUpper(modelF(fitted), 5, 5), 0.0278, last(4));
  });

  it("uniformity, reduced model: coefficients, analysis of variance and lack of fit as printed", () => {
    const fitted = surface("uniformity", ({ P, H }) => [1, P, H, P * H]);
    expectAllClose(fitted.coefficients, [5.9273, -1.9097, -0.2241, 1.6862], last(4));
    expectAllClose(fitted.standardErrors, [0.1853, 0.3066, 0.3066, 0.6095], last(4));
    expectClose(fitted.residualSd, 0.6145, last(4));
    expectClose(fitted.rSquared ?? 0, 0.8703, last(4));
    expectClose(fitted.residualSumOfSquares, 2.643, last(3));
    expectClose(modelF(fitted), 15.66, last(2));
    expectClose(fUpper(modelF(fitted), 3, 7), 0.0017, last(4));
    // Pure error from the three centre runs 6.2, 6.4, 5.0.
    const pureError = 1.1467;
    const lackF = (fitted.residualSumOfSquares - pureError) / 5 / (pureError / 2);
    expectClose(lackF, 0.52, last(2));
    expectClose(fUpper(lackF, 5, 2), 0.7588, { absolute: 2e-4, because: "pure error is taken as printed, 4 decimals" });
  });

  it("stress, full quadratic: as printed once H squared is the square of the uncoded ratio", () => {
    const fitted = surface("stress", ({ P, H, ratio }) => [1, P, H, P * H, P * P, ratio * ratio]);
    expectAllClose(fitted.coefficients, [8.056791, 0.735933, 0.852099, 0.069431, -0.528848, -0.007414], last(6));
    expectAllClose(fitted.standardErrors, [0.179561, 0.038524, 0.198192, 0.076578, 0.064839, 0.004057], last(6));
    expectClose(fitted.residualSd, 0.07721, last(5));
    expectClose(fitted.rSquared ?? 0, 0.9917, last(4));
    expectClose(modelF(fitted), 119.8, last(1));
    expectClose(fUpper(modelF(fitted), 5, 5), 3.358e-5, { absolute: 0.51e-8, because: "printed to four digits" });
  });

  it("stress, reduced model: coefficients, standard errors and summary as printed", () => {
    const fitted = surface("stress", ({ P, H }) => [1, P, H, P * P]);
    expectAllClose(fitted.coefficients, [7.7341, 0.73593, 0.49686, -0.49426], { ...last(5), absolute: 0.51e-4 });
    expectAllClose(fitted.standardErrors, [0.03715, 0.04407, 0.04407, 0.07094], last(5));
    expectClose(fitted.residualSd, 0.0883, last(4));
    expectClose(fitted.rSquared ?? 0, 0.9848, last(4));
    expectClose(modelF(fitted), 151.5, last(1));
    expectClose(fUpper(modelF(fitted), 3, 7), 9.9e-7, { absolute: 0.51e-8, because: "printed to two digits" });
  });
});
