/**
 * Corrections that have added up past the anchor, the last qualified recipe, as an alarm like any other: a slow leak
 * absorbed in harmless steps is the miss that hurts, so past the declared sum a person must look.
 */
import type { Settings } from "../../calibration/index.ts";
import type { Chamber, Line } from "../line/line.ts";
import { anchorUse } from "../line/window.ts";
import { firstChecks } from "./alarm-checks.ts";
import type { Alarm } from "./alarms.ts";
import { moveWords } from "./reasons.ts";

export interface Anchored {
  line: Line;
  chamber: Chamber;
  /** What is in force. */
  before: Settings;
  /** The last qualified recipe and the entry it comes from; null where nothing is known to have been qualified. */
  anchor: Settings | null;
  anchorEntry: number | null;
  overridden: ReadonlySet<string>;
}

/** Is there an anchor that these settings are past, and has nobody overruled it? */
export function isPastAnchor({ line, anchor, overridden }: Anchored, settings: Settings): boolean {
  return anchor !== null && !overridden.has("past_anchor") && anchorUse(anchor, settings, line).some((use) => use.past);
}

/** The alarm for settings past the anchor: wanted ones stop the proposal; those in force already are told about. */
export function pastAnchor(a: Anchored, settings: Settings): Alarm {
  const inForce = settings === a.before;
  const past = a.anchor ? anchorUse(a.anchor, settings, a.line).filter((use) => use.past) : [];
  const far = past
    .map(
      ({ text, used, limit }) =>
        `${text} ${(100 * Math.abs(used)).toFixed(1)} % ${used < 0 ? "below" : "above"} the last qualified recipe${a.anchorEntry === null ? "" : ` (entry ${a.anchorEntry})`}, past the ${Number((100 * limit).toPrecision(3))} % allowed`,
    )
    .join(" and ");
  const lead = inForce
    ? `the recipe in force has ${far}`
    : `the correction needed (${moveWords(a.chamber, a.before, settings).join(", ")}) would take ${far}`;
  return {
    name: "past_anchor",
    calls: inForce ? "tell" : "stop",
    certain: !inForce,
    sentence: `past_anchor: ${lead}: a person must look before more is corrected.`,
    checks: firstChecks.past_anchor,
    entry: a.anchorEntry,
  };
}
