/** The goal as a region of film: a box in index and thickness, and conditions in reflectance through the optics. */
import { type Cut, chanceIn, type FilmLaw, type FilmPart, type GoalRegion } from "../../calibration/index.ts";
import type { Goal } from "../line/line.ts";
import type { CellLight } from "./cell-light.ts";

/** Goal names as in line.yaml. */
export type GoalName = "index" | "thickness" | "weighted_reflectance" | "reflectance_minimum";

const everywhere: readonly [number, number] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
const anyThickness: readonly [number, number] = [0, Number.POSITIVE_INFINITY];

/** The region for some of the goals. */
function region(goal: Goal, names: readonly GoalName[], light: CellLight): GoalRegion {
  const has = (name: GoalName) => names.includes(name);
  const w = has("weighted_reflectance") ? goal.weightedReflectancePercent : undefined;
  const m = has("reflectance_minimum") ? goal.reflectanceMinimumNm : undefined;
  const also: ((index: number, facetNm: number) => number)[] = [];
  if (w) also.push((index, facetNm) => (light.weighted(index, facetNm) ?? Number.POSITIVE_INFINITY) - w.atMost);
  if (m)
    also.push(
      (index, facetNm) => Math.abs((light.minimum(index, facetNm) ?? Number.POSITIVE_INFINITY) - m.value) - m.within,
    );
  const n = has("index") ? goal.index : undefined;
  const d = has("thickness") ? goal.thicknessNm : undefined;
  return {
    index: n ? [n.value - n.within, n.value + n.within] : everywhere,
    thicknessNm: d ? [d.value - d.within, d.value + d.within] : anyThickness,
    also,
    factors: factorsOf(light),
    cuts: w || m ? cutsFor(light, `${w?.atMost} ${m?.value} ${m?.within}`) : undefined,
  };
}

const kept = new WeakMap<CellLight, Map<string, Map<number, Cut>>>();

/**
 * What the optics have answered about these limits. Shared by the chances of one proposal, and by those of a live what-if:
 * where the parts of a law reach past the index goal, they all ask at the same indices.
 */
function cutsFor(light: CellLight, limits: string): Map<number, Cut> {
  const known = kept.get(light) ?? new Map<string, Map<number, Cut>>();
  kept.set(light, known);
  const cuts = known.get(limits) ?? new Map<number, Cut>();
  known.set(limits, cuts);
  return cuts;
}

/**
 * The facet factor as three points of Gauss-Hermite: the chance is smooth in it because the film's own scatter smears the
 * edges.
 */
function factorsOf({ surface, facet: { mean, sd } }: CellLight): GoalRegion["factors"] {
  if (surface === "polished" || sd === 0) return [{ factor: mean, weight: 1 }];
  return [
    [-Math.sqrt(3), 1 / 6],
    [0, 2 / 3],
    [Math.sqrt(3), 1 / 6],
  ].map(([z, weight]) => ({ factor: mean + z * sd, weight }));
}

/** Names of the goals set, in the order of line.yaml. */
export function goalNames(goal: Goal): GoalName[] {
  const out: GoalName[] = [];
  if (goal.index) out.push("index");
  if (goal.thicknessNm) out.push("thickness");
  if (goal.weightedReflectancePercent) out.push("weighted_reflectance");
  if (goal.reflectanceMinimumNm) out.push("reflectance_minimum");
  return out;
}

export const isLight = (name: GoalName) => name === "weighted_reflectance" || name === "reflectance_minimum";

/** Chance that the film meets all the named goals at once, averaged over what is not known of the facet factor. */
export function chanceOf(law: FilmLaw, goal: Goal, names: readonly GoalName[], light: CellLight): number {
  const where = region(goal, names, light);
  return chanceIn(where.also.length > 0 ? { parts: fewer(law.parts) } : law, where);
}

/** The heaviest parts of a mixture, the last few per cent of weight merged into one part: for the costly integrals only. */
function fewer(parts: readonly FilmPart[]): FilmPart[] {
  const sorted = [...parts].sort((a, b) => b.weight - a.weight);
  const keep = sorted.slice(0, 5);
  const rest = sorted.slice(5);
  const weight = rest.reduce((s, p) => s + p.weight, 0);
  if (weight < 1e-9) return keep;
  const index = rest.reduce((s, p) => s + p.weight * p.index, 0) / weight;
  const lnThickness = rest.reduce((s, p) => s + p.weight * p.lnThickness, 0) / weight;
  const covariance: [number, number, number] = [0, 0, 0];
  for (const p of rest) {
    const a = p.index - index;
    const b = p.lnThickness - lnThickness;
    covariance[0] += (p.weight * (p.covariance[0] + a * a)) / weight;
    covariance[1] += (p.weight * (p.covariance[1] + a * b)) / weight;
    covariance[2] += (p.weight * (p.covariance[2] + b * b)) / weight;
  }
  return [...keep, { weight, index, lnThickness, covariance }];
}
