/**
 * A file of runs as entries to be written, all or none: understands the headings, reads every row, names all that is
 * wrong, leaves out what the book has already, and says what it understood. Writes nothing.
 */
import type { Line } from "../../line/line.ts";
import type { AnyDraft, Reading } from "../entries.ts";
import { bookTime } from "../format.ts";
import type { Ledger } from "../ledger.ts";
import { MEASURED } from "./cells.ts";
import { type Columns, readColumns } from "./columns.ts";
import { type ImportMap, NO_MAP } from "./map-file.ts";
import { Problems } from "./problems.ts";
import { type EVENTS, type RowRead, readRow } from "./rows.ts";
import { readTable, type Table } from "./table.ts";

export interface ImportRequest {
  bytes: Uint8Array;
  /** Name of the file, for messages and for the entries. */
  file: string;
  line: Line;
  ledger: Ledger;
  nowMs: number;
  map?: ImportMap;
  /** Recipe of rows that name none; the chamber's only one when left out. */
  recipe?: string;
}

export interface ImportPlan {
  /** What to write in one go, the `import` entry first; empty when every row is in the book already. */
  entries: AnyDraft[];
  columns: { column: number; heading: string; meaning: string }[];
  ignored: string[];
  /** Rows read, headings and empty lines not counted. */
  rows: number;
  chambers: {
    chamber: string;
    runs: number;
    cleans: number;
    precoats: number;
    services: number;
    from: string;
    to: string;
  }[];
  /** Rows left out because the book, or an earlier row, says the same. */
  skipped: number;
  notes: string[];
  /** The same in words, for --dry-run. */
  text: string;
}

/**
 * Plans the import of a file. Throws a Refusal with every problem found (at most 50, then a count), each with row and
 * column; nothing is imported then.
 */
export function planImport(request: ImportRequest): ImportPlan {
  const { bytes, file, line, ledger, nowMs, map = NO_MAP, recipe } = request;
  const problems = new Problems(file);
  const table = readTable(bytes, file, map);
  const columns = readColumns(table, line, map, problems);
  problems.throwIfAny();
  const outside = new Map<string, number>();
  const missing = new Set<string>();
  const context = { file, line, ledger, map, columns, problems, nowMs, recipe, times: new Map(), missing, outside };
  const read: RowRead[] = [];
  for (const row of table.rows) {
    if (row.cells.length !== table.headings.length) {
      tellLength(row, table, problems);
      continue;
    }
    const one = readRow(row, context);
    if (one) read.push(one);
  }
  problems.throwIfAny();
  const fresh = withoutKnown(read, ledger);
  const skipped = read.length - fresh.length;
  const opening: AnyDraft = { kind: "import", at: bookTime(nowMs), data: { file, entries: fresh.length, skipped } };
  const plan = {
    entries: fresh.length === 0 ? [] : [opening, ...fresh.map(({ draft }) => draft)],
    columns: columns.understood,
    ignored: columns.ignored,
    rows: read.length,
    chambers: perChamber(fresh),
    skipped,
    notes: notesOf(columns, line, outside),
  };
  return { ...plan, text: inWords(file, plan) };
}

function tellLength(row: { row: number; cells: string[] }, table: Table, problems: Problems): void {
  const have = row.cells.length;
  const want = table.headings.length;
  const comma = table.separator === "," && have > want && row.cells.some((cell) => /^\d+$/.test(cell.trim()));
  problems.add("wrong-length", `this row has ${have} cells, the headings are ${want}`, {
    row: row.row,
    ...(comma ? { hint: "decimal commas in a file separated by commas need quotes around the numbers" } : {}),
  });
}

/** What makes two rows the same: chamber, instant, event, and what was measured. */
function sameness(chamber: string, atMs: number, event: string, readings: readonly Reading[]): string {
  const measured = readings
    .flatMap((reading) => MEASURED.flatMap((what) => (reading[what] === undefined ? [] : [`${what}=${reading[what]}`])))
    .sort();
  return JSON.stringify([chamber, atMs, event, ...measured]);
}

function withoutKnown(read: readonly RowRead[], ledger: Ledger): RowRead[] {
  const known = new Set<string>();
  for (const { chamber, timeline } of ledger.chambers.values()) {
    for (const event of timeline) {
      if (event.kind === "version") continue;
      known.add(sameness(chamber, event.atMs, event.kind, event.kind === "run" ? event.readings : []));
      // a run whose reading was added later equals the row without it too
      if (event.kind === "run") known.add(sameness(chamber, event.atMs, "run", event.data.readings));
    }
  }
  return read.filter(({ chamber, atMs, event, draft }) => {
    const key = sameness(chamber, atMs, event, draft.kind === "run" ? draft.data.readings : []);
    if (known.has(key)) return false;
    known.add(key);
    return true;
  });
}

function perChamber(rows: readonly RowRead[]): ImportPlan["chambers"] {
  const byName = new Map<string, RowRead[]>();
  for (const row of rows) {
    const list = byName.get(row.chamber) ?? [];
    list.push(row);
    byName.set(row.chamber, list);
  }
  return [...byName].map(([chamber, list]) => {
    const count = (event: (typeof EVENTS)[number]): number => list.filter((row) => row.event === event).length;
    const times = list.map(({ atMs }) => atMs);
    const from = times.reduce((a, b) => Math.min(a, b));
    const to = times.reduce((a, b) => Math.max(a, b));
    return {
      chamber,
      runs: count("run"),
      cleans: count("clean"),
      precoats: count("precoat"),
      services: count("service"),
      from: bookTime(from),
      to: bookTime(to),
    };
  });
}

function notesOf(columns: Columns, line: Line, outside: ReadonlyMap<string, number>): string[] {
  const notes: string[] = [];
  const have = new Set(columns.settings.map(({ setting }) => setting.name));
  const without = [...line.settings.keys()].filter((name) => !have.has(name));
  if (without.length > 0) notes.push(`not in the file: ${without.join(", ")}`);
  for (const [what, count] of outside) {
    notes.push(`${what} is outside its declared range in ${count === 1 ? "one row" : `${count} rows`}`);
  }
  return notes;
}

const counted = (count: number, one: string, many = `${one}s`): string => `${count} ${count === 1 ? one : many}`;

function inWords(file: string, plan: Omit<ImportPlan, "text">): string {
  const fresh = Math.max(0, plan.entries.length - 1);
  const lines = [`${file}: ${counted(plan.rows, "row")}, ${counted(fresh, "new entry", "new entries")}`];
  for (const { heading, meaning } of plan.columns) lines.push(`  ${heading}: ${meaning}`);
  if (plan.ignored.length > 0) lines.push(`  ignored: ${plan.ignored.join(", ")}`);
  for (const { chamber, runs, cleans, precoats, services, from, to } of plan.chambers) {
    const parts = [
      counted(runs, "run"),
      ...(cleans > 0 ? [counted(cleans, "clean")] : []),
      ...(precoats > 0 ? [counted(precoats, "precoat")] : []),
      ...(services > 0 ? [counted(services, "service")] : []),
    ];
    lines.push(`  ${chamber}: ${parts.join(", ")}, ${from} to ${to}`);
  }
  if (plan.skipped > 0) lines.push(`  ${counted(plan.skipped, "row")} skipped: in the book already`);
  for (const note of plan.notes) lines.push(`  ${note}`);
  return lines.join("\n");
}
