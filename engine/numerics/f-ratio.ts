/**
 * The law of the ratio of two variances (Fisher's F). Role: does a term belong in a model, does a fit lack something.
 * Degrees of freedom of numerator and denominator must be positive and finite (`bad-degrees`). Through the incomplete
 * beta function (Abramowitz and Stegun 1964, 26.6.2; from memory).
 */
import { betaTerm, incompleteBeta } from "./beta.ts";
import type { TailPair } from "./gamma.ts";
import { invertCdf } from "./invert.ts";
import { checkProbability } from "./normal.ts";
import { checkDegrees } from "./student-t.ts";

function tails(f: number, above: number, below: number): TailPair {
  checkDegrees(above);
  checkDegrees(below);
  if (f <= 0) return { lower: 0, upper: 1 };
  if (f === Infinity) return { lower: 1, upper: 0 };
  const total = above * f + below;
  return incompleteBeta(above / 2, below / 2, (above * f) / total, below / total);
}

/** Probability of a ratio <= f, relatively accurate when small. */
export function fCdf(f: number, above: number, below: number): number {
  return tails(f, above, below).lower;
}

/** Probability of a ratio > f, relatively accurate when small: the p-value of an F test. */
export function fUpper(f: number, above: number, below: number): number {
  return tails(f, above, below).upper;
}

/** The f with fCdf(f) = p; 0 and Infinity at p = 0 and 1. */
export function fQuantile(p: number, above: number, below: number): number {
  checkProbability(p);
  checkDegrees(above);
  checkDegrees(below);
  if (p === 0 || p === 1) return p === 0 ? 0 : Infinity;
  let high = 2;
  while (fUpper(high, above, below) > 1 - p && high < Number.MAX_VALUE / 4) high *= 2;
  const law = {
    cdf: (f: number) => fCdf(f, above, below),
    upper: (f: number) => fUpper(f, above, below),
    pdf: (f: number) => {
      const total = above * f + below;
      return betaTerm(above / 2, below / 2, (above * f) / total, below / total) / f;
    },
  };
  return invertCdf(p, law, 0, high, 1, 0);
}
