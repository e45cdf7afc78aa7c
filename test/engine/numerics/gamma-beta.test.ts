import { describe, expect, it } from "vitest";
import { erf, incompleteBeta, incompleteGamma, logGamma } from "../../../engine/index.ts";
import { betaTerm } from "../../../engine/numerics/beta.ts";
import { poissonTerm, stirlingError } from "../../../engine/numerics/gamma.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const because = "an exact identity; rounding of a few dozen operations";

describe("ln gamma", () => {
  it("equals ln of factorials", () => {
    let factorial = 1;
    for (let n = 1; n <= 20; n++) {
      expectClose(logGamma(n), Math.log(factorial), { relative: 1e-14, absolute: 4e-15, because });
      factorial *= n;
    }
  });

  it("obeys the duplication formula of Legendre", () => {
    for (const x of [0.01, 0.3, 2.2, 9.99, 10.01, 400]) {
      const right = logGamma(2 * x) + (1 - 2 * x) * Math.LN2 + 0.5 * Math.log(Math.PI);
      expectClose(logGamma(x) + logGamma(x + 0.5), right, { relative: 1e-14, absolute: 1e-14, because });
    }
  });

  it("equals the exact logarithm at 10, where Stirling's series is worst", () => {
    expectClose(logGamma(10), Math.log(362880), { relative: 1e-15, because: "one or two roundings" });
    // The series' own value there, ln(9!) less its leading terms, to 40 digits (mpmath 1.3).
    expectClose(stirlingError(10), 0.008330563433362871, { absolute: 2e-18, because: "nine terms leave 1e-18" });
  });

  it("is refused at and below zero", () => {
    for (const x of [0, -1.5, Number.NaN]) expect(refusalCode(() => logGamma(x))).toBe("out-of-domain");
  });
});

describe("the incomplete gamma function", () => {
  it("is exponential for a = 1 and the error function for a = 1/2", () => {
    for (const x of [1e-8, 0.3, 1.9, 2.1, 15, 300]) {
      expectClose(incompleteGamma(1, x).upper, Math.exp(-x), {
        relative: 2e-13,
        because: "exp(-300) amplifies rounding",
      });
      expectClose(incompleteGamma(1, x).lower, -Math.expm1(-x), { relative: 1e-14, because });
      expectClose(incompleteGamma(0.5, x * x).lower, erf(x), { relative: 1e-14, because });
    }
  });

  it("obeys its recurrence in a on both sides of the switch at x = a + 1", () => {
    for (const [a, x] of [
      [0.2, 0.1],
      [3, 3.99],
      [3, 4.01],
      [50, 40],
      [50, 70],
    ]) {
      const step = poissonTerm(a, x);
      expectClose(incompleteGamma(a, x).lower - incompleteGamma(a + 1, x).lower, step, { absolute: 1e-14, because });
    }
  });

  it("knows its ends and its domain", () => {
    expect(incompleteGamma(2, 0)).toEqual({ lower: 0, upper: 1 });
    expect(incompleteGamma(2, Infinity)).toEqual({ lower: 1, upper: 0 });
    expect(refusalCode(() => incompleteGamma(0, 1))).toBe("out-of-domain");
    expect(refusalCode(() => incompleteGamma(1, -1))).toBe("out-of-domain");
  });
});

describe("the incomplete beta function", () => {
  it("is symmetric: I_x(a, b) = 1 - I_(1-x)(b, a)", () => {
    for (const [a, b, x] of [
      [0.5, 0.5, 0.25],
      [2, 30, 0.0625],
      [700, 20, 0.96875],
      [1e-3, 5, 0.5],
    ]) {
      expectClose(incompleteBeta(a, b, x).lower, incompleteBeta(b, a, 1 - x).upper, { relative: 1e-15, because });
    }
  });

  it("is a power for b = 1 and the arcsine law for a = b = 1/2", () => {
    for (const x of [0.001, 0.2, 0.5, 0.93, 0.9999]) {
      expectClose(incompleteBeta(7, 1, x).lower, x ** 7, { relative: 1e-14, because });
      const arcsine = (2 / Math.PI) * Math.asin(Math.sqrt(x));
      expectClose(incompleteBeta(0.5, 0.5, x).lower, arcsine, { relative: 1e-14, because });
    }
  });

  it("sums binomial terms: the chance of 3 or more of 10 at 0.3", () => {
    // 1 - sum over k = 0..2 of C(10, k) 0.3^k 0.7^(10 - k).
    const fewer = 0.7 ** 10 + 10 * 0.3 * 0.7 ** 9 + 45 * 0.09 * 0.7 ** 8;
    expectClose(incompleteBeta(3, 8, 0.3).lower, 1 - fewer, { relative: 1e-14, because });
  });

  it("obeys its recurrence in a far into large arguments", () => {
    for (const [a, b, x] of [
      [3, 4, 0.3],
      [400, 90, 0.8],
      [2e5, 0.5, 0.99999],
    ]) {
      // I_x(a, b) - I_x(a + 1, b) = x^a (1 - x)^b / (a B(a, b)).
      const step = betaTerm(a, b, x, 1 - x) / a;
      const difference = incompleteBeta(a, b, x).lower - incompleteBeta(a + 1, b, x).lower;
      expectClose(difference, step, { absolute: 1e-14, because });
    }
  });

  it("is refused outside its domain", () => {
    for (const [a, b, x] of [
      [0, 1, 0.5],
      [1, -1, 0.5],
      [1, 1, 1.01],
      [1, 1, Number.NaN],
    ]) {
      expect(refusalCode(() => incompleteBeta(a, b, x))).toBe("out-of-domain");
    }
  });
});
