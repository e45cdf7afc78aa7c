/** The life of a change: adopted from a proposal, approved where the line wants it, entered, closed beside what came out, undone. */
import { refuse } from "../../engine/index.ts";
import { measuredInGoal } from "../advice/mode.ts";
import { fromQuantity, shown } from "../line/settings.ts";
import { outside } from "../line/window.ts";
import {
  adoptDraft,
  approveDraft,
  cameBetween,
  changeAt,
  closeDraft,
  enterDraft,
  proposalAt,
  runsToClose,
  undoDraft,
} from "../record/change-steps.ts";
import { openChange } from "../record/changes.ts";
import type { AnyDraft, Quantity, StepSettings } from "../record/entries.ts";
import { changeId } from "../record/ids.ts";
import type { Ledger } from "../record/ledger.ts";
import { flatSettings } from "../record/steps.ts";
import { proposalBasis } from "./asking.ts";
import { canonicalSettings, filmReading, lightReadings } from "./learn.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, type Written, write } from "./writing.ts";

export interface Changed extends Written {
  change: string;
  /** What to type in at the tool, or what is in force now: a line each. */
  sheet: string[];
  /** People of whom one must approve before it is typed in. */
  awaits?: readonly string[];
  warnings: string[];
}

/** The settings of a change, a line each: "silane   812 sccm -> 835 sccm", unchanged ones said so. */
export function sheetOf(ws: Workspace, before: readonly StepSettings[], after: readonly StepSettings[]): string[] {
  const was = flatSettings(before);
  const now = inOrder(ws, flatSettings(after));
  const rows = now.map(([name, q]) => {
    const old = was.get(name);
    const same = old && old.value === q.value && old.unit === q.unit;
    return {
      name,
      now: typedWords(ws, name, q),
      note: same ? "as it is" : old ? `was ${typedWords(ws, name, old)}` : "new",
      changed: !same,
    };
  });
  const width = Math.max(...rows.map((r) => r.name.length));
  const widthNow = Math.max(...rows.map((r) => r.now.length));
  return rows.map((r) => `${r.changed ? ">" : " "} ${r.name.padEnd(width)}  ${r.now.padStart(widthNow)}  (${r.note})`);
}

/** A value as it is typed in: with the decimals of the setting's smallest step. */
function typedWords(ws: Workspace, name: string, q: Quantity): string {
  const setting = ws.line.settings.get(name);
  return setting ? shown(setting, fromQuantity(setting, q)) : `${q.value} ${q.unit}`;
}

/** Settings in the order the line declares them: the book keeps them sorted by name. */
export function inOrder<T>(ws: Workspace, settings: ReadonlyMap<string, T>): [string, T][] {
  const order = [...ws.line.settings.keys()];
  const place = (name: string) => (order.includes(name) ? order.indexOf(name) : order.length);
  return [...settings].sort((a, b) => place(a[0]) - place(b[0]));
}

export async function adopt(
  ws: Workspace,
  how: { proposal: number; reason: string; entered: boolean; dryRun?: boolean } & Stamp,
): Promise<Changed> {
  if (how.reason.trim() === "") refuse("no-reason", "a change needs a reason", { hint: "--reason TEXT" });
  const proposal = proposalAt(ws.ledger, how.proposal);
  const { chamber, recipe, document } = proposal.data;
  const open = openChange(ws.ledger, chamber, recipe);
  const warnings = open ? [`${open.id} was open and is closed as superseded.`] : [];
  const mode = document["mode_asked"];
  let sheet: string[] = [];
  const written = await write(
    ws,
    (ledger, next) => {
      const forMode = mode === "tuning" || mode === "production" ? mode : null;
      const steered = document["steered"];
      const basis = proposalBasis(ws, chamber, recipe, forMode, typeof steered === "string" ? steered : "");
      const draft = adoptDraft(ledger, { proposal: how.proposal, reason: how.reason, basis, at: how.at, by: how.by });
      insideWindow(ws, chamber, draft.data.after);
      sheet = sheetOf(ws, draft.data.before, draft.data.after);
      const drafts: AnyDraft[] = [draft];
      if (how.entered) {
        if (ws.line.people.approve.length > 0)
          refuse("needs-approval", `a change on this line waits for ${ws.line.people.approve.join(" or ")}`, {
            hint: "adopt without --entered",
          });
        drafts.push({ kind: "enter", at: how.at, by: how.by, data: { change: next, read_back: draft.data.after } });
      }
      return drafts;
    },
    { dryRun: how.dryRun },
  );
  const seq = written.receipts[0]?.seq ?? ws.ledger.entries.length;
  return { ...written, change: changeId(seq), sheet, warnings, awaits: ws.line.people.approve };
}

function insideWindow(ws: Workspace, chamber: string, steps: readonly StepSettings[]): void {
  const found = outside(canonicalSettings(ws.line, steps), ws.chamber(chamber), ws.line);
  if (found.length > 0)
    refuse("outside-window", found.map((f) => f.sentence).join(" "), {
      hint: "the window can be changed only in line.yaml, by whoever qualifies it",
    });
}

export async function approve(ws: Workspace, how: { change: number; dryRun?: boolean } & Stamp): Promise<Changed> {
  const person = how.by ?? ws.ports.person;
  const written = await write(
    ws,
    (ledger) => [approveDraft(ledger, { change: how.change, person, approvers: ws.line.people.approve, at: how.at })],
    { dryRun: how.dryRun },
  );
  const change = changeAt(ws.ledger, how.change);
  return { ...written, change: change.id, sheet: sheetOf(ws, change.before, change.after), warnings: [] };
}

export async function enter(
  ws: Workspace,
  how: { change: number; readBack: readonly StepSettings[]; dryRun?: boolean } & Stamp,
): Promise<Changed> {
  const warnings: string[] = [];
  let sheet: string[] = [];
  const written = await write(
    ws,
    (ledger) => {
      const draft = enterDraft(ledger, {
        change: how.change,
        readBack: how.readBack,
        approvers: ws.line.people.approve,
        at: how.at,
        by: how.by,
      });
      const change = changeAt(ledger, how.change);
      const differs = [...flatSettings(draft.data.read_back)].filter(([name, q]) => {
        const want = flatSettings(change.after).get(name);
        return want && (want.value !== q.value || want.unit !== q.unit);
      });
      for (const [name, q] of differs) {
        const want = flatSettings(change.after).get(name);
        warnings.push(
          `${name} was read back as ${q.value} ${q.unit}, adopted was ${want?.value} ${want?.unit}: the value read back is in force.`,
        );
      }
      const found = outside(canonicalSettings(ws.line, draft.data.read_back), ws.chamber(change.chamber), ws.line);
      warnings.push(...found.map((f) => f.sentence));
      sheet = sheetOf(ws, change.before, draft.data.read_back);
      return [draft];
    },
    { dryRun: how.dryRun },
  );
  const change = changeAt(ws.ledger, how.change);
  return {
    ...written,
    change: change.id,
    sheet,
    warnings,
  };
}

export interface Verdict {
  verdict: string;
  expected: Record<string, unknown>;
  got: Record<string, unknown>;
  /** Expected beside got, a line each. */
  lines: string[];
}

interface IntervalShape {
  mean: number;
  low: number;
  high: number;
}
const isInterval = (v: unknown): v is IntervalShape =>
  typeof v === "object" && v !== null && "mean" in v && "low" in v && "high" in v;

const properties = [
  { key: "index", words: "index", digits: 3, unit: "" },
  { key: "thickness_nm", words: "thickness", digits: 1, unit: " nm" },
  { key: "weighted_reflectance_percent", words: "weighted reflectance", digits: 2, unit: " %" },
  { key: "reflectance_minimum_nm", words: "reflectance minimum", digits: 0, unit: " nm" },
] as const;

/** Expected beside got for a change, from the runs measured since it was entered. Refuses `no-run-since`, `no-reading-since`. */
export function verdictOn(ws: Workspace, ledger: Ledger, number: number): Verdict {
  const change = changeAt(ledger, number);
  const runs = runsToClose(ledger, number);
  const goal = ws.goal(change.recipe);
  const measured = runs
    .map((run) => ({ run, film: filmReading(ws.line, run.readings), light: lightReadings(ws.line, run.readings) }))
    .filter((r) => r.film || r.light.length > 0);
  if (measured.length === 0)
    refuse(
      "no-reading-since",
      `${runs.length} run${runs.length > 1 ? "s" : ""} since ${change.id} was entered, none measured`,
      { hint: "record a reading first" },
    );
  const got: Record<string, unknown> = { measured_runs: measured.length };
  const lines: string[] = [];
  const missed: string[] = [];
  for (const { key, words, digits, unit } of properties) {
    const values = measured
      .map(({ film, light }) =>
        key === "index"
          ? film?.index
          : key === "thickness_nm"
            ? film?.thicknessNm
            : light.find((l) => l.kind === key)?.value,
      )
      .filter((v): v is number => v !== null && v !== undefined);
    if (values.length === 0) continue;
    const mean = values.reduce((a, b) => a + b, 0) / values.length;
    got[key] = { mean: Number(mean.toFixed(4)), values };
    const want = change.predicted[key];
    if (!isInterval(want)) {
      lines.push(`${words}: got ${mean.toFixed(digits)}${unit}`);
      continue;
    }
    // The interval is for one run; a mean of several should lie well inside it, so this errs towards "as expected".
    const ok = mean >= want.low && mean <= want.high;
    if (!ok) missed.push(words);
    lines.push(
      `${words}: expected ${want.mean.toFixed(digits)} (${want.low.toFixed(digits)}-${want.high.toFixed(digits)}), got ${mean.toFixed(digits)}${unit}${values.length > 1 ? `, mean of ${values.length}` : ""}: ${ok ? "as expected" : "not as expected"}`,
    );
  }
  // Expected and got are what a gauge reads; the goal is for the film itself, freed of what the gauge reads too high.
  const hits = measured.map(({ run, light }) => {
    const film = ws.filmOf(run);
    return measuredInGoal(
      {
        index: film?.index ?? null,
        thicknessNm: film?.thicknessNm ?? null,
        reflectanceMinimumNm: light.find((l) => l.kind === "reflectance_minimum_nm")?.value ?? null,
        weightedReflectancePercent: light.find((l) => l.kind === "weighted_reflectance_percent")?.value ?? null,
      },
      goal,
    );
  });
  const inGoal = hits.filter((h) => h === true).length;
  const judged = hits.filter((h) => h !== null).length;
  const verdict = `${missed.length ? `not as expected in ${missed.join(" and ")}` : "as expected"}; ${inGoal} of ${judged} measured run${judged === 1 ? "" : "s"} in goal`;
  return { verdict, expected: change.predicted, got, lines };
}

export async function close(
  ws: Workspace,
  how: { change: number; dryRun?: boolean } & Stamp,
): Promise<Changed & { verdict: Verdict }> {
  let verdict: Verdict | null = null;
  const written = await write(
    ws,
    (ledger) => {
      verdict = verdictOn(ws, ledger, how.change);
      const { verdict: words, expected, got } = verdict;
      return [closeDraft(ledger, { change: how.change, verdict: words, expected, got, at: how.at, by: how.by })];
    },
    { dryRun: how.dryRun },
  );
  const change = changeAt(ws.ledger, how.change);
  return { ...written, change: change.id, sheet: [], warnings: [], verdict: verdict as unknown as Verdict };
}

/** A change back to the settings from before: refused outside the window as it is now, warned where a clean came between. */
export async function undo(
  ws: Workspace,
  how: { change: number; reason: string; dryRun?: boolean } & Stamp,
): Promise<Changed & { cancelled: boolean }> {
  if (how.reason.trim() === "") refuse("no-reason", "an undo needs a reason", { hint: "--reason TEXT" });
  const warnings: string[] = [];
  let sheet: string[] = [];
  let cancelled = false;
  const written = await write(
    ws,
    (ledger) => {
      const draft = undoDraft(ledger, {
        change: how.change,
        reason: how.reason,
        nowMs: ws.ports.now(),
        at: how.at,
        by: how.by,
      });
      cancelled = draft.data.cancelled;
      if (!cancelled) {
        insideWindow(ws, draft.data.chamber, draft.data.after);
        const between = cameBetween(ledger, changeAt(ledger, how.change));
        for (const event of between)
          warnings.push(
            `A ${event.kind} came after the change was entered (entry ${event.seq}): the old settings need not give the old film.`,
          );
        sheet = sheetOf(ws, draft.data.before, draft.data.after);
      }
      return [draft];
    },
    { dryRun: how.dryRun },
  );
  const seq = written.receipts[0]?.seq ?? ws.ledger.entries.length;
  return { ...written, change: cancelled ? changeId(how.change) : changeId(seq), sheet, warnings, cancelled };
}
