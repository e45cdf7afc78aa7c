/** `correct`: a new entry that supersedes a wrong one. Values as a person types them become the fields the book knows. */
import { type Dimension, nearestWord, parseQuantity, refuse } from "../../engine/index.ts";
import type { Chamber } from "../line/line.ts";
import { nameProblem } from "../line/names.ts";
import { asQuantity, parseSet } from "../line/settings.ts";
import { parseWhen } from "../line/zoned-time.ts";
import type { Receipt } from "../record/book.ts";
import { correctDraft } from "../record/change-steps.ts";
import type { AnyDraft, AnyEntry } from "../record/entries.ts";
import { changeId, proposalId } from "../record/ids.ts";
import { type Measured, possibleReading } from "../record/import/cells.ts";
import { splitSettingName } from "../record/steps.ts";
import { recipesOf } from "../record/versions.ts";
import { runNamed } from "./late-readings.ts";
import { gaugeNamed } from "./readings-given.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, write } from "./writing.ts";

interface Reads {
  field: Measured;
  dimension: Dimension;
  /** Unit meant when none is typed; null where it must be. */
  unit: string | null;
}

/** Readings by the names people type. Reflectance could be a fraction as well, so there the unit is needed. */
const readings = new Map<string, Reads>([
  ["index", { field: "index", dimension: "number", unit: "" }],
  ["thickness", { field: "thickness_nm", dimension: "length", unit: "nm" }],
  ["thickness_nm", { field: "thickness_nm", dimension: "length", unit: "nm" }],
  ["reflectance_minimum", { field: "reflectance_minimum_nm", dimension: "length", unit: "nm" }],
  ["reflectance_minimum_nm", { field: "reflectance_minimum_nm", dimension: "length", unit: "nm" }],
  ["weighted_reflectance", { field: "weighted_reflectance_percent", dimension: "percent", unit: null }],
  ["weighted_reflectance_percent", { field: "weighted_reflectance_percent", dimension: "percent", unit: "%" }],
]);
const words = new Map([
  ["on", ["polished", "cell"]],
  ["kind", ["tuning", "production"]],
]);
const counts = ["count", "since_clean"];
const texts = ["boat", "position", "note", "what"];
const others = ["at", "chamber", "recipe", "gauge", "run"];
/** What every entry of its kind must have. */
const kept = new Set(["at", "chamber", "recipe", "count", "gauge", "on", "run"]);
/** Clocks of two machines differ by so much. */
const aheadMs = 5 * 60_000;

export interface CorrectionDone {
  entry: number | null;
  hash: string | null;
  drafts: AnyDraft[];
  notices: string[];
  /** Proposals and changes that rest on what was corrected. */
  rests: string[];
}

/**
 * Corrects an entry. `given` are names and values as typed ("-" takes a value away). Refuses `given-twice`,
 * `no-such-field`, `future-time`, `impossible-value`, `unknown-recipe`, `unknown-gauge`, and what `correctDraft`,
 * `parseSet` and `parseQuantity` refuse.
 */
export async function correctEntry(
  ws: Workspace,
  how: { entry: number; given: readonly (readonly [string, string])[]; reason: string; dryRun?: boolean } & Stamp,
): Promise<CorrectionDone> {
  const fields = fieldsOf(ws, how.entry, how.given);
  const written = await write(
    ws,
    (ledger) => [correctDraft(ledger, { entry: how.entry, fields, reason: how.reason, at: how.at, by: how.by })],
    { dryRun: how.dryRun },
  );
  const receipt: Receipt | undefined = written.receipts[0];
  const proposals = [...ws.ledger.proposals.values()].filter((p) => p.restsOnCorrected.includes(how.entry));
  const changes = [...ws.ledger.changes.values()].filter((c) => proposals.some((p) => p.seq === c.proposal));
  const verdicts = [...ws.ledger.changes.values()].filter((c) => c.closed?.restsOnCorrected.includes(how.entry));
  const named = [...new Set([...changes, ...verdicts])];
  return {
    entry: receipt?.seq ?? null,
    hash: receipt?.hash ?? null,
    drafts: written.drafts,
    notices: written.notices,
    rests: [...proposals.map((p) => proposalId(p.seq)), ...named.map((c) => changeId(c.seq))],
  };
}

function fieldsOf(
  ws: Workspace,
  number: number,
  given: readonly (readonly [string, string])[],
): Record<string, unknown> {
  const entry = ws.ledger.entries[number];
  if (!entry) return refuse("no-such-entry", `there is no entry ${number}`);
  const typed = new Map<string, string>();
  for (const [name, value] of given) {
    const key = ws.line.settings.has(splitSettingName(name).setting) ? name : name.replaceAll("-", "_").toLowerCase();
    if (typed.has(key)) refuse("given-twice", `${name} is given twice`);
    typed.set(key, value.trim());
  }
  const chamber = typed.get("chamber") ?? chamberOf(ws, entry);
  return Object.fromEntries([...typed].map(([name, value]) => fieldOf(ws, name, value, chamber)));
}

/** The chamber of an entry as it stands after earlier corrections, as far as it has one. */
function chamberOf(ws: Workspace, entry: AnyEntry): string | undefined {
  const run = ws.ledger.runs.get(entry.kind === "reading" ? entry.data.run : entry.seq);
  if (run) return run.chamber;
  return "chamber" in entry.data && typeof entry.data.chamber === "string" ? entry.data.chamber : undefined;
}

function fieldOf(ws: Workspace, name: string, typed: string, chamber: string | undefined): [string, unknown] {
  const reading = readings.get(name);
  const field = reading?.field ?? name;
  if (typed === "-") {
    if (kept.has(name)) refuse("bad-argument", `${name} cannot be taken away, only set right`);
    return [field, null];
  }
  if (typed === "") return refuse("missing-value", `${name} needs a value`, { hint: "- takes a value away" });
  if (reading) return [field, readingTyped(typed, reading)];
  const choice = words.get(name);
  if (choice && !choice.includes(typed)) refuse("bad-argument", `${name} is ${choice.join(" or ")}, not ${typed}`);
  if (choice || texts.includes(name)) return [name, typed];
  if (counts.includes(name)) return [name, wholeNumber(name, typed, name === "count" ? 1 : 0)];
  if (name === "at") return [name, when(ws, typed)];
  if (name === "chamber") return [name, ws.chamber(typed).name];
  if (name === "recipe") return [name, recipeNamed(ws, typed, chamber)];
  if (name === "gauge") return [name, gaugeNamed(ws, typed).name];
  if (name === "run") return [name, runNamed(ws.ledger, typed).seq];
  return [name, settingTyped(ws, name, typed, chamber === undefined ? undefined : ws.chamber(chamber))];
}

function readingTyped(typed: string, { field, dimension, unit }: Reads): number {
  const { value } = parseQuantity(typed, dimension, unit === null ? {} : { defaultUnit: unit });
  return possibleReading(value, field, typed);
}

function settingTyped(ws: Workspace, name: string, typed: string, chamber: Chamber | undefined): unknown {
  const { setting } = splitSettingName(name);
  const declared = chamber?.settings.get(setting);
  if (chamber && declared) {
    const value = parseSet([`${setting}=${typed}`], chamber, { allowOutside: true }).get(setting) as number;
    return asQuantity(declared, value);
  }
  const known = [...readings.keys(), ...words.keys(), ...counts, ...texts, ...others, ...ws.line.settings.keys()];
  const near = nearestWord(name, known);
  return refuse("no-such-field", `there is no "${name}" that could be corrected`, {
    hint: near ? `did you mean ${near}?` : "as in index=2.043, thickness=84.1nm, silane=812sccm, count=2, at=TIME",
  });
}

function when(ws: Workspace, typed: string): string {
  const nowMs = ws.ports.now();
  const ms = parseWhen(typed, { timeZone: ws.line.timeZone, nowMs });
  if (ms > nowMs + aheadMs)
    refuse("future-time", `at=${typed} lies in the future`, { hint: "the book holds what happened" });
  return new Date(ms).toISOString();
}

/** A recipe the chamber has run or the line declares: a correction makes no new one. */
function recipeNamed(ws: Workspace, name: string, chamber: string | undefined): string {
  const complaint = nameProblem(name);
  if (complaint) refuse("bad-name", complaint.message, { hint: complaint.hint });
  const known = [
    ...new Set([...(chamber === undefined ? [] : recipesOf(ws.ledger, chamber)), ...ws.line.recipes.keys()]),
  ];
  if (known.includes(name)) return name;
  const near = nearestWord(name, known);
  return refuse("unknown-recipe", `${chamber ?? "the line"} never ran a recipe ${name}`, {
    hint: near ? `did you mean ${near}?` : `known are ${known.join(", ")}`,
  });
}

function wholeNumber(name: string, typed: string, least: number): number {
  const value = Number(typed);
  if (/^\d+$/.test(typed) && value >= least && value <= 1_000_000) return value;
  return refuse("not-a-count", `${name} is ${typed}; a whole number from ${least} on is needed`);
}
