/**
 * What the book adds up to: per chamber what happened in the order it happened, which recipe was in force when, the
 * proposals, and the changes with where they stand. Built by replaying entries, one at a time, so that a running
 * program only replays what is new.
 *
 * Orders: the book's sequence orders the chain; (when it happened, sequence) orders a chamber's life, so an entry made
 * late takes its place. A corrected entry is replaced in place. What was decided on the old value, or before a late entry
 * was there, stays as it was and is marked (`late.ts`).
 */
import type { Problem } from "../../engine/index.ts";
import { sha256 } from "./canonical.ts";
import { applyToChanges, type Change } from "./changes.ts";
import type { AnyEntry, EntryData } from "./entries.ts";
import { NO_HASH } from "./format.ts";
import { type Marks, markDecided, unmarked } from "./late.ts";
import { addOverride, type Override } from "./overrides.ts";
import { addReading, chamberFor, gaugeReading, newRun, placeRun, plainEvent } from "./placing.ts";
import { replayCorrection } from "./replay-correction.ts";
import { insertByTime, type RunRecord, type TimelineEvent } from "./timeline.ts";
import type { RecipeVersion } from "./versions.ts";

export interface ChamberRecord {
  readonly chamber: string;
  /** Runs, cleans, precoats, services, stated and entered recipes, by (atMs, seq). */
  readonly timeline: TimelineEvent[];
  /** By recipe name; each list by (atMs, seq). */
  readonly versions: Map<string, RecipeVersion[]>;
}

export interface ProposalRecord extends Marks {
  seq: number;
  /** "p-000042" is `proposalId(seq)`. */
  at: string;
  atMs: number;
  by: string;
  data: EntryData["proposal"];
  /** The change that adopted it last, if any. */
  adoptedBy: number | null;
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
  /** When the latest proposal or verdict was made, ms: what happened after it can have been missed by none of them. */
  lastDecidedMs: number;
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
    lastDecidedMs: Number.NEGATIVE_INFINITY,
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
      markDecided(ledger, seq, entry.data.chamber, atMs);
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
      markDecided(ledger, seq, chamber, atMs);
      return null;
    }
    case "clean":
    case "precoat":
    case "service":
      insertByTime(chamberFor(ledger, entry.data.chamber).timeline, plainEvent(entry, entry.data, at));
      markDecided(ledger, seq, entry.data.chamber, atMs);
      return null;
    case "gauge":
      insertByTime(ledger.gaugeReadings, gaugeReading(entry, entry.data, at));
      markDecided(ledger, seq, null, atMs);
      return null;
    case "note":
      if (entry.data.override) addOverride(ledger, entry, entry.data.override);
      return null;
    case "proposal":
      ledger.proposals.set(seq, { seq, at, atMs, by, data: entry.data, adoptedBy: null, ...unmarked() });
      ledger.lastDecidedMs = Math.max(ledger.lastDecidedMs, atMs);
      return null;
    case "adopt":
    case "approve":
    case "undo":
      return applyToChanges(ledger, entry);
    case "close":
      ledger.lastDecidedMs = Math.max(ledger.lastDecidedMs, atMs);
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
      return replayCorrection(ledger, entry);
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
