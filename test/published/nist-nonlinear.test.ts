/**
 * Nonlinear least squares against the certified values of the NIST Statistical Reference Datasets, from both of their
 * starting points, with analytic and with differenced Jacobians. The certified values carry 11 digits.
 */
import { describe, expect, it } from "vitest";
import { nonlinearLeastSquares } from "../../engine/index.ts";
import { digitsAgreed, fewestDigits } from "../support/close.ts";
import { readNistNonlinear } from "../support/nist.ts";

interface Model {
  value(b: Float64Array, x: number): number;
  gradient(b: Float64Array, x: number): number[];
}

const saturation: Model = {
  value: (b, x) => b[0] * (1 - Math.exp(-b[1] * x)),
  gradient: (b, x) => [1 - Math.exp(-b[1] * x), b[0] * x * Math.exp(-b[1] * x)],
};
const power: Model = {
  value: (b, x) => b[0] * x ** b[1],
  gradient: (b, x) => [x ** b[1], b[0] * x ** b[1] * Math.log(x)],
};
const top = (b: Float64Array, x: number) => b[0] + x * (b[1] + x * (b[2] + x * b[3]));
const bottom = (b: Float64Array, x: number) => 1 + x * (b[4] + x * (b[5] + x * b[6]));
const cubicOverCubic: Model = {
  value: (b, x) => top(b, x) / bottom(b, x),
  gradient: (b, x) => {
    const d = bottom(b, x);
    const slope = -top(b, x) / (d * d);
    return [1 / d, x / d, x ** 2 / d, x ** 3 / d, slope * x, slope * x ** 2, slope * x ** 3];
  },
};

// Digits asked for: half a digit or more below what was measured on x64; Hahn1 and Thurber have seven strongly
// correlated parameters, so their sums of squares fix the parameters to fewer digits. Differences cost up to two more.
const cases = [
  { name: "Misra1a", model: saturation, digits: 10, errors: 9.5, differenced: 10, differencedErrors: 9 },
  { name: "DanWood", model: power, digits: 10.5, errors: 10.5, differenced: 10, differencedErrors: 9.5 },
  { name: "Hahn1", model: cubicOverCubic, digits: 9, errors: 9, differenced: 8, differencedErrors: 7 },
  { name: "Thurber", model: cubicOverCubic, digits: 7.5, errors: 7, differenced: 7, differencedErrors: 6.5 },
];

describe("nonlinear least squares on NIST's certified datasets", () => {
  for (const { name, model, digits, errors, differenced, differencedErrors } of cases) {
    for (const which of [0, 1] as const) {
      const data = readNistNonlinear(name);
      const n = data.estimates.length;
      const problem = {
        count: data.y.length,
        start: data.starts[which],
        residuals: (b: Float64Array, out: Float64Array) => {
          for (let i = 0; i < out.length; i++) out[i] = model.value(b, data.x[i]) - data.y[i];
        },
      };
      it(`${name} from start ${which + 1}: parameters to ${digits} digits, standard errors to ${errors}`, () => {
        const jacobian = (b: Float64Array, out: Float64Array) => {
          for (let i = 0; i < data.x.length; i++) out.set(model.gradient(b, data.x[i]), i * n);
        };
        const fit = nonlinearLeastSquares({ ...problem, jacobian });
        expect(fit.converged).toBe(true);
        expect(fewestDigits(fit.parameters, data.estimates)).toBeGreaterThanOrEqual(digits);
        expect(fewestDigits(fit.standardErrors ?? [], data.standardErrors)).toBeGreaterThanOrEqual(errors);
        expect(digitsAgreed(fit.residualSumOfSquares, data.residualSumOfSquares)).toBeGreaterThanOrEqual(10);
        expect(digitsAgreed(fit.residualSd ?? 0, data.residualSd)).toBeGreaterThanOrEqual(10);
      });
      it(`${name} from start ${which + 1} by differences: ${differenced} and ${differencedErrors} digits`, () => {
        const fit = nonlinearLeastSquares(problem);
        expect(fit.converged).toBe(true);
        expect(fewestDigits(fit.parameters, data.estimates)).toBeGreaterThanOrEqual(differenced);
        expect(fewestDigits(fit.standardErrors ?? [], data.standardErrors)).toBeGreaterThanOrEqual(differencedErrors);
      });
    }
  }
});
