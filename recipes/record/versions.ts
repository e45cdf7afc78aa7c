/**
 * Which settings a chamber ran under a recipe's name, and since when: what was stated (`recipe` entries) and what was
 * typed in (`enter` entries). Where nothing was ever stated, the latest run's settings stand in, and the answer says so.
 */
import type { Quantity, StepSettings } from "./entries.ts";
import { chamberRecord, type Ledger } from "./ledger.ts";
import { flatSettings } from "./steps.ts";
import { type RunRecord, runsOf } from "./timeline.ts";

export interface RecipeVersion {
  /** Number of the entry that put it in force. */
  seq: number;
  at: string;
  atMs: number;
  by: string;
  recipe: string;
  steps: StepSettings[];
  source: "recipe" | "enter";
  reason: string | null;
  /** The change entered, for `source: "enter"`. */
  change: number | null;
}

export interface RecipeInForce {
  recipe: string;
  steps: StepSettings[];
  /** False: nobody ever stated it; these are the latest run's settings. */
  stated: boolean;
  /** The entry it comes from. */
  entry: number;
  since: string;
  sinceMs: number;
  by: string;
}

/** All versions of a recipe in a chamber, by (when, number). */
export function versionsOf(ledger: Ledger, chamber: string, recipe: string): readonly RecipeVersion[] {
  return chamberRecord(ledger, chamber).versions.get(recipe) ?? [];
}

function fromVersion(version: RecipeVersion): RecipeInForce {
  const { recipe, steps, seq, at, atMs, by } = version;
  return { recipe, steps, stated: true, entry: seq, since: at, sinceMs: atMs, by };
}

function fromRun(run: RunRecord): RecipeInForce {
  const { recipe, data, seq, at, atMs, by } = run;
  return { recipe, steps: data.steps, stated: false, entry: seq, since: at, sinceMs: atMs, by };
}

/** What was in force at `atMs` (ms since 1970), or null when neither statement nor run came before. */
export function recipeInForce(ledger: Ledger, chamber: string, recipe: string, atMs: number): RecipeInForce | null {
  const version = versionsOf(ledger, chamber, recipe).findLast((one) => one.atMs <= atMs);
  if (version) return fromVersion(version);
  const { timeline } = chamberRecord(ledger, chamber);
  const run = timeline.findLast((one) => one.kind === "run" && one.recipe === recipe && one.atMs <= atMs);
  return run?.kind === "run" ? fromRun(run) : null;
}

/**
 * The anchor: the last qualified recipe, which is the latest that a person stated by a `recipe` entry up to `atMs`.
 * Without one, what was in force before the first entered change, else the first run under that name: the oldest thing
 * known, so that corrections add up from there; `stated` is then false. Null when the chamber never ran the recipe.
 */
export function lastQualified(
  ledger: Ledger,
  chamber: string,
  recipe: string,
  atMs = Number.POSITIVE_INFINITY,
): RecipeInForce | null {
  const versions = versionsOf(ledger, chamber, recipe).filter((one) => one.atMs <= atMs);
  const stated = versions.findLast((one) => one.source === "recipe");
  if (stated) return fromVersion(stated);
  const runs = runsOf(chamberRecord(ledger, chamber).timeline).filter(
    (run) => run.recipe === recipe && run.atMs <= atMs,
  );
  const [first] = versions;
  const change = first?.change != null ? ledger.changes.get(first.change) : undefined;
  if (first && change) return { ...fromVersion(first), steps: change.before, stated: false };
  return runs.length > 0 ? fromRun(runs[0]) : null;
}

/** Names of the recipes a chamber has run or had stated, in the order first met. */
export function recipesOf(ledger: Ledger, chamber: string): string[] {
  const names = new Set<string>();
  for (const event of chamberRecord(ledger, chamber).timeline) {
    if (event.kind === "run" || event.kind === "version") names.add(event.recipe);
  }
  return [...names];
}

/** Settings that differ between two recipes, by flat name; null where one does not have it. */
export function differences(
  before: readonly StepSettings[],
  after: readonly StepSettings[],
): { setting: string; before: Quantity | null; after: Quantity | null }[] {
  const left = flatSettings(before);
  const right = flatSettings(after);
  return [...new Set([...left.keys(), ...right.keys()])].flatMap((setting) => {
    const a = left.get(setting) ?? null;
    const b = right.get(setting) ?? null;
    return a?.value === b?.value && a?.unit === b?.unit ? [] : [{ setting, before: a, after: b }];
  });
}
