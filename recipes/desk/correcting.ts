/** `correct`: a new entry that supersedes a wrong one. Values as a person types them become the fields the book knows. */
import { parseQuantity, refuse } from "../../engine/index.ts";
import { asQuantity, parseSet } from "../line/settings.ts";
import { parseWhen } from "../line/zoned-time.ts";
import type { Receipt } from "../record/book.ts";
import { correctDraft } from "../record/change-steps.ts";
import type { AnyDraft } from "../record/entries.ts";
import { changeId, proposalId } from "../record/ids.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, write } from "./writing.ts";

/** Fields with a unit of their own: the name in the book, and the unit meant when none is typed. */
const measured: Record<string, { field: string; dimension: "number" | "length" | "percent"; unit: string }> = {
  index: { field: "index", dimension: "number", unit: "" },
  thickness: { field: "thickness_nm", dimension: "length", unit: "nm" },
  thickness_nm: { field: "thickness_nm", dimension: "length", unit: "nm" },
  reflectance_minimum: { field: "reflectance_minimum_nm", dimension: "length", unit: "nm" },
  reflectance_minimum_nm: { field: "reflectance_minimum_nm", dimension: "length", unit: "nm" },
  weighted_reflectance: { field: "weighted_reflectance_percent", dimension: "percent", unit: "%" },
  weighted_reflectance_percent: { field: "weighted_reflectance_percent", dimension: "percent", unit: "%" },
};
const counts = ["count", "since_clean"];

export interface CorrectionDone {
  entry: number | null;
  hash: string | null;
  drafts: AnyDraft[];
  notices: string[];
  /** Proposals and changes that rest on what was corrected. */
  rests: string[];
}

/**
 * Corrects an entry. `given` are names and values as typed ("-" takes a value away). Refuses what `correctDraft`,
 * `parseSet` and `parseQuantity` refuse.
 */
export async function correctEntry(
  ws: Workspace,
  how: { entry: number; given: Record<string, string>; reason: string; dryRun?: boolean } & Stamp,
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
  return {
    entry: receipt?.seq ?? null,
    hash: receipt?.hash ?? null,
    drafts: written.drafts,
    notices: written.notices,
    rests: [...proposals.map((p) => proposalId(p.seq)), ...changes.map((c) => changeId(c.seq))],
  };
}

function fieldsOf(ws: Workspace, number: number, given: Record<string, string>): Record<string, unknown> {
  const entry = ws.ledger.entries[number];
  if (!entry) return refuse("no-such-entry", `there is no entry ${number}`);
  const named = "chamber" in entry.data && typeof entry.data.chamber === "string" ? entry.data.chamber : undefined;
  const chamber = given["chamber"] ?? named;
  const out: Record<string, unknown> = {};
  for (const [name, typed] of Object.entries(given)) {
    const key = name.replaceAll("-", "_");
    const reading = measured[key];
    if (typed === "-") out[reading?.field ?? key] = null;
    else if (reading) out[reading.field] = parseQuantity(typed, reading.dimension, { defaultUnit: reading.unit }).value;
    else if (counts.includes(key)) out[key] = wholeNumber(key, typed);
    else if (key === "at")
      out[key] = new Date(parseWhen(typed, { timeZone: ws.line.timeZone, nowMs: ws.ports.now() })).toISOString();
    else if (key === "chamber") out[key] = ws.chamber(typed).name;
    else if (chamber !== undefined && ws.line.settings.has(name)) {
      const one = ws.chamber(chamber);
      const value = parseSet([`${name}=${typed}`], one, { allowOutside: true }).get(name) as number;
      const setting = one.settings.get(name);
      if (setting) out[name] = asQuantity(setting, value);
    } else out[key] = typed;
  }
  return out;
}

function wholeNumber(name: string, typed: string): number {
  const value = Number(typed);
  return Number.isInteger(value) ? value : refuse("not-a-count", `${name} is ${typed}; a whole number is needed`);
}
