/**
 * How flat an optimum is: how far each unknown may go before it matters. "It matters" is a loss of 0.05 mA/cm2 more, an eighth
 * of a percent of a cell's current, about what a cell tester repeats to (common practice, no source); or a goal that was met
 * and is no more.
 */

import { Refusal } from "../errors.ts";
import { cholesky, choleskyInverse } from "../numerics/cholesky.ts";
import type { StackFigures } from "./figures.ts";
import { metWithin } from "./goal.ts";
import type { LocalAnswer } from "./goal-descent.ts";
import type { FilmUnknown } from "./varied-stack.ts";

/** mA/cm2. */
export const flatWithinMaCm2 = 0.05;

/** From `low` to `high`, in the unit of the unknown; ends at the range. */
export interface Flat {
  low: number;
  high: number;
}

/** Steps from one end of a range to the other on the way out. */
const outwards = 100;
/** The ends are closed in to this share of a range. */
const closeIn = 1e-5;

/** The stretch around an optimum that meets the goals, for each unknown, the others held: walked on the loss itself, not on its curvature. */
export function flatHeld(figures: StackFigures, unknowns: readonly FilmUnknown[], best: LocalAnswer): Flat[] {
  const most = best.lossMaCm2 + flatWithinMaCm2;
  return unknowns.map(({ from, to }, u) => {
    const fine = (value: number): boolean => {
      const values = best.values.slice();
      values[u] = value;
      const { lossMaCm2, excess } = figures.plain(values);
      return lossMaCm2 <= most && excess.every((one) => one <= 2 * metWithin);
    };
    const centre = best.values[u];
    return { low: lastFine(fine, centre, from, to - from), high: lastFine(fine, centre, to, to - from) };
  });
}

/** The farthest value towards `end` up to which all is fine. */
function lastFine(fine: (value: number) => boolean, centre: number, end: number, width: number): number {
  const side = Math.sign(end - centre);
  let good = centre;
  let bad = Number.NaN;
  while (good !== end && Number.isNaN(bad)) {
    const next = good + (side * width) / outwards;
    const tried = (end - next) * side <= 0 ? end : next;
    if (fine(tried)) good = tried;
    else bad = tried;
  }
  while (Math.abs(bad - good) > closeIn * width) {
    const middle = (good + bad) / 2;
    if (fine(middle)) good = middle;
    else bad = middle;
  }
  return good;
}

/** Step of the differences of slopes, as a share of the range. */
const hessianStep = 1e-4;

/**
 * The same with the other unknowns re-optimised, from the curvature of the loss (differences of its exact slopes): wider than
 * `flatHeld` where one unknown makes up for another. Null for an unknown at its wall or at a join, with a single free unknown
 * (it is `flatHeld` then), where a goal holds the optimum, and where the loss does not bend upwards.
 */
export function flatTogether(
  figures: StackFigures,
  unknowns: readonly FilmUnknown[],
  best: LocalAnswer,
): (Flat | null)[] {
  const none = unknowns.map(() => null);
  const free = unknowns.flatMap((_, u) => {
    const { low, high } = best.pieces[u];
    const room = hessianStep * (unknowns[u].to - unknowns[u].from);
    return best.values[u] - low > room && high - best.values[u] > room ? [u] : [];
  });
  const width = unknowns.map(({ from, to }) => to - from);
  const { loss } = figures.sloped(best.values, best.pieces);
  // Slopes left over: a goal pushes, the curvature alone says nothing.
  if (free.length < 2 || free.some((u) => Math.abs(loss.slopes[u] * width[u]) > 1e-3)) return none;
  const m = free.length;
  const H = new Float64Array(m * m);
  free.forEach((u, a) => {
    const [minus, plus] = [-1, 1].map((side) => {
      const values = best.values.slice();
      values[u] += side * hessianStep * width[u];
      return figures.sloped(values, best.pieces).loss.slopes;
    });
    free.forEach((v, b) => {
      H[a * m + b] = ((plus[v] - minus[v]) * width[v]) / (2 * hessianStep);
    });
  });
  for (let a = 0; a < m; a++)
    for (let b = 0; b < a; b++) H[a * m + b] = H[b * m + a] = (H[a * m + b] + H[b * m + a]) / 2;
  const inverse = inverted(H, m);
  if (!inverse) return none;
  return unknowns.map(({ from, to }, u) => {
    const a = free.indexOf(u);
    if (a < 0) return null;
    const half = Math.sqrt(2 * flatWithinMaCm2 * inverse[a * m + a]) * width[u];
    return { low: Math.max(from, best.values[u] - half), high: Math.min(to, best.values[u] + half) };
  });
}

function inverted(H: Float64Array, m: number): Float64Array | null {
  try {
    return choleskyInverse(cholesky(H, m), m);
  } catch (error) {
    if (error instanceof Refusal) return null;
    throw error;
  }
}
