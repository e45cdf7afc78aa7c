/** What watching found as the --json document, and the sentences shared with the text. */
import type { Forecast } from "../advice/forecast.ts";
import { asPercent } from "../advice/reasons.ts";
import type { Half, Watched, WatchedChamber, WatchedRecipe } from "./watching.ts";
import type { CleanHabit } from "./watching-cleans.ts";

const sideWords = ({ goal, side }: NonNullable<Forecast["first"]>) =>
  goal === "weighted_reflectance" ? "weighted reflectance too high" : `${goal.replaceAll("_", " ")} too ${side}`;

/** How long the level stays in goal, in one sentence. */
export function forecastSentence(f: Forecast | null): string {
  if (!f) return "No forecast: no goal can be judged.";
  const { early, half, late } = f.outBy;
  const first = f.first ? `, ${sideWords(f.first)} first (${asPercent(f.first.share)})` : "";
  if (f.outNow >= 0.5) return `Out of goal now, ${asPercent(f.outNow)} likely${first}.`;
  const already = f.outNow > 0.05 ? `, out already with ${asPercent(f.outNow)}` : "";
  if (half === null)
    return early === null
      ? `In goal for ${f.horizon} depositions with over 95 %.`
      : `In goal for ${f.horizon} depositions likelier than not; out by ${early} with 5 %${already}${first}.`;
  const to = late === null ? `not yet by ${f.horizon} with 95 %` : `by ${late} with 95 %`;
  return `Out of goal by ${half} depositions from now with 50 % (by ${early} with 5 %, ${to})${already}${first}.`;
}

/** When the next clean is to be expected, and whether the goal is left before it. */
export function cleanSentence(habit: CleanHabit | null, forecast: Forecast | null): string | null {
  if (!habit) return null;
  const { usual, left, least, most, cycles } = habit;
  const range = least === most ? "" : `, ${least} to ${most}`;
  const lead = `usually cleaned after ${usual} depositions (${cycles} cycles${range})`;
  if (left <= 0) return `${lead}: ${left === 0 ? "due now" : `past it by ${-left}`}`;
  const half = forecast?.outBy.half ?? null;
  const before =
    half === null ? "" : half < left ? "; likelier out of goal before that" : "; likelier in goal until then";
  return `${lead}: in about ${left}${before}`;
}

/** "Drift over the next 10 depositions: index +0.0010 ±0.0030, -0.31 ±0.40 nm" (95 %). */
export function driftSentence({ index, thicknessNm }: WatchedRecipe["drift"]): string {
  const signed = (v: number, digits: number) => `${v < 0 ? "-" : "+"}${Math.abs(v).toFixed(digits)}`;
  return `Next 10 depositions: index ${signed(index.mean, 4)} ±${index.half.toFixed(4)}, ${signed(thicknessNm.mean, 2)} ±${thicknessNm.half.toFixed(2)} nm.`;
}

export function watchDocument(line: string, { chambers, shared }: Watched): Record<string, unknown> {
  return {
    line,
    chambers: chambers.map(chamberDocument),
    side_by_side: shared.map((recipe) => beside(chambers, recipe)),
  };
}

const r = (v: number, digits: number) => Number(v.toFixed(digits));
const half = (v: Half, digits: number) => ({ mean: r(v.mean, digits), half_95: r(v.half, digits) });
const bounds = (v: { mean: number; low: number; high: number }, digits: number) => ({
  mean: r(v.mean, digits),
  low: r(v.low, digits),
  high: r(v.high, digits),
});

function chamberDocument(c: WatchedChamber): Record<string, unknown> {
  return {
    chamber: c.chamber,
    urgency: c.urgency,
    depositions_since_clean: c.k,
    clean_logged: c.cleaned,
    next_clean: c.habit && {
      usual_depositions: c.habit.usual,
      cycles: c.habit.cycles,
      least: c.habit.least,
      most: c.habit.most,
      left: c.habit.left,
    },
    alarms: c.alarms.map((a) => a.sentence),
    false_alarms_a_month: c.falseAlarmsAMonth === null ? null : r(c.falseAlarmsAMonth, 3),
    recipes: c.recipes.map((w) => ({
      recipe: w.recipe,
      drift_next_10: { index: half(w.drift.index, 5), thickness_nm: half(w.drift.thicknessNm, 3) },
      forecast: w.forecast && {
        chance_out_now: r(w.forecast.outNow, 3),
        out_by_5_percent: w.forecast.outBy.early,
        out_by_50_percent: w.forecast.outBy.half,
        out_by_95_percent: w.forecast.outBy.late,
        leaves_by: w.forecast.first && {
          goal: w.forecast.first.goal,
          side: w.forecast.first.side,
          share: r(w.forecast.first.share, 3),
        },
        horizon: w.forecast.horizon,
        cannot_tell: w.forecast.cannotTell,
      },
      next: {
        index: bounds(w.next.index, 4),
        thickness_nm: bounds(w.next.thicknessNm, 2),
        chance_in_goal: w.next.chance === null ? null : r(w.next.chance, 4),
      },
      capability: {
        says: w.capability.sentence,
        ...Object.fromEntries(
          (["index", "thicknessNm"] as const).map((name) => {
            const found = w.capability[name];
            const key = name === "index" ? "index" : "thickness_nm";
            return [key, found && { ppk: r(found.ppk, 3), at_least: r(found.ppkAtLeast, 3), runs: found.runs }];
          }),
        ),
      },
      due: w.due,
    })),
    trouble: c.trouble.map(({ code, message, hint }) => ({ code, message, ...(hint && { hint }) })),
  };
}

function beside(chambers: readonly WatchedChamber[], recipe: string): Record<string, unknown> {
  return {
    recipe,
    chambers: chambers.flatMap((c) =>
      c.recipes
        .filter((w) => w.recipe === recipe)
        .map((w) => ({
          chamber: c.chamber,
          index: bounds(w.next.index, 4),
          thickness_nm: bounds(w.next.thicknessNm, 2),
          chance_in_goal: w.next.chance === null ? null : r(w.next.chance, 4),
        })),
    ),
  };
}
