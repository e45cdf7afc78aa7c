/**
 * How an engineer steers a proposal: settings to hold, the only ones to move, and how far each may go from the recipe in force.
 * It narrows what the search may try, never the window.
 */
import type { Settings } from "../../calibration/index.ts";
import { nearestWord, parseQuantity, refuse } from "../../engine/index.ts";
import type { Chamber } from "../line/line.ts";
import { settingOf, typeable } from "../line/settings.ts";
import { type TunedLever, tunedLevers } from "./levers.ts";

export interface Steering {
  /** Held as they are. */
  fixed: readonly string[];
  /** Null: all that the line says to tune. */
  only: readonly string[] | null;
  /** Furthest move of each setting, as written: a share of its value for all, or quantities by name. */
  limit: { share: number } | { by: ReadonlyMap<string, number> } | null;
  /** The three as the engineer gave them, for the record; empty when nothing was. */
  words: string;
}

export const unsteered: Steering = { fixed: [], only: null, limit: null, words: "" };

/**
 * Reads `--fix silane,ammonia`, `--only time` and `--limit-move 3%` (or `time=10s,silane=20sccm`). Refuses names that are no
 * settings of the chamber ("unknown-setting") or that the line does not say to tune ("not-tuned"), limits that are no positive
 * share or quantity ("bad-limit").
 */
export function readSteering(chamber: Chamber, given: { fix?: string; only?: string; limitMove?: string }): Steering {
  const tuned = tunedLevers(chamber).map((lever) => lever.name);
  const names = (text: string, flag: string): string[] =>
    text
      .split(",")
      .map((name) => name.trim())
      .filter((name) => name !== "")
      .map((name) => known(chamber, name, flag, tuned));
  const fixed = given.fix === undefined ? [] : names(given.fix, "--fix");
  const only = given.only === undefined ? null : names(given.only, "--only");
  const limit = given.limitMove === undefined ? null : readLimit(chamber, given.limitMove, tuned);
  const words = [
    fixed.length > 0 ? `fix ${fixed.join(", ")}` : "",
    only ? `only ${only.join(", ")}` : "",
    given.limitMove === undefined ? "" : `limit-move ${given.limitMove.trim()}`,
  ].filter((word) => word !== "");
  return { fixed, only, limit, words: words.join("; ") };
}

function known(chamber: Chamber, name: string, flag: string, tuned: readonly string[]): string {
  if (!chamber.settings.has(name)) {
    const near = nearestWord(name, [...chamber.settings.keys()]);
    refuse("unknown-setting", `${flag}: ${chamber.name} has no setting ${name}`, {
      hint: near ? `did you mean ${near}?` : [...chamber.settings.keys()].join(", "),
    });
  }
  // Held already: asking for it once more is no mistake.
  if (flag !== "--fix" && !tuned.includes(name)) {
    refuse("not-tuned", `${flag}: the line does not say to tune ${name}, so a proposal never moves it`, {
      hint: `tuned are ${tuned.join(", ") || "none"}; tune: true in line.yaml`,
    });
  }
  return name;
}

function readLimit(chamber: Chamber, text: string, tuned: readonly string[]): Steering["limit"] {
  const bad = (what: string) =>
    refuse("bad-limit", `--limit-move ${text}: ${what}`, { hint: "as in 3% or time=10s,silane=20sccm" });
  if (!text.includes("=")) {
    const { value, unit } = parseQuantity(text, "percent");
    const share = unit === "%" ? value / 100 : value;
    if (!(share > 0 && share <= 1)) bad("a share above 0 and at most 100 % is needed");
    return { share };
  }
  const by = new Map<string, number>();
  for (const part of text.split(",")) {
    const [name, quantity, ...rest] = part.split("=").map((word) => word.trim());
    if (quantity === undefined || rest.length > 0) bad(`"${part.trim()}" is no NAME=QUANTITY`);
    const { dimension } = settingOf(chamber, known(chamber, name, "--limit-move", tuned));
    const { value } = parseQuantity(quantity, dimension);
    if (!(value > 0)) bad(`${name} may move by ${quantity}, more than nothing is needed`);
    by.set(name, value);
  }
  return { by };
}

/** The levers a proposal may move about the recipe in force, their ranges narrowed to how far they may go. */
export function steeredLevers(chamber: Chamber, before: Settings, steering: Steering): TunedLever[] {
  return tunedLevers(chamber)
    .filter(({ name }) => before.has(name) && !steering.fixed.includes(name))
    .filter(({ name }) => steering.only === null || steering.only.includes(name))
    .map((lever) => {
      const now = before.get(lever.name) as number;
      const most = mostMove(steering, lever.name, now);
      if (most === null) return lever;
      const { setting } = lever;
      const low = Math.max(setting.low, now - most);
      const high = Math.min(setting.high, now + most);
      return { ...lever, setting: { ...setting, low: Math.min(low, now), high: Math.max(high, now) } };
    })
    .filter(({ setting }) => typeable(setting) !== null);
}

function mostMove({ limit }: Steering, name: string, now: number): number | null {
  if (limit === null) return null;
  if ("share" in limit) return Math.abs(now) * limit.share;
  return limit.by.get(name) ?? null;
}
