/**
 * A deposition experiment fitted the way the program fits anything: 16 runs of silicon epitaxy, eight factors (R. N. Kackar and
 * A. C. Shoemaker 1986; A. C. Shoemaker, K.-L. Tsui and C. F. J. Wu 1991; data and what the letters mean in
 * test/fixtures/process). The papers' printed estimates were not at hand: the references are the closed form of an
 * orthogonal design, lm() of R 4.2.2 and the singular value decomposition of ml-matrix. Their conclusion is known (from
 * memory): time and nozzle position move the mean, rotation the scatter.
 */
import { Matrix, SingularValueDecomposition } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { fUpper, leastSquares, studentTCdf } from "../../engine/index.ts";
import { expectAllClose, expectClose } from "../support/close.ts";
import { readTable } from "../support/table.ts";

const factors = ["A", "B", "C", "D", "E", "F", "G", "H"] as const;
const means = readTable("process/si-epitaxy-means.csv");
const single = readTable("process/si-epitaxy-thicknesses.csv");

function designOf(table: typeof means, names: readonly string[]): number[][] {
  const columns = names.map((name) => table.numbers(name));
  return Array.from({ length: table.rows }, (_, i) => [1, ...columns.map((column) => column[i])]);
}

function fitOf(design: number[][], y: number[]) {
  return leastSquares(Float64Array.from(design.flat()), design.length, design[0].length, Float64Array.from(y));
}

const thickness = means.numbers("mean_thickness_um");
const lnVariance = means.numbers("s2").map(Math.log);
const design = designOf(means, factors);
const rounding = { relative: 1e-12, absolute: 1e-14, because: "rounding of sixteen additions" };

/** Two-sided chance of an estimate this many standard errors off zero. */
const byLuck = (fit: ReturnType<typeof fitOf>, at: number) =>
  2 * studentTCdf(-Math.abs(fit.coefficients[at] / fit.standardErrors[at]), fit.degreesOfFreedom);

describe("the two tables of the experiment", () => {
  it("agree: every mean and variance is that of its four thicknesses", () => {
    const key = (row: number[]) => row.join();
    const values = single.numbers("thickness_um");
    const singleDesign = designOf(single, factors);
    design.forEach((row, run) => {
      const own = values.filter((_, i) => key(singleDesign[i]) === key(row));
      expect(own.length).toBe(4);
      const mean = own.reduce((a, b) => a + b, 0) / 4;
      expectClose(thickness[run], mean, { absolute: 0.00051, because: "means are given to three decimals" });
      const variance = own.reduce((sum, v) => sum + (v - mean) ** 2, 0) / 3;
      expectClose(Math.exp(lnVariance[run]), variance, { absolute: 0.51e-5, because: "variances to five decimals" });
    });
  });
});

describe("mean thickness on eight factors", () => {
  const fit = fitOf(design, thickness);

  it("has the effects that an orthogonal design gives in closed form, half the difference of two averages", () => {
    const halves = design[0].map((_, j) => design.reduce((sum, row, i) => sum + row[j] * thickness[i], 0) / 16);
    expectAllClose(fit.coefficients, halves, rounding);
  });

  it("has the estimates, errors and summary of R's lm()", () => {
    expectAllClose(
      fit.coefficients,
      [14.361125, -0.040875, 0.005125, -0.062625, -0.394875, -0.01375, 0.04475, -0.043, 0.08975],
      rounding,
    );
    for (const error of fit.standardErrors) expectClose(error, 0.0244667686435528, rounding);
    expectClose(fit.residualSd, 0.0978670745742112, rounding);
    expectClose(fit.rSquared ?? 0, 0.97643631395954, rounding);
    const r = fit.rSquared ?? 0;
    expectClose(fUpper(r / 8 / ((1 - r) / 7), 8, 7), 5.09462654424e-5, { relative: 1e-10, because: "12 digits given" });
  });

  it("is moved by time first and nozzle position next, and by nothing else to one in a hundred", () => {
    const p = factors.map((_, j) => byLuck(fit, j + 1));
    expectClose(p[3], 8.52615612947232e-7, { relative: 1e-11, because: "R gives 15 digits of it" });
    expectClose(p[7], 0.00798279452528719, { relative: 1e-11, because: "R gives 15 digits of it" });
    expect(factors.filter((_, j) => p[j] < 0.01)).toEqual(["D", "H"]);
  });

  it("with those two alone has the errors of R's lm()", () => {
    const small = fitOf(designOf(means, ["D", "H"]), thickness);
    expectAllClose(small.coefficients, [14.361125, -0.394875, 0.08975], rounding);
    expectClose(small.standardErrors[1], 0.0326401195439928, rounding);
    expectClose(small.residualSd, 0.130560478175971, rounding);
    expectClose(small.rSquared ?? 0, 0.922117696035366, rounding);
  });
});

describe("scatter of thickness on eight factors", () => {
  const fit = fitOf(design, lnVariance);

  it("has the estimates and errors of R's lm() on ln(variance)", () => {
    expectAllClose(
      fit.coefficients,
      [
        -3.8580991729700176, 2.1063576334064269, 0.1012970643701833, 0.1493471923394489, -0.3459803257977087,
        0.1781718763995088, -0.3585668932042024, -0.0195917119441423, 0.084041504833738,
      ],
      rounding,
    );
    for (const error of fit.standardErrors) expectClose(error, 0.22158364612511, rounding);
    expectClose(fit.rSquared ?? 0, 0.932614970365956, rounding);
  });

  it("is moved by rotation alone, whose two settings differ e^2.1 times in standard deviation", () => {
    const p = factors.map((_, j) => byLuck(fit, j + 1));
    expectClose(p[0], 2.98488169952898e-5, { relative: 1e-11, because: "R gives 15 digits of it" });
    expect(factors.filter((_, j) => p[j] < 0.05)).toEqual(["A"]);
  });
});

describe("the 64 thicknesses on all factors and all pairs that are not the same as another", () => {
  // Pairs of a sixteen-run design repeat each other; AB..AH are seven different ones.
  const full = designOf(single, factors).map((row) => [...row, ...row.slice(2).map((x) => row[1] * x)]);

  it("agree with the singular value decomposition of ml-matrix", () => {
    const y = single.numbers("thickness_um");
    const fit = fitOf(full, y);
    const oracle = new SingularValueDecomposition(new Matrix(full)).solve(Matrix.columnVector(y)).to1DArray();
    expectAllClose(fit.coefficients, oracle, { relative: 1e-11, absolute: 1e-13, because: "rounding of 64 additions" });
    // With all sixteen runs fitted, what is left is the scatter within runs.
    const within = means.numbers("s2").reduce((a, b) => a + b, 0) / 16;
    expectClose(fit.residualSd ** 2, within, { absolute: 0.51e-5, because: "variances are given to five decimals" });
  });

  it("refuse a pair that repeats another instead of sharing it out", () => {
    const repeated = full.map((row) => [...row, row[2] * row[3]]);
    expect(() => fitOf(repeated, single.numbers("thickness_um"))).toThrow(/combination of the columns before it/);
  });
});
