/**
 * The gamma function's logarithm and the regularised incomplete gamma functions. Role: chi-square probabilities, and
 * the building blocks of the beta function. Prefactors are formed as C. Loader (2000), "Fast and accurate computation
 * of binomial probabilities", does (from memory): differences of large logarithms are never taken.
 */
import { refuse } from "../errors.ts";

const HALF_LOG_TWO_PI = 0.9189385332046728;

/** B_2k / (2k (2k - 1)), k = 1.., of Stirling's series (Abramowitz and Stegun 1964, 6.1.41). */
const STIRLING = [
  1 / 12,
  -1 / 360,
  1 / 1260,
  -1 / 1680,
  1 / 1188,
  -691 / 360360,
  1 / 156,
  -3617 / 122400,
  43867 / 244188,
];

/** Stirling's series for x >= 10, where its nine terms leave an error below 1e-17. */
function stirlingSeries(x: number): number {
  const square = 1 / (x * x);
  let sum = 0;
  for (let k = STIRLING.length - 1; k >= 0; k--) sum = sum * square + STIRLING[k];
  return sum / x;
}

/**
 * ln Gamma(x), x > 0, else refused (`out-of-domain`). Stirling's series, reached for x < 10 by the recurrence
 * Gamma(x + 1) = x Gamma(x). Error about 1e-15 of the larger of 1 and |result|.
 */
export function logGamma(x: number): number {
  if (!(x > 0)) refuse("out-of-domain", `logGamma needs a positive argument, got ${x}`);
  if (x === Infinity) return Infinity;
  let product = 1;
  let shifted = x;
  while (shifted < 10) {
    product *= shifted;
    shifted += 1;
  }
  return (shifted - 0.5) * Math.log(shifted) - shifted + HALF_LOG_TWO_PI + stirlingSeries(shifted) - Math.log(product);
}

/** ln Gamma(x + 1) minus Stirling's leading terms, (x + 1/2) ln x - x + ln(2 pi)/2; x > 0. */
export function stirlingError(x: number): number {
  if (x >= 10) return stirlingSeries(x);
  return logGamma(x + 1) - (x + 0.5) * Math.log(x) + x - HALF_LOG_TWO_PI;
}

/**
 * x ln(x/mean) + mean - x, without cancellation where x is close to mean; x, mean > 0. Loader's deviance. `difference`
 * is x - mean, given when it is known better than the subtraction can tell.
 */
export function deviance(x: number, mean: number, difference = x - mean): number {
  if (Math.abs(difference) >= 0.1 * (x + mean)) return x * Math.log(x / mean) - difference;
  // ln((1 + v)/(1 - v)) = 2 (v + v^3/3 + ...) with v = difference/(x + mean).
  const v = difference / (x + mean);
  let sum = difference * v;
  let term = 2 * x * v;
  for (let j = 1; j < 100; j++) {
    term *= v * v;
    const next = sum + term / (2 * j + 1);
    if (next === sum) break;
    sum = next;
  }
  return sum;
}

/** x^a e^-x / Gamma(a + 1): the probability of a counts when x are expected, for any real a > 0. */
export function poissonTerm(a: number, x: number): number {
  if (x === 0) return 0;
  return Math.exp(-stirlingError(a) - deviance(a, x)) / Math.sqrt(2 * Math.PI * a);
}

/** Both regularised incomplete gamma functions: lower + upper = 1, the smaller one with full relative accuracy. */
export interface TailPair {
  readonly lower: number;
  readonly upper: number;
}

/**
 * P(a, x) and Q(a, x) for a > 0, x >= 0, else refused (`out-of-domain`). Series for x < a + 1, continued fraction
 * (modified Lentz) beyond (Abramowitz and Stegun 1964, 6.5.29 and 6.5.31; from memory).
 */
export function incompleteGamma(a: number, x: number): TailPair {
  if (!(a > 0) || !(x >= 0) || a === Infinity) refuse("out-of-domain", `incompleteGamma(${a}, ${x})`);
  if (x === 0) return { lower: 0, upper: 1 };
  if (x === Infinity) return { lower: 1, upper: 0 };
  // Both expansions need a multiple of sqrt(a) terms near x = a.
  const most = 500 + 20 * Math.sqrt(a);
  if (x < a + 1) {
    let term = 1;
    let sum = 1;
    for (let k = 1; k < most; k++) {
      term *= x / (a + k);
      sum += term;
      if (term < sum * 1e-17) break;
    }
    const lower = Math.min(1, poissonTerm(a, x) * sum);
    return { lower, upper: 1 - lower };
  }
  const tiny = 1e-300;
  let b = x + 1 - a;
  let c = 1 / tiny;
  let d = 1 / b;
  let fraction = d;
  for (let k = 1; k < most; k++) {
    const numerator = -k * (k - a);
    b += 2;
    d = numerator * d + b;
    if (Math.abs(d) < tiny) d = tiny;
    c = b + numerator / c;
    if (Math.abs(c) < tiny) c = tiny;
    d = 1 / d;
    const factor = d * c;
    fraction *= factor;
    if (Math.abs(factor - 1) < 3e-16) break;
  }
  const upper = Math.min(1, a * poissonTerm(a, x) * fraction);
  return { lower: 1 - upper, upper };
}
