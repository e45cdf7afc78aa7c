/**
 * The chi-square law. Role: limits of variances and capability indices, checks of standardised innovations. Degrees of
 * freedom need not be whole; they must be positive and finite (`bad-degrees`). Negative x has probability 0.
 */
import { incompleteGamma, poissonTerm } from "./gamma.ts";
import { invertCdf } from "./invert.ts";
import { checkProbability, normalQuantile } from "./normal.ts";
import { checkDegrees } from "./student-t.ts";

/** Density at x. */
export function chiSquarePdf(x: number, degrees: number): number {
  checkDegrees(degrees);
  if (x < 0) return 0;
  if (x === 0) return degrees === 2 ? 0.5 : degrees < 2 ? Infinity : 0;
  return (poissonTerm(degrees / 2, x / 2) * (degrees / 2)) / x;
}

/** Probability of a value <= x, relatively accurate when small. */
export function chiSquareCdf(x: number, degrees: number): number {
  checkDegrees(degrees);
  return x <= 0 ? 0 : incompleteGamma(degrees / 2, x / 2).lower;
}

/** Probability of a value > x, relatively accurate when small. */
export function chiSquareUpper(x: number, degrees: number): number {
  checkDegrees(degrees);
  return x <= 0 ? 1 : incompleteGamma(degrees / 2, x / 2).upper;
}

/** The x with chiSquareCdf(x) = p; 0 and Infinity at p = 0 and 1. Starts from E. B. Wilson and M. M. Hilferty (1931). */
export function chiSquareQuantile(p: number, degrees: number): number {
  checkProbability(p);
  checkDegrees(degrees);
  if (p === 0 || p === 1) return p === 0 ? 0 : Infinity;
  const spread = 2 / (9 * degrees);
  const start = degrees * Math.max(1e-3, 1 - spread + normalQuantile(p) * Math.sqrt(spread)) ** 3;
  let high = Math.max(1, 2 * start);
  while (chiSquareUpper(high, degrees) > 1 - p) high *= 2;
  const law = {
    cdf: (x: number) => chiSquareCdf(x, degrees),
    upper: (x: number) => chiSquareUpper(x, degrees),
    pdf: (x: number) => chiSquarePdf(x, degrees),
  };
  return invertCdf(p, law, 0, high, start, 0);
}
