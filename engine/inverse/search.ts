/**
 * All local optima of a stack inside its ranges that are worth knowing: a scan of the whole box, a descent from every valley of
 * the scan and from the values it has now, and of what they end in each once.
 */
import type { StackFigures } from "./figures.ts";
import { metWithin } from "./goal.ts";
import { goalDescent, type LocalAnswer } from "./goal-descent.ts";
import { type Scanned, spread, valleysOf } from "./starts.ts";
import { type FilmUnknown, piecesOf } from "./varied-stack.ts";

export interface Search {
  /** Best first: goals met before goals missed, then the least loss (the least miss, where none is met). Never empty. */
  optima: LocalAnswer[];
  /** Descents made. */
  starts: number;
}

export interface SearchEffort {
  /** Points of the scan. */
  scan: number;
  /** Most descents. */
  descents: number;
}

/** Valleys of the scan narrower than its spacing are missed: 120 points on 100 nm, 700 in three dimensions. */
export function fullEffort(unknowns: number): SearchEffort {
  return { scan: [121, 400, 700][unknowns - 1] ?? 1000, descents: 10 + 5 * unknowns };
}

/** mA/cm2 by which the loss must rise between two optima for them to be two; no one could tell less apart on a cell. */
const ridge = 0.002;
/** Optima closer than this share of every range are one, whatever lies between. */
const samePlace = 1e-3;
/** Points looked at between two optima. */
const between = 15;

/** `starts`: places to descend from besides the valleys of the scan. */
export function searchStack(
  figures: StackFigures,
  unknowns: readonly FilmUnknown[],
  starts: readonly ArrayLike<number>[],
  effort: SearchEffort = fullEffort(unknowns.length),
): Search {
  const pieces = unknowns.map(piecesOf);
  const width = unknowns.map(({ from, to }) => to - from);
  const scanned = spread(effort.scan, unknowns.length).map((unit): Scanned => {
    const values = unit.map((share, u) => unknowns[u].from + share * width[u]);
    const { lossMaCm2, excess } = figures.plain(values);
    return { values, lossMaCm2, missed: missedBy(excess) };
  });
  // Once by the goals first and the loss second, once by the loss alone: a low loss may lie just beside the goals.
  const goals = figures.wanted.length > 0;
  const byGoals = (a: Scanned, b: Scanned) =>
    a.missed < b.missed || (a.missed === b.missed && a.lossMaCm2 < b.lossMaCm2);
  const byBoth = (a: Scanned, b: Scanned) => a.lossMaCm2 + a.missed < b.lossMaCm2 + b.missed;
  const places = new Set<ArrayLike<number>>(starts);
  for (const lower of goals ? [byGoals, byBoth] : [byBoth])
    for (const { values } of valleysOf(scanned, width, lower, effort.descents)) places.add(values);
  const answers = [...places].map((place) => goalDescent(figures, place, pieces)).sort(better);
  const optima: LocalAnswer[] = [];
  for (const answer of answers) if (!optima.some((known) => isSame(figures, known, answer, width))) optima.push(answer);
  return { optima, starts: places.size };
}

export function better(a: LocalAnswer, b: LocalAnswer): number {
  if (a.met !== b.met) return a.met ? -1 : 1;
  return a.met ? a.lossMaCm2 - b.lossMaCm2 : a.missed - b.missed;
}

function missedBy(excess: readonly number[]): number {
  return excess.reduce((sum, value) => sum + Math.max(0, value) ** 2, 0);
}

/** Whether one can go from the better to the worse without climbing: then the worse is no optimum of its own. */
function isSame(figures: StackFigures, best: LocalAnswer, other: LocalAnswer, width: readonly number[]): boolean {
  if (width.every((range, u) => Math.abs(best.values[u] - other.values[u]) <= samePlace * range)) return true;
  // What missed the goals is none beside what met them; what missed them is judged by its misses.
  for (let step = 1; step < between; step++) {
    const share = step / between;
    const values = best.values.map((value, u) => value + share * (other.values[u] - value));
    const { lossMaCm2, excess } = figures.plain(values);
    if (best.met && other.met) {
      if (lossMaCm2 > other.lossMaCm2 + ridge || excess.some((value) => value > metWithin)) return false;
    } else if (missedBy(excess) > other.missed * (1 + ridge) + metWithin ** 2) return false;
  }
  return true;
}
