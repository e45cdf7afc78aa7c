/**
 * What a set of settings is worth: expected squared miss of each goal in units of its tolerance, plus a small price for
 * moving levers. Moments only, so that a search can ask it thousands of times; chances are worked out for the few finalists.
 */
import type { ChamberModel, Settings } from "../../calibration/index.ts";
import type { Goal } from "../line/line.ts";
import type { CellLight } from "./cell-light.ts";
import type { TunedLever } from "./levers.ts";

/** Weighted reflectance this far over its limit counts like one tolerance, percent absolute: the size of a usual gauge. */
const overLimit = 0.1;

/** Expected loss of a film law's moments against the goal; no lever price. */
export function filmLoss(
  film: { index: number; lnThickness: number; covariance: readonly [number, number, number] },
  goal: Goal,
  light: CellLight,
): number {
  const [vn, , vl] = film.covariance;
  let loss = 0;
  if (goal.index) loss += ((film.index - goal.index.value) ** 2 + vn) / goal.index.within ** 2;
  const d = Math.exp(film.lnThickness + vl / 2);
  if (goal.thicknessNm) {
    const d2 = Math.exp(2 * film.lnThickness + 2 * vl);
    const aim = goal.thicknessNm.value;
    loss += (d2 - 2 * aim * d + aim * aim) / goal.thicknessNm.within ** 2;
  }
  if (light.unjudged) return loss;
  const facetNm = d * light.facet.mean;
  const minimum = goal.reflectanceMinimumNm;
  if (minimum) {
    const at = light.minimum(film.index, facetNm);
    loss += at === null ? 1e6 : (at - minimum.value) ** 2 / minimum.within ** 2;
  }
  const weighted = goal.weightedReflectancePercent;
  if (weighted) {
    const at = light.weighted(film.index, facetNm);
    loss += at === null ? 1e6 : Math.max(0, at - weighted.atMost) ** 2 / overLimit ** 2;
  }
  return loss;
}

/** Loss at settings, with the price of the moves away from `before`. */
export function loss(
  model: ChamberModel,
  settings: Settings,
  context: { goal: Goal; light: CellLight; levers: readonly TunedLever[]; before: Settings },
): number {
  let price = 0;
  for (const lever of context.levers) {
    const move = Math.abs((settings.get(lever.name) ?? 0) - (context.before.get(lever.name) ?? 0));
    price += (lever.price * move) / lever.span;
  }
  return filmLoss(model.quick(settings), context.goal, context.light) + price;
}
