/**
 * Tuning or production. A chamber is being tuned from its first recipe, a clean, a service, an entered change or a new goal
 * until its film has been measured in goal and is expected to stay there; after that it is in production, and only a miss
 * worth more than a dead-band moves the recipe.
 */
import type { Goal } from "../line/line.ts";

export type Mode = "tuning" | "production";

/** Loss that must be gained before a production recipe is touched (bounded adjustment: Deming's funnel warns against less). */
export const deadBand: Record<Mode, number> = { tuning: 0.02, production: 0.04 };

export interface MeasuredRun {
  /** Its entry in the book. */
  entry: number;
  index: number | null;
  thicknessNm: number | null;
  reflectanceMinimumNm: number | null;
  weightedReflectancePercent: number | null;
}

/** Was this reading inside every goal it speaks to? Null when it speaks to none. */
export function measuredInGoal(run: Omit<MeasuredRun, "entry">, goal: Goal): boolean | null {
  const checks: boolean[] = [];
  if (goal.index && run.index !== null) checks.push(Math.abs(run.index - goal.index.value) <= goal.index.within);
  if (goal.thicknessNm && run.thicknessNm !== null)
    checks.push(Math.abs(run.thicknessNm - goal.thicknessNm.value) <= goal.thicknessNm.within);
  if (goal.reflectanceMinimumNm && run.reflectanceMinimumNm !== null)
    checks.push(
      Math.abs(run.reflectanceMinimumNm - goal.reflectanceMinimumNm.value) <= goal.reflectanceMinimumNm.within,
    );
  if (goal.weightedReflectancePercent && run.weightedReflectancePercent !== null)
    checks.push(run.weightedReflectancePercent <= goal.weightedReflectancePercent.atMost);
  return checks.length === 0 ? null : checks.every((ok) => ok);
}

/**
 * The mode from the runs measured since the last event that starts tuning. `doneNow` says whether the film is in goal and
 * expected to stay; two measured hits since the event also end the tuning.
 */
export function modeOf(runsSinceEvent: readonly MeasuredRun[], goal: Goal, doneNow: boolean): Mode {
  if (doneNow) return "production";
  const hits = runsSinceEvent.filter((run) => measuredInGoal(run, goal) === true).length;
  return hits >= 2 ? "production" : "tuning";
}
