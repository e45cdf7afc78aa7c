import { describe, expect, it } from "vitest";
import { leastSquares, nonlinearLeastSquares, random } from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

/** Rosenbrock's valley (1960): residuals 10 (y - x^2), 1 - x; minimum 0 at (1, 1). */
const valley = {
  count: 2,
  residuals: (p: Float64Array, out: Float64Array) => {
    out[0] = 10 * (p[1] - p[0] * p[0]);
    out[1] = 1 - p[0];
  },
};

const at = [0, 1, 2, 3, 4, 5, 6, 7];
const draw = random("decay");
const measured = at.map((t) => 5 * Math.exp(-0.4 * t) + 0.01 * draw.normal());
const decay = {
  count: at.length,
  start: [1, 1],
  residuals: (p: Float64Array, out: Float64Array) => {
    for (let i = 0; i < at.length; i++) out[i] = p[0] * Math.exp(-p[1] * at[i]) - measured[i];
  },
};

describe("nonlinear least squares", () => {
  it("follows Rosenbrock's valley to its end", () => {
    const fit = nonlinearLeastSquares({ ...valley, start: [-1.2, 1] });
    expect(fit.converged).toBe(true);
    expectAllClose(fit.parameters, [1, 1], { absolute: 1e-9, because: "a zero residual is found to rounding" });
    // As many parameters as residuals: nothing is left to judge the noise by.
    expect([fit.degreesOfFreedom, fit.residualSd, fit.covariance]).toEqual([0, null, null]);
  });

  it("stops on the wall of a box, where the constrained minimum of the valley is known", () => {
    // x <= 0.5: the minimum is (0.5, 0.25) with sum of squares 0.25.
    const fit = nonlinearLeastSquares({ ...valley, start: [-1.2, 1], lower: [-2, -2], upper: [0.5, 2] });
    expect(fit.converged).toBe(true);
    expectAllClose(fit.parameters, [0.5, 0.25], { absolute: 1e-9, because: "quadratic in the free parameter" });
    expectClose(fit.residualSumOfSquares, 0.25, { relative: 1e-12, because: "(1 - 0.5)^2" });
    expect(fit.atBound).toEqual([true, false]);
    expect(fit.degreesOfFreedom).toBe(1);
    expect(fit.standardErrors?.[0]).toBe(0);
  });

  it("holds a parameter on a lower wall too", () => {
    // x >= 1.5: the minimum is (1.5, 2.25) with sum of squares 0.25.
    const fit = nonlinearLeastSquares({ ...valley, start: [3, 1], lower: [1.5, -2], upper: [4, 4] });
    expectAllClose(fit.parameters, [1.5, 2.25], { absolute: 1e-9, because: "quadratic in the free parameter" });
    expect([fit.converged, ...fit.atBound]).toEqual([true, true, false]);
  });

  it("holds a parameter whose bounds coincide, and starts outside are brought in", () => {
    const fit = nonlinearLeastSquares({ ...decay, start: [9, 3], lower: [0, 0.4], upper: [8, 0.4] });
    expect(fit.parameters[1]).toBe(0.4);
    const X = Float64Array.from(at, (t) => Math.exp(-0.4 * t));
    const linear = leastSquares(X, at.length, 1, Float64Array.from(measured));
    const because = "with the rate held the problem is linear: a second route";
    expectClose(fit.parameters[0], linear.coefficients[0], { relative: 1e-10, because });
    expectClose(fit.standardErrors?.[0] ?? 0, linear.standardErrors[0], { relative: 1e-7, because });
    expect(fit.degreesOfFreedom).toBe(7);
  });

  it("by differences equals the written Jacobian", () => {
    const jacobian = (p: Float64Array, out: Float64Array) => {
      at.forEach((t, i) => {
        out[2 * i] = Math.exp(-p[1] * t);
        out[2 * i + 1] = -p[0] * t * Math.exp(-p[1] * t);
      });
    };
    const written = nonlinearLeastSquares({ ...decay, jacobian });
    const differenced = nonlinearLeastSquares(decay);
    expect(written.converged && differenced.converged).toBe(true);
    const because = "central differences carry about ten digits";
    expectAllClose(differenced.parameters, written.parameters, { relative: 1e-9, because });
    expectAllClose(differenced.covariance ?? [], written.covariance ?? [], { relative: 1e-7, because });
  });

  it("has 95 % intervals that cover about 95 % of simulated truths", () => {
    const noise = random("coverage");
    let covered = 0;
    const trials = 400;
    for (let trial = 0; trial < trials; trial++) {
      const data = at.map((t) => 5 * Math.exp(-0.4 * t) + 0.05 * noise.normal());
      const fit = nonlinearLeastSquares({
        ...decay,
        residuals: (p, out) => {
          for (let i = 0; i < at.length; i++) out[i] = p[0] * Math.exp(-p[1] * at[i]) - data[i];
        },
      });
      // 2.447: t table, six degrees of freedom.
      if (Math.abs(fit.parameters[1] - 0.4) <= 2.447 * (fit.standardErrors?.[1] ?? 0)) covered++;
    }
    expectClose(covered / trials, 0.95, { absolute: 0.035, because: "three standard errors of a share of 400 trials" });
  });

  it("walks around places where the model does not exist", () => {
    const fit = nonlinearLeastSquares({
      count: 3,
      start: [0.1],
      residuals: (p, out) => out.set([Math.sqrt(4 - p[0]) - 1, 0.5 * Math.sqrt(4 - p[0]) - 0.5, p[0] - 3]),
    });
    expect(fit.converged).toBe(true);
    expectClose(fit.parameters[0], 3, { absolute: 1e-7, because: "zero residual at 3, model undefined beyond 4" });
  });

  it("says so when two parameters cannot be told apart, and when the steps run out", () => {
    const twins = nonlinearLeastSquares({
      count: 3,
      start: [1, 1],
      residuals: (p, out) => out.set([p[0] + p[1] - 1, 2 * (p[0] + p[1]) - 2.1, p[0] + p[1] - 0.9]),
    });
    expect(twins.covariance).toBeNull();
    expectClose(twins.parameters[0] + twins.parameters[1], 6.1 / 6, { relative: 1e-9, because: "their sum is fixed" });
    const short = nonlinearLeastSquares({ ...valley, start: [-1.2, 1], maxSteps: 3 });
    expect([short.converged, short.stop]).toEqual([false, "limit"]);
  });

  it("refuses crossed bounds, starts that are no numbers, and fewer residuals than parameters", () => {
    expect(refusalCode(() => nonlinearLeastSquares({ ...decay, lower: [2, 0], upper: [1, 9] }))).toBe("bad-bounds");
    expect(refusalCode(() => nonlinearLeastSquares({ ...decay, lower: [2] }))).toBe("bad-bounds");
    expect(refusalCode(() => nonlinearLeastSquares({ ...decay, start: [1, Number.NaN] }))).toBe("not-a-number");
    expect(refusalCode(() => nonlinearLeastSquares({ ...decay, start: [1, -1e6] }))).toBe("not-a-number");
    expect(refusalCode(() => nonlinearLeastSquares({ ...valley, start: [1, 1, 1] }))).toBe("too-few-rows");
  });
});
