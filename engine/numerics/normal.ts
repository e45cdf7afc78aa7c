/**
 * The normal law: density, distribution, chance of an interval, quantile. Role: every prediction here is normal or a
 * mixture of normals. Mean and standard deviation default to 0 and 1; a standard deviation that is not positive is
 * refused (`bad-sd`), a probability outside [0, 1] too (`bad-probability`).
 */
import { refuse } from "../errors.ts";
import { erfc } from "./erfc.ts";

const LOG_SQRT_TWO_PI = 0.9189385332046728;
const SQRT_HALF = Math.SQRT1_2;

function checkSd(sd: number): void {
  if (!(sd > 0)) refuse("bad-sd", `a standard deviation must be positive, got ${sd}`);
}

/** Refuses (`bad-probability`) anything outside [0, 1], NaN included. */
export function checkProbability(p: number): void {
  if (!(p >= 0 && p <= 1)) refuse("bad-probability", `a probability lies between 0 and 1, got ${p}`);
}

/** ln of the density at x. */
export function normalLogPdf(x: number, mean = 0, sd = 1): number {
  checkSd(sd);
  const z = (x - mean) / sd;
  return -0.5 * z * z - LOG_SQRT_TWO_PI - Math.log(sd);
}

/** Density at x, per unit of x. */
export function normalPdf(x: number, mean = 0, sd = 1): number {
  checkSd(sd);
  const z = (x - mean) / sd;
  return Math.exp(-0.5 * z * z - LOG_SQRT_TWO_PI) / sd;
}

/** Probability of a value <= x. Relatively accurate in the lower tail; for the upper tail pass -z. */
export function normalCdf(x: number, mean = 0, sd = 1): number {
  checkSd(sd);
  return 0.5 * erfc((-(x - mean) / sd) * SQRT_HALF);
}

/** Probability of low < value <= high, without cancellation in either tail; 0 when high <= low. */
export function normalBetween(low: number, high: number, mean = 0, sd = 1): number {
  checkSd(sd);
  const a = (low - mean) / sd;
  const b = (high - mean) / sd;
  if (Number.isNaN(a) || Number.isNaN(b)) refuse("not-a-number", `the interval is ${low} to ${high} about ${mean}`);
  if (b <= a) return 0;
  // Both ends above the mean: take the difference of the small upper tails instead of two numbers near 1.
  return a > 0 ? normalCdf(-a) - normalCdf(-b) : normalCdf(b) - normalCdf(a);
}

/** |p - 1/2| <= 0.425, numerator and denominator in 0.180625 - (p - 1/2)^2, highest power first. */
const CENTRE_A = [
  2509.0809287301227, 33430.57558358813, 67265.7709270087, 45921.95393154987, 13731.69376550946, 1971.5909503065513,
  133.14166789178438, 3.3871328727963665,
];
const CENTRE_B = [
  5226.495278852546, 28729.085735721943, 39307.89580009271, 21213.794301586597, 5394.196021424751, 687.1870074920579,
  42.31333070160091, 1,
];
/** Tail with r = sqrt(-ln min(p, 1 - p)) <= 5, in r - 1.6. */
const TAIL_C = [
  0.0007745450142783414, 0.022723844989269184, 0.2417807251774506, 1.2704582524523684, 3.6478483247632045,
  5.769497221460691, 4.630337846156546, 1.4234371107496835,
];
const TAIL_D = [
  1.0507500716444169e-9, 0.0005475938084995345, 0.015198666563616457, 0.14810397642748008, 0.6897673349851,
  1.6763848301838038, 2.053191626637759, 1,
];
/** Far tail, r > 5, in r - 5. */
const FAR_E = [
  2.0103343992922881e-7, 0.000027115555687434876, 0.0012426609473880784, 0.026532189526576124, 0.29656057182850487,
  1.7848265399172913, 5.463784911164114, 6.657904643501103,
];
const FAR_F = [
  2.0442631033899397e-15, 1.421511758316446e-7, 0.000018463183175100548, 0.0007868691311456133, 0.014875361290850615,
  0.1369298809227358, 0.599832206555888, 1,
];

function ratio(top: readonly number[], bottom: readonly number[], x: number): number {
  let above = top[0];
  let below = bottom[0];
  for (let i = 1; i < top.length; i++) {
    above = above * x + top[i];
    below = below * x + bottom[i];
  }
  return above / below;
}

/**
 * The x with normalCdf(x) = p; -Infinity and Infinity at p = 0 and 1. About 16 digits: M. J. Wichura, algorithm
 * AS 241 (PPND16), Applied Statistics 37 (1988) 477-484 (coefficients from memory, checked in the tests against
 * 40-digit values).
 */
export function normalQuantile(p: number, mean = 0, sd = 1): number {
  checkProbability(p);
  checkSd(sd);
  return mean + sd * standardQuantile(p);
}

function standardQuantile(p: number): number {
  const q = p - 0.5;
  if (Math.abs(q) <= 0.425) return q * ratio(CENTRE_A, CENTRE_B, 0.180625 - q * q);
  const tail = q < 0 ? p : 1 - p;
  if (tail === 0) return q < 0 ? -Infinity : Infinity;
  const r = Math.sqrt(-Math.log(tail));
  const size = r <= 5 ? ratio(TAIL_C, TAIL_D, r - 1.6) : ratio(FAR_E, FAR_F, r - 5);
  return q < 0 ? -size : size;
}
