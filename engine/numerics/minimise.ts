/**
 * Minimum of a function of one variable on an interval. Role: best thickness for one index, one setting at a time.
 * R. P. Brent, Algorithms for Minimization without Derivatives, 1973, chapter 5 (from memory): parabolas, golden
 * sections where they would not be safe.
 */
import { refuse } from "../errors.ts";

/** A located minimum. */
export interface Minimum {
  readonly x: number;
  readonly value: number;
}

/** The golden section's smaller share, (3 - sqrt 5)/2. */
const GOLDEN = (3 - Math.sqrt(5)) / 2;

/**
 * A local minimum of f on [low, high], low < high (`bad-bounds`): the only one if f has one valley. `tolerance` in the
 * unit of x, default 1e-8 of |x| plus 1e-12 of the interval; finer is useless, f is flat there. A minimum at an end is
 * approached to within the tolerance and the end itself is tried last. Refuses `not-a-number` where f is NaN.
 */
export function minimise(f: (x: number) => number, low: number, high: number, tolerance?: number): Minimum {
  if (!(low < high) || !Number.isFinite(high - low)) refuse("bad-bounds", `the interval runs from ${low} to ${high}`);
  const at = (x: number) => {
    const value = f(x);
    if (Number.isNaN(value)) refuse("not-a-number", `the function to minimise is not a number at ${x}`);
    return value;
  };
  let a = low;
  let b = high;
  let best = a + GOLDEN * (b - a);
  let second = best;
  let third = best;
  let atBest = at(best);
  let atSecond = atBest;
  let atThird = atBest;
  let step = 0;
  let stepBefore = 0;
  for (let i = 0; i < 500; i++) {
    const middle = (a + b) / 2;
    const near = tolerance ?? 1e-8 * Math.abs(best) + 1e-12 * (high - low);
    if (Math.abs(best - middle) <= 2 * near - (b - a) / 2) break;
    const parabola = Math.abs(stepBefore) > near ? vertex(best, second, third, atBest, atSecond, atThird) : Number.NaN;
    if (Math.abs(parabola) < Math.abs(stepBefore / 2) && best + parabola > a && best + parabola < b) {
      stepBefore = step;
      step = parabola;
      // Not too close to the ends of the bracket.
      if (best + step - a < 2 * near || b - best - step < 2 * near) step = best < middle ? near : -near;
    } else {
      stepBefore = best < middle ? b - best : a - best;
      step = GOLDEN * stepBefore;
    }
    const x = best + (Math.abs(step) >= near ? step : step > 0 ? near : -near);
    const value = at(x);
    if (value <= atBest) {
      if (x < best) b = best;
      else a = best;
      third = second;
      atThird = atSecond;
      second = best;
      atSecond = atBest;
      best = x;
      atBest = value;
    } else {
      if (x < best) a = x;
      else b = x;
      if (value <= atSecond || second === best) {
        third = second;
        atThird = atSecond;
        second = x;
        atSecond = value;
      } else if (value <= atThird || third === best || third === second) {
        third = x;
        atThird = value;
      }
    }
  }
  for (const end of [low, high]) {
    const value = at(end);
    if (value < atBest) [best, atBest] = [end, value];
  }
  return { x: best, value: atBest };
}

/** Step from x to the vertex of the parabola through three points; NaN or infinite when they do not bend. */
function vertex(x: number, w: number, v: number, fx: number, fw: number, fv: number): number {
  const r = (x - w) * (fx - fv);
  const q = (x - v) * (fx - fw);
  return -((x - v) * q - (x - w) * r) / (2 * (q - r));
}
