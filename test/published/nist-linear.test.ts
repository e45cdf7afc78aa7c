/**
 * Linear least squares against the certified values of the NIST Statistical Reference Datasets (files and source in
 * test/fixtures/nist). Digits are those on which estimate and certified value agree, the fewest over all coefficients.
 */
import { describe, expect, it } from "vitest";
import { leastSquares } from "../../engine/index.ts";
import { digitsAgreed, expectClose, fewestDigits } from "../support/close.ts";
import { readNistLinear } from "../support/nist.ts";

function fitOf(name: string, degree?: number) {
  const data = readNistLinear(name);
  const rows = data.x.map((x) => (degree ? Array.from({ length: degree + 1 }, (_, k) => x[0] ** k) : [1, ...x]));
  const fit = leastSquares(Float64Array.from(rows.flat()), rows.length, rows[0].length, Float64Array.from(data.y));
  return { data, fit };
}

describe("linear least squares on NIST's certified datasets", () => {
  // Thresholds: what double precision leaves after the dataset's conditioning, about a digit below what was measured.
  const cases = [
    { name: "Norris", degree: undefined, estimates: 12, errors: 13, sd: 13, r: 13 },
    { name: "Longley", degree: undefined, estimates: 12, errors: 11.5, sd: 11.5, r: 13 },
    { name: "Wampler4", degree: 5, estimates: 7.5, errors: 13, sd: 14, r: 13 },
    // Ten powers of x near -6, not centred: condition about 1e10 once the columns are scaled. Measured 7.07 and 7.14.
    { name: "Filip", degree: 10, estimates: 7, errors: 7, sd: 9, r: 11 },
  ];
  for (const { name, degree, estimates, errors, sd, r } of cases) {
    it(`${name}: estimates agree to ${estimates} digits, their standard errors to ${errors}`, () => {
      const { data, fit } = fitOf(name, degree);
      expect(fewestDigits(fit.coefficients, data.estimates)).toBeGreaterThanOrEqual(estimates);
      expect(fewestDigits(fit.standardErrors, data.standardErrors)).toBeGreaterThanOrEqual(errors);
      expect(digitsAgreed(fit.residualSd, data.residualSd)).toBeGreaterThanOrEqual(sd);
      expect(digitsAgreed(fit.rSquared ?? Number.NaN, data.rSquared)).toBeGreaterThanOrEqual(r);
    });
  }

  it("Wampler1: the exact quintic is recovered to 9 digits with a residual that is rounding", () => {
    const { data, fit } = fitOf("Wampler1", 5);
    // Columns reach 3.2e6 and are nearly dependent (condition about 1e7): 16 - 7 digits remain.
    expect(fewestDigits(fit.coefficients, data.estimates)).toBeGreaterThanOrEqual(9);
    expectClose(fit.residualSd, 0, { absolute: 1e-8, because: "y reaches 3.4e6, whose rounding is 4e-10" });
    expect(data.residualSd).toBe(0);
  });

  it("Longley without scaled columns keeps 11 digits: Householder QR does not depend on units", () => {
    const data = readNistLinear("Longley");
    const X = Float64Array.from(data.x.flatMap((row) => [1, ...row]));
    const fit = leastSquares(X, 16, 7, Float64Array.from(data.y), { equilibrate: false });
    expect(fewestDigits(fit.coefficients, data.estimates)).toBeGreaterThanOrEqual(11);
  });
});
