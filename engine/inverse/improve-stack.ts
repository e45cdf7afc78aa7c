/**
 * The inverse of the film's optics: which thicknesses and indices, inside their ranges, meet the goals and lose least, which
 * others come close, how flat the best is, and what holding an index at the engineer's value costs. Passivation, not optics,
 * often sets that index; optics alone would choose another, and the difference in mA/cm2 is what the choice costs.
 */
import type { FilmStackDescription } from "../film-stack.ts";
import { siliconNitride } from "../materials/nitride-family.ts";
import { StackFigures } from "./figures.ts";
import { type Flat, flatHeld, flatTogether } from "./flatness.ts";
import { type FilmGoal, type Miss, metWithin } from "./goal.ts";
import type { LocalAnswer } from "./goal-descent.ts";
import { searchStack } from "./search.ts";
import { checkUnknowns, type FilmUnknown, stackWith } from "./varied-stack.ts";

/** A film that cannot be bettered by small changes inside the ranges. */
export interface FilmOptimum {
  /** One an unknown, in their order. */
  values: number[];
  lossMaCm2: number;
  weightedReflectancePercent: number;
  goalMet: boolean;
  /** One a goal, met or not; empty without goals. */
  misses: Miss[];
}

export interface ImprovedUnknown extends FilmUnknown {
  value: number;
  /** The end of the range it lies at. */
  atBound: "from" | "to" | null;
  /** At a measured member of the nitride family, where its slopes jump and hold it. */
  atJoin: boolean;
  /** An index beyond the measured members of the family: its absorption is carried on, not measured. */
  extrapolated: boolean;
  /** Within which the loss grows by no more than `flatWithinMaCm2` and the goals stay met, the others held; null where they are not met. */
  flat: Flat | null;
  /** The same from the curvature, the others re-optimised; null where that says nothing (`flatTogether`). */
  flatTogether: Flat | null;
}

/** The best with named indices held at their named values. */
export interface HeldFilm {
  /** Layers (0 outermost) whose index was held, and at what. */
  layers: { layer: number; index: number }[];
  /** Values of all unknowns, held ones included. */
  optimum: FilmOptimum;
  /** Its loss above that of the best, mA/cm2; null where either misses the goals. */
  costMaCm2: number | null;
}

export interface ImprovedStack {
  goalMet: boolean;
  unknowns: ImprovedUnknown[];
  /**
   * Best first, at most 8: with goals all that meet them, or the nearest film alone where none does; without, those that lose at
   * most `withinReachMaCm2` more than the best.
   */
  optima: FilmOptimum[];
  /** The stack with the best values. */
  description: FilmStackDescription;
  /** What it is with the values named, where every unknown has one. */
  start: FilmOptimum | null;
  held: HeldFilm | null;
  /** Descents made, and how often a stack was worked out. */
  starts: number;
  evaluations: number;
}

/** Without goals, local optima that lose more than this above the best are not worth a line, mA/cm2. */
export const withinReachMaCm2 = 1;
/** Never more optima than these. */
const mostOptima = 8;

/**
 * The best values of the unknowns: goals met first, then the least loss (what does not reach the substrate over the light's
 * range, as photon current). Deterministic. Refuses as `checkUnknowns`, `checkGoal` and `StackFigures` do.
 */
export function improveStack(
  description: FilmStackDescription,
  unknowns: readonly FilmUnknown[],
  goal: FilmGoal = {},
): ImprovedStack {
  checkUnknowns(description, unknowns);
  const named = unknowns.map(({ start }) => start);
  const start = named.every((value) => value !== null) ? Float64Array.from(named) : null;
  const held = holdIndices(description, unknowns, goal);
  // The film with its indices held is a place of the free search, too: free can then never be worse than held.
  const starts = [...(start ? [start] : []), ...(held ? [Float64Array.from(held.film.optimum.values)] : [])];
  const figures = new StackFigures(description, unknowns, goal);
  const { optima, starts: descents } = searchStack(figures, unknowns, starts);
  const [best] = optima;
  // With goals every film that meets them counts; without, those that come close.
  const most = figures.wanted.length > 0 ? Number.POSITIVE_INFINITY : best.lossMaCm2 + withinReachMaCm2;
  const reach = best.met
    ? optima.filter(({ met, lossMaCm2 }) => met && lossMaCm2 <= most).slice(0, mostOptima)
    : [best];
  const none = unknowns.map(() => null);
  const flat = best.met ? flatHeld(figures, unknowns, best) : none;
  const together = best.met ? flatTogether(figures, unknowns, best) : none;
  const shown = reach.map((answer) => optimumAt(figures, answer.values));
  return {
    goalMet: best.met,
    unknowns: unknowns.map((unknown, u) => ({
      ...unknown,
      value: best.values[u],
      ...whereOf(unknown, best, u),
      extrapolated: unknown.what === "index" && siliconNitride(best.values[u]).extrapolated,
      flat: flat[u],
      flatTogether: together[u],
    })),
    optima: shown,
    description: stackWith(description, unknowns, best.values),
    start: start && optimumAt(figures, start),
    held: held && { ...held.film, costMaCm2: costOf(held.film.optimum, shown[0]) },
    starts: descents + (held?.starts ?? 0),
    evaluations: figures.evaluations + (held?.evaluations ?? 0),
  };
}

function costOf(held: FilmOptimum, free: FilmOptimum): number | null {
  return held.goalMet && free.goalMet ? held.lossMaCm2 - free.lossMaCm2 : null;
}

function whereOf({ from, to }: FilmUnknown, { values, pieces }: LocalAnswer, u: number) {
  const value = values[u];
  const atBound = value <= from ? ("from" as const) : value >= to ? ("to" as const) : null;
  return { atBound, atJoin: atBound === null && (value === pieces[u].low || value === pieces[u].high) };
}

function optimumAt(figures: StackFigures, values: Float64Array): FilmOptimum {
  const { lossMaCm2, weightedReflectancePercent } = figures.plain(values);
  const misses = figures.misses(values);
  return {
    values: Array.from(values),
    lossMaCm2,
    weightedReflectancePercent,
    goalMet: misses.every(({ excess }) => excess <= metWithin),
    misses,
  };
}

/** The best with every index that has a named value held at it; null where there is none. */
function holdIndices(description: FilmStackDescription, unknowns: readonly FilmUnknown[], goal: FilmGoal) {
  const isHeld = ({ what, start }: FilmUnknown): boolean => what === "index" && start !== null;
  if (!unknowns.some(isHeld)) return null;
  const names = unknowns.map(({ start }) => start ?? Number.NaN);
  const heldStack = stackWith(
    description,
    unknowns.filter(isHeld),
    names.filter((_, u) => isHeld(unknowns[u])),
  );
  const free = unknowns.filter((unknown) => !isHeld(unknown));
  const layers = unknowns.filter(isHeld).map(({ layer, start }) => ({ layer, index: start as number }));
  // Asked through all unknowns, so that values come in their order.
  const all = new StackFigures(description, unknowns, goal);
  if (free.length === 0) {
    return { film: { layers, optimum: optimumAt(all, Float64Array.from(names)) }, starts: 0, evaluations: 1 };
  }
  const figures = new StackFigures(heldStack, free, goal);
  const named = free.map(({ start }) => start);
  const starts = named.every((value) => value !== null) ? [Float64Array.from(named)] : [];
  const search = searchStack(figures, free, starts);
  const found = search.optima[0].values;
  const values = Float64Array.from(unknowns, (unknown) =>
    isHeld(unknown) ? (unknown.start as number) : found[free.indexOf(unknown)],
  );
  const film = { layers, optimum: optimumAt(all, values) };
  return { film, starts: search.starts, evaluations: figures.evaluations };
}
