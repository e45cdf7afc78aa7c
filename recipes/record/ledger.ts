/**
 * What the book adds up to: per chamber what happened in the order it happened, which recipe was in force when, the
 * proposals, and the changes with where they stand. Built by replaying entries, one at a time, so that a running
 * program only replays what is new.
 *
 * Orders: the book's sequence orders the chain; (when it happened, sequence) orders a chamber's life, so an entry made
 * late takes its place. A corrected entry is replaced in place, and what was decided on the old value is marked.
 */
import type { Problem } from "../../engine/index.ts";
import { sha256 } from "./canonical.ts";
import { applyToChanges, type Change } from "./changes.ts";
import { corrected } from "./corrections.ts";
import type { AnyEntry, Entry, EntryData, Reading } from "./entries.ts";
import { NO_HASH } from "./format.ts";
import { addOverride, type Override } from "./overrides.ts";
import { insertByTime, type RunRecord, type TimelineEvent } from "./timeline.ts";
import type { RecipeVersion } from "./versions.ts";

export interface ChamberRecord {
  readonly chamber: string;
  /** Runs, cleans, precoats, services, stated and entered recipes, by (atMs, seq). */
  readonly timeline: TimelineEvent[];
  /** By recipe name; each list by (atMs, seq). */
  readonly versions: Map<string, RecipeVersion[]>;
}

export interface ProposalRecord {
  seq: number;
  /** "p-000042" is `proposalId(seq)`. */
  at: string;
  atMs: number;
  by: string;
  data: EntryData["proposal"];
  /** The change that adopted it last, if any. */
  adoptedBy: number | null;
  /** Entries corrected since, that this proposal had been made on. */
  restsOnCorrected: number[];
}

export interface GaugeReading {
  seq: number;
  at: string;
  atMs: number;
  by: string;
  gauge: string;
  index: number | null;
  thicknessNm: number | null;
}

export interface Ledger {
  /** The entries replayed so far, by number, as they were written. */
  readonly entries: AnyEntry[];
  /** Hash of the last of them. */
  head: string;
  /** Name of the line as the first entry gives it. */
  lineName: string | null;
  /** The line file as last recorded (`line`, `line file`). */
  lineFile: string | null;
  readonly chambers: Map<string, ChamberRecord>;
  readonly runs: Map<number, RunRecord>;
  /** Readings that came later: the run each belongs to. */
  readonly laterReadings: Map<number, number>;
  readonly proposals: Map<number, ProposalRecord>;
  readonly changes: Map<number, Change>;
  /** Reference-wafer readings, by (atMs, seq). */
  readonly gaugeReadings: GaugeReading[];
  readonly overrides: Override[];
  /** Entries by the corrections made to them, in order. */
  readonly corrections: Map<number, number[]>;
  /** Running hash over what proposals rest on. */
  basis: string;
  /** Entries that do not fit what came before: kept in the book, without effect here. */
  readonly problems: Problem[];
}

/** A ledger of an empty book. */
export function emptyLedger(): Ledger {
  return {
    entries: [],
    head: NO_HASH,
    lineName: null,
    lineFile: null,
    chambers: new Map(),
    runs: new Map(),
    laterReadings: new Map(),
    proposals: new Map(),
    changes: new Map(),
    gaugeReadings: [],
    overrides: [],
    corrections: new Map(),
    basis: NO_HASH,
    problems: [],
  };
}

/** The ledger of these entries, which are the book's from entry 0 on. */
export function replay(entries: Iterable<AnyEntry>): Ledger {
  const ledger = emptyLedger();
  for (const entry of entries) extend(ledger, entry);
  return ledger;
}

/** Replays the entries that the ledger does not have yet; `entries` are the whole book's. Returns the same ledger. */
export function catchUp(ledger: Ledger, entries: readonly AnyEntry[]): Ledger {
  for (let seq = ledger.entries.length; seq < entries.length; seq++) extend(ledger, entries[seq]);
  return ledger;
}

/** A chamber's record; an empty one when the book says nothing of it. */
export function chamberRecord(ledger: Ledger, chamber: string): ChamberRecord {
  return ledger.chambers.get(chamber) ?? { chamber, timeline: [], versions: new Map() };
}

function chamberFor(ledger: Ledger, chamber: string): ChamberRecord {
  const record = chamberRecord(ledger, chamber);
  ledger.chambers.set(chamber, record);
  return record;
}

/** Entries a proposal rests on: what was done and seen in any chamber, since sisters lend each other what they know. */
function bearsOnProposals(entry: AnyEntry): boolean {
  switch (entry.kind) {
    case "run":
    case "reading":
    case "recipe":
    case "clean":
    case "precoat":
    case "service":
    case "gauge":
    case "enter":
    case "correct":
      return true;
    case "note":
      return entry.data.override !== undefined;
    default:
      return false;
  }
}

/**
 * Hash of what a proposal rests on: every run, reading, recipe, clean, precoat, service, reference reading, entered
 * change, correction and override of all chambers, but no proposals, plain notes, adoptions or closings; and of `parts`,
 * which say what was asked (chamber, recipe, mode, line-file hash). 64 hex digits.
 */
export function basisHash(ledger: Ledger, ...parts: string[]): string {
  return sha256(JSON.stringify([ledger.basis, ...parts]));
}

/** The last proposal made on this basis, or null. Asking again on the same basis gives this one back. */
export function proposalOn(ledger: Ledger, basis: string): ProposalRecord | null {
  let found: ProposalRecord | null = null;
  for (const proposal of ledger.proposals.values()) if (proposal.data.basis === basis) found = proposal;
  return found;
}

/** Replays one entry into the ledger. Never throws for what an entry says: what does not fit becomes a problem. */
export function extend(ledger: Ledger, entry: AnyEntry): void {
  ledger.entries.push(entry);
  ledger.head = entry.hash;
  if (bearsOnProposals(entry)) ledger.basis = sha256(ledger.basis + entry.hash);
  const fault = apply(ledger, entry);
  if (fault) ledger.problems.push({ ...fault, file: "book.jsonl", row: entry.seq + 1 });
}

function apply(ledger: Ledger, entry: AnyEntry): Problem | null {
  const { seq, at, by } = entry;
  const atMs = Date.parse(at);
  switch (entry.kind) {
    case "line":
      ledger.lineName ??= entry.data.line;
      ledger.lineFile = entry.data.line_file;
      return null;
    case "line file":
      ledger.lineFile = entry.data.after;
      return null;
    case "run":
      placeRun(ledger, newRun(entry, entry.data, at));
      return null;
    case "reading":
      return addReading(ledger, entry, entry.data);
    case "recipe": {
      const { chamber, recipe, steps, reason } = entry.data;
      addVersion(ledger, chamber, {
        seq,
        at,
        atMs,
        by,
        recipe,
        steps,
        source: "recipe",
        reason: reason ?? null,
        change: null,
      });
      return null;
    }
    case "clean":
    case "precoat":
    case "service":
      insertByTime(chamberFor(ledger, entry.data.chamber).timeline, plainEvent(entry, entry.data, at));
      return null;
    case "gauge": {
      const { gauge, index, thickness_nm } = entry.data;
      const reading = { seq, at, atMs, by, gauge, index: index ?? null, thicknessNm: thickness_nm ?? null };
      insertByTime(ledger.gaugeReadings, reading);
      return null;
    }
    case "note":
      if (entry.data.override) addOverride(ledger, entry, entry.data.override);
      return null;
    case "proposal":
      ledger.proposals.set(seq, { seq, at, atMs, by, data: entry.data, adoptedBy: null, restsOnCorrected: [] });
      return null;
    case "adopt":
    case "approve":
    case "close":
    case "undo":
      return applyToChanges(ledger, entry);
    case "enter": {
      const fault = applyToChanges(ledger, entry);
      if (fault) return fault;
      const change = ledger.changes.get(entry.data.change);
      if (!change) return null;
      const { chamber, recipe, reason } = change;
      const steps = entry.data.read_back;
      addVersion(ledger, chamber, { seq, at, atMs, by, recipe, steps, source: "enter", reason, change: change.seq });
      return null;
    }
    case "correct":
      return correct(ledger, entry);
    case "torn":
    case "import":
      return null;
  }
}

function addVersion(ledger: Ledger, chamber: string, version: RecipeVersion): void {
  const record = chamberFor(ledger, chamber);
  const list = record.versions.get(version.recipe) ?? [];
  insertByTime(list, version);
  record.versions.set(version.recipe, list);
  insertByTime(record.timeline, { kind: "version", ...version });
}

function newRun(entry: Entry<"run">, data: EntryData["run"], at: string): RunRecord {
  return {
    kind: "run",
    seq: entry.seq,
    at,
    atMs: Date.parse(at),
    by: entry.by,
    chamber: data.chamber,
    recipe: data.recipe,
    data,
    readings: [...data.readings],
    later: [],
    correctedBy: [],
  };
}

function placeRun(ledger: Ledger, run: RunRecord): void {
  ledger.runs.set(run.seq, run);
  insertByTime(chamberFor(ledger, run.chamber).timeline, run);
}

type PlainEntry = Entry<"clean"> | Entry<"precoat"> | Entry<"service">;

function plainEvent(entry: PlainEntry, data: PlainEntry["data"], at: string): TimelineEvent {
  const common = { seq: entry.seq, at, atMs: Date.parse(at), by: entry.by };
  if (entry.kind === "precoat") return { kind: "precoat", ...common, count: (data as EntryData["precoat"]).count };
  const { what } = data as EntryData["clean"];
  return entry.kind === "clean"
    ? { kind: "clean", ...common, what: what ?? null }
    : { kind: "service", ...common, what: what ?? "" };
}

function addReading(ledger: Ledger, entry: Entry<"reading">, data: { run: number; reading: Reading }): Problem | null {
  const run = ledger.runs.get(data.run);
  if (!run) {
    return { code: "no-such-run", message: `entry ${entry.seq} is a reading of run ${data.run}, which does not exist` };
  }
  run.later.push({ seq: entry.seq, at: entry.at, atMs: Date.parse(entry.at), by: entry.by, reading: data.reading });
  run.later.sort((a, b) => a.seq - b.seq);
  run.readings = [...run.data.readings, ...run.later.map((one) => one.reading)];
  ledger.laterReadings.set(entry.seq, data.run);
  return null;
}

function dropReading(ledger: Ledger, seq: number): void {
  const run = ledger.runs.get(ledger.laterReadings.get(seq) ?? -1);
  if (!run) return;
  run.later = run.later.filter((one) => one.seq !== seq);
  run.readings = [...run.data.readings, ...run.later.map((one) => one.reading)];
}

/** The corrected entry takes the place of the wrong one; every correction made to it so far counts, in order. */
function correct(ledger: Ledger, entry: Entry<"correct">): Problem | null {
  const target = ledger.entries[entry.data.entry];
  const made = [...(ledger.corrections.get(entry.data.entry) ?? []), entry.seq];
  const fields = made.map((seq) => (ledger.entries[seq] as Entry<"correct">).data.fields);
  const result = corrected(target, entry.data.entry, fields);
  if ("problem" in result) return result.problem;
  const original = result.original;
  if (original.kind === "reading" && !ledger.runs.has((result.data as EntryData["reading"]).run)) {
    return { code: "no-such-run", message: `the correction in entry ${entry.seq} names a run that does not exist` };
  }
  ledger.corrections.set(original.seq, made);
  const touched = new Set<string>();
  if (original.kind === "reading") {
    touched.add(ledger.runs.get(ledger.laterReadings.get(original.seq) ?? -1)?.chamber ?? "");
    dropReading(ledger, original.seq);
    addReading(ledger, { ...original, at: result.at }, result.data as EntryData["reading"]);
    touched.add(ledger.runs.get((result.data as EntryData["reading"]).run)?.chamber ?? "");
  } else {
    for (const record of ledger.chambers.values()) {
      const index = record.timeline.findIndex((event) => event.seq === original.seq);
      if (index < 0) continue;
      record.timeline.splice(index, 1);
      touched.add(record.chamber);
    }
    touched.add((result.data as { chamber: string }).chamber);
    if (original.kind === "run") {
      const run = newRun(original, result.data as EntryData["run"], result.at);
      const { later } = ledger.runs.get(original.seq) ?? run;
      run.later = later;
      run.readings = [...run.data.readings, ...later.map((one) => one.reading)];
      run.correctedBy = made;
      placeRun(ledger, run);
    } else {
      const data = result.data as PlainEntry["data"];
      insertByTime(chamberFor(ledger, data.chamber).timeline, plainEvent(original, data, result.at));
    }
  }
  for (const proposal of ledger.proposals.values()) {
    if (proposal.seq > original.seq && touched.has(proposal.data.chamber)) proposal.restsOnCorrected.push(original.seq);
  }
  return null;
}
