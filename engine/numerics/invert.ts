/**
 * Quantiles by inverting a distribution function. Role: the one safeguarded Newton iteration behind the quantiles of
 * t, chi-square, F and the mixture.
 */

/** A continuous law on an interval, as the inversion needs it. */
export interface ContinuousLaw {
  /** Probability of a value <= x. */
  cdf(x: number): number;
  /** Probability of a value > x: given apart so that upper tails keep their digits. */
  upper(x: number): number;
  /** Density. */
  pdf(x: number): number;
}

/**
 * The x in [low, high] (finite, cdf(low) <= p <= cdf(high)) with cdf(x) = p, 0 < p < 1. Newton from `start`, kept in a
 * bracket that shrinks from both sides; a step that leaves it, and every third step, bisects. Stops when the bracket
 * or the step is 1e-15 of x, or of `scale` near x = 0.
 */
export function invertCdf(
  p: number,
  law: ContinuousLaw,
  low: number,
  high: number,
  start: number,
  scale: number,
): number {
  let left = low;
  let right = high;
  let x = Math.min(right, Math.max(left, start));
  // Bisection alone ends in about 60 halvings per change of magnitude; 1000 covers the whole range of doubles thrice.
  for (let step = 0; step < 1000; step++) {
    const excess = p > 0.5 ? 1 - p - law.upper(x) : law.cdf(x) - p;
    if (excess === 0) return x;
    if (excess > 0) right = x;
    else left = x;
    const tolerance = 1e-15 * Math.max(Math.abs(x), scale);
    if (right - left <= tolerance) return x;
    const newton = x - excess / law.pdf(x);
    const next = step % 3 !== 2 && newton > left && newton < right ? newton : left + (right - left) / 2;
    if (Math.abs(next - x) <= tolerance) return next;
    x = next;
  }
  return x;
}
