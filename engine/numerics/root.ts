/**
 * A root of a function of one variable between two points of opposite sign. Role: solving the film response for a
 * setting. R. P. Brent, Algorithms for Minimization without Derivatives, 1973, chapter 4 (from memory): inverse
 * quadratic interpolation, secant or bisection, whichever is safe.
 */
import { refuse } from "../errors.ts";

/** How closely a root or a minimum is located, in the unit of x. */
export interface RootOptions {
  /** Half-width at which the search stops; default 0, that is rounding of x (four units in the last place). */
  tolerance?: number;
}

/**
 * x in [a, b] with f(x) = 0. Refuses `no-sign-change` when f(a) and f(b) have the same sign, and `not-a-number` when
 * either value, or one on the way, is not a number.
 */
export function findRoot(f: (x: number) => number, a: number, b: number, options: RootOptions = {}): number {
  const at = (x: number) => {
    const value = f(x);
    if (Number.isNaN(value)) refuse("not-a-number", `the function to solve is not a number at ${x}`);
    return value;
  };
  // best: the end with the smaller value; previous: best before; opposite: the other end of the bracket.
  let previous = a;
  let atPrevious = at(a);
  let best = b;
  let atBest = at(b);
  if (atPrevious === 0) return a;
  if (atBest === 0) return b;
  if (atPrevious > 0 === atBest > 0) {
    refuse("no-sign-change", `no root is enclosed: f(${a}) = ${atPrevious}, f(${b}) = ${atBest}`);
  }
  let opposite = previous;
  let atOpposite = atPrevious;
  let step = best - previous;
  let stepBefore = step;
  // Brent's bound is about the square of the bisection count, reached only by functions made for it.
  for (let i = 0; i < 4000; i++) {
    if (atBest > 0 === atOpposite > 0) {
      opposite = previous;
      atOpposite = atPrevious;
      step = best - previous;
      stepBefore = step;
    }
    if (Math.abs(atOpposite) < Math.abs(atBest)) {
      [previous, best, opposite] = [best, opposite, best];
      [atPrevious, atBest, atOpposite] = [atBest, atOpposite, atBest];
    }
    const tolerance = 2 * Number.EPSILON * Math.abs(best) + (options.tolerance ?? 0);
    const half = (opposite - best) / 2;
    if (Math.abs(half) <= tolerance || atBest === 0) return best;
    if (Math.abs(stepBefore) < tolerance || Math.abs(atPrevious) <= Math.abs(atBest)) {
      step = half;
      stepBefore = half;
    } else {
      const proposal = interpolated(best, previous, opposite, atBest, atPrevious, atOpposite);
      const safe =
        Math.abs(proposal) < 0.75 * Math.abs(2 * half) - tolerance / 2 &&
        Math.abs(proposal) < Math.abs(stepBefore / 2) &&
        proposal > 0 === half > 0;
      stepBefore = safe ? step : half;
      step = safe ? proposal : half;
    }
    previous = best;
    atPrevious = atBest;
    best += Math.abs(step) > tolerance ? step : half > 0 ? tolerance : -tolerance;
    // A tolerance of zero at best = 0 would not move at all.
    if (best === previous) return best;
    atBest = at(best);
  }
  return best;
}

/** Step from `best` by inverse quadratic interpolation, or the secant while only two points differ. */
function interpolated(best: number, previous: number, opposite: number, fb: number, fp: number, fo: number): number {
  const s = fb / fp;
  if (previous === opposite) return ((opposite - best) * s) / (s - 1);
  const q = fp / fo;
  const r = fb / fo;
  const top = s * ((opposite - best) * q * (q - r) - (best - previous) * (r - 1));
  return -top / ((q - 1) * (r - 1) * (s - 1));
}
