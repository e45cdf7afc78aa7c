/**
 * The before-and-after report: for each change what it was, why, who and when, before beside after, expected beside got.
 * Markdown; the numbers come from the book, so the report can be made again from it at any time.
 */

import { inOrder } from "../desk/changing.ts";
import { goalText, lightText } from "../desk/words.ts";
import type { Workspace } from "../desk/workspace.ts";
import { formatWhen } from "../line/zoned-time.ts";
import { runsSince } from "../record/change-steps.ts";
import type { Change } from "../record/changes.ts";
import type { StepSettings } from "../record/entries.ts";
import { proposalId } from "../record/ids.ts";
import { flatSettings } from "../record/steps.ts";
import { plain, table } from "./markdown.ts";

/** A report over all changes (newest first), or over one. */
export function reportMarkdown(ws: Workspace, only: Change | null): string {
  const changes = only ? [only] : [...ws.ledger.changes.values()].reverse();
  const parts = [
    `# ${plain(ws.line.name)}: ${only ? `change ${only.id}` : "changes"}`,
    `Goal: ${plain(goalText(ws.line.goal))}. Weighted reflectance: ${plain(lightText(ws.line))}.`,
    `Book: ${ws.ledger.entries.length} entries, head \`${ws.book.hash}\`. Line file \`${ws.line.hash}\`.`,
  ];
  if (changes.length === 0) parts.push("No change has been adopted yet.");
  for (const change of changes) parts.push(...changeSection(ws, change));
  parts.push(
    "---",
    "This report records what people did; it is no instruction. Local codes, site management of change and authorised practice come first.",
  );
  return `${parts.join("\n\n")}\n`;
}

function changeSection(ws: Workspace, change: Change): string[] {
  const when = (atMs: number) => formatWhen(atMs, ws.line.timeZone);
  const out = [`## ${change.id}: ${plain(change.chamber)}, recipe ${plain(change.recipe)} (${change.state})`];
  const steps = [`adopted ${when(change.atMs)} by ${change.by}`];
  for (const mark of change.approved) steps.push(`approved ${when(mark.atMs)} by ${mark.by}`);
  if (change.entered) steps.push(`entered ${when(change.entered.atMs)} by ${change.entered.by}`);
  if (change.closed) steps.push(`closed ${when(change.closed.atMs)} by ${change.closed.by}`);
  if (change.cancelled)
    steps.push(`cancelled ${when(change.cancelled.atMs)} by ${change.cancelled.by}: ${change.cancelled.reason}`);
  out.push(steps.map((s) => `* ${plain(s)}`).join("\n"));
  out.push(`**Reason given:** ${plain(change.reason)}`);
  if (change.undoes !== null) out.push(`This change undoes c-${String(change.undoes).padStart(6, "0")}.`);
  out.push(
    "### Settings",
    settingsTable(ws, change.before, change.entered?.readBack ?? change.after, change.entered !== null),
  );
  const proposal = change.proposal === null ? undefined : ws.ledger.proposals.get(change.proposal);
  if (proposal) {
    const because = proposal.data.document["because"];
    if (Array.isArray(because) && because.length > 0)
      out.push(`### Why (${proposalId(proposal.seq)})`, because.map((b) => `* ${plain(String(b))}`).join("\n"));
    if (proposal.restsOnCorrected.length > 0)
      out.push(`**Rests on a reading corrected since:** entries ${proposal.restsOnCorrected.join(", ")}.`);
    if (proposal.restsOnLate.length > 0)
      out.push(`**Proposed before it was known:** entries ${proposal.restsOnLate.join(", ")}, which came later.`);
  }
  out.push("### Expected beside got", expectedTable(change));
  const runs = runsSince(ws.ledger, change);
  if (runs.length > 0) {
    const rows = runs.map((run) => {
      const read = (key: "index" | "thickness_nm" | "reflectance_minimum_nm" | "weighted_reflectance_percent") =>
        String(run.readings.find((r) => r[key] !== undefined)?.[key] ?? "");
      return [
        String(run.seq),
        when(run.atMs),
        run.by,
        read("index"),
        read("thickness_nm"),
        read("weighted_reflectance_percent"),
        read("reflectance_minimum_nm"),
      ];
    });
    out.push(
      "### Runs since it was entered",
      table(
        ["entry", "when", "by", "index", "thickness nm", "weighted reflectance %", "minimum nm"],
        rows.slice(0, 30),
      ),
    );
    if (rows.length > 30) out.push(`and ${rows.length - 30} more.`);
  }
  out.push(`**Verdict:** ${plain(change.closed?.verdict ?? "open")}`);
  const { restsOnCorrected = [], restsOnLate = [] } = change.closed ?? {};
  if (restsOnCorrected.length > 0)
    out.push(`**The verdict rests on what was corrected since:** entries ${restsOnCorrected.join(", ")}.`);
  if (restsOnLate.length > 0)
    out.push(`**The verdict was given before it was known:** entries ${restsOnLate.join(", ")}, which came later.`);
  return out;
}

function settingsTable(
  ws: Workspace,
  before: readonly StepSettings[],
  after: readonly StepSettings[],
  entered: boolean,
): string {
  const was = flatSettings(before);
  const rows = inOrder(ws, flatSettings(after)).map(([name, q]) => {
    const old = was.get(name);
    const change =
      old && old.unit === q.unit && old.value !== 0 && old.value !== q.value
        ? `${q.value > old.value ? "+" : ""}${((100 * (q.value - old.value)) / old.value).toFixed(1)} %`
        : "";
    return [name, old ? `${old.value} ${old.unit}` : "", `${q.value} ${q.unit}`, change];
  });
  return table(["setting", "before", entered ? "after (read back)" : "after", "change"], rows);
}

function expectedTable(change: Change): string {
  const rows: string[][] = [];
  for (const [key, words, digits] of [
    ["index", "index", 3],
    ["thickness_nm", "thickness nm", 1],
    ["weighted_reflectance_percent", "weighted reflectance %", 2],
    ["reflectance_minimum_nm", "reflectance minimum nm", 0],
  ] as const) {
    const want = change.predicted[key] as { mean: number; low: number; high: number } | null | undefined;
    const got = change.closed?.got[key] as { mean: number; values: number[] } | undefined;
    if (!want && !got) continue;
    rows.push([
      words,
      want
        ? `${want.mean.toFixed(digits)} (${want.low.toFixed(digits)} to ${want.high.toFixed(digits)})`
        : "not predicted",
      got
        ? `${got.mean.toFixed(digits)} (${got.values.length} run${got.values.length > 1 ? "s" : ""})`
        : "not measured",
    ]);
  }
  return rows.length
    ? table(["", "expected, middle 95 %", "got"], rows)
    : "Nothing was predicted: a person's own change or an undo.";
}
