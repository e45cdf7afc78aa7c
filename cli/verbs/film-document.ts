/** Machine output of `film --improve` and `film --colours`. */
import {
  type FilmColours,
  type FilmOptimum,
  flatWithinMaCm2,
  type ImprovedStack,
  type Miss,
  withinReachMaCm2,
} from "../../engine/index.ts";

const unitOf = { thickness: "thickness_nm", index: "index" } as const;

/**
 * The `improved` part of the answer. Layers count from 1, from the light inwards; `values` are in the order of `unknowns`.
 *
 * - `goal_met`: false is exit 3, and the values are those of the nearest film. Without a goal it is true.
 * - `loss_ma_cm2`: available current less what gets into the substrate.
 * - `unknowns[]`: `layer`, `material`, `what` ("thickness_nm" or "index"), `value`, the range `from` and `to`, `start` (the value
 *   named in the file or null), `at_bound` ("from", "to" or null), `at_join` (at a measured film of the nitride family, where the
 *   slope jumps), `extrapolated` (an index beyond the measured films), `flat` {low, high}: within it the loss grows by at most `flat_within_ma_cm2` and the goals stay met, the others
 *   held (null when goals are missed); `flat_together`: the same with the others re-optimised, by curvature; null where that
 *   says nothing.
 * - `optima[]`, best first: `values`, `loss_ma_cm2`, `weighted_reflectance_percent`, `goal_met`, `goals`; with goals
 *   those that meet them, or the nearest film alone; without, those that lose at most `within_reach_ma_cm2` more than the best.
 * - `goals[]`: `goal`, what was wanted (`at_most`, or `value` and `within`), what was `found`, `missed_by` in tolerances (0 when
 *   met; of a limit, in tenths of it). `misses` are the goals missed by the best, only there when there are any.
 * - `start`: the optimum's shape for the values named in the file; null unless all are named.
 * - `held`: where an index has a named value: `layers` [{layer, index}] as held, the best film then in the optimum's shape, and
 *   `cost_ma_cm2` (null when either misses the goals), `optics_alone` [{layer, index}].
 * - `starts`, `evaluations`: descents made, stacks worked out.
 */
export function improvedDocument(found: ImprovedStack): Record<string, unknown> {
  const [best] = found.optima;
  const nameOf = (layer: number) => found.description.film[layer].material.name;
  return {
    goal_met: found.goalMet,
    loss_ma_cm2: best.lossMaCm2,
    unknowns: found.unknowns.map((unknown) => ({
      layer: unknown.layer + 1,
      material: nameOf(unknown.layer),
      what: unitOf[unknown.what],
      value: unknown.value,
      from: unknown.from,
      to: unknown.to,
      start: unknown.start,
      at_bound: unknown.atBound,
      at_join: unknown.atJoin,
      extrapolated: unknown.extrapolated,
      flat: unknown.flat,
      flat_together: unknown.flatTogether,
    })),
    flat_within_ma_cm2: flatWithinMaCm2,
    optima: found.optima.map(optimumDocument),
    within_reach_ma_cm2: withinReachMaCm2,
    ...(found.goalMet ? {} : { misses: best.misses.filter(({ excess }) => excess > 0).map(goalDocument) }),
    start: found.start && optimumDocument(found.start),
    held: heldDocument(found),
    starts: found.starts,
    evaluations: found.evaluations,
  };
}

function optimumDocument(optimum: FilmOptimum): Record<string, unknown> {
  return {
    values: optimum.values,
    loss_ma_cm2: optimum.lossMaCm2,
    weighted_reflectance_percent: optimum.weightedReflectancePercent,
    goal_met: optimum.goalMet,
    goals: optimum.misses.map(goalDocument),
  };
}

function heldDocument({ held, unknowns }: ImprovedStack): Record<string, unknown> | null {
  if (!held) return null;
  const indexOf = (layer: number) => unknowns.find((one) => one.what === "index" && one.layer === layer)?.value ?? null;
  return {
    layers: held.layers.map(({ layer, index }) => ({ layer: layer + 1, index })),
    ...optimumDocument(held.optimum),
    cost_ma_cm2: held.costMaCm2,
    optics_alone: held.layers.map(({ layer }) => ({ layer: layer + 1, index: indexOf(layer) })),
  };
}

const goalNames = {
  weighted: "weighted_reflectance_percent",
  minimum: "reflectance_minimum_nm",
  spot: "reflectance_percent",
  colour: "colour_difference",
} as const;

function goalDocument({ wanted, found, excess }: Miss): Record<string, unknown> {
  const { limit } = wanted;
  return {
    goal: goalNames[wanted.kind],
    ...(wanted.kind === "spot" ? { wavelength_nm: wanted.wavelengthNm } : {}),
    ...(wanted.kind === "colour" ? { lab: wanted.lab } : {}),
    ...("atMost" in limit ? { at_most: limit.atMost } : { value: limit.value, within: limit.within }),
    found,
    missed_by: Math.max(0, excess),
  };
}

/** `rows` a thickness each; `stretches` of thickness that look alike in words. `change_per_nm` is CIEDE2000. */
export function coloursDocument(layer: number, material: string, { rows, stretches }: FilmColours) {
  return {
    layer: layer + 1,
    material,
    rows: rows.map(({ thicknessNm, words, hex, clipped, lab, changePerNm }) => ({
      thickness_nm: thicknessNm,
      words,
      hex,
      clipped,
      lab,
      change_per_nm: changePerNm,
    })),
    stretches: stretches.map(({ fromNm, toNm, words, hex }) => ({ from_nm: fromNm, to_nm: toNm, words, hex })),
  };
}
