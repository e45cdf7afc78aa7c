/**
 * Reads the record book: which entries stand, whether the end is an interrupted append, and what is damaged where.
 * Changes nothing and takes no lock; the rules are those in the header of format.ts.
 */
import { refuse } from "../../engine/index.ts";
import type { Ports } from "../ports.ts";
import { type Damage, listDamage } from "./damage.ts";
import type { AnyEntry } from "./entries.ts";
import { errorCode, fileRefusal, inFolder } from "./file-trouble.ts";
import { decodeHead, type Head, NO_HASH, readLine } from "./format.ts";
import { plainRunLine } from "./plain-run.ts";

export const BOOK = "book.jsonl";
export const HEAD = "book.head";

/** Bytes at the end that are no entry yet. */
export interface Tail {
  offset: number;
  bytes: number;
  /** What it looks like. */
  what: "a line without its end" | "an import that is not complete" | "bytes that are no entry";
}

/** Where reading stands: everything before `offset` has been verified. */
export interface Place {
  offset: number;
  /** Number of the next entry. */
  seq: number;
  /** Hash of the entry before it. */
  prev: string;
}

export const START: Place = { offset: 0, seq: 0, prev: NO_HASH };

export interface Reading {
  /** Entries from `from` on that stand. */
  entries: AnyEntry[];
  place: Place;
  /** The last entry is whole but its LF is missing; to be put back by the next writer. */
  lacksLineEnd: boolean;
  tail: Tail | null;
  damage: Damage[];
  /** Things worth saying that stop nothing. */
  notices: string[];
}

/** `book.head`: what it says, or why it says nothing. Throws `io-error` and `read-only` when it cannot be read. */
export function readHead(folder: string, ports: Pick<Ports, "files">): Head | "missing" | "unreadable" {
  const path = inFolder(folder, HEAD);
  try {
    return decodeHead(ports.files.read(path)) ?? "unreadable";
  } catch (error) {
    if (errorCode(error) === "ENOENT") return "missing";
    throw fileRefusal(error, `read ${HEAD}`, HEAD);
  }
}

/**
 * Verifies `bytes`, the book's from `from.offset` on. `head` must have been read before the bytes were, else an append
 * in between looks like a loss. `before` gives the hash of an entry already verified. Throws `newer-format`.
 */
export function readEntries(
  bytes: Uint8Array,
  from: Place,
  head: Head | "missing" | "unreadable",
  before: (seq: number) => string | undefined,
): Reading {
  const reading: Reading = {
    entries: [],
    place: { ...from },
    lacksLineEnd: false,
    tail: null,
    damage: [],
    notices: [],
  };
  const named = typeof head === "object" ? head : null;
  const batch: Batch = { seq: -1, last: -1, place: from };
  let at = 0;
  const buffer = Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  for (let end = buffer.indexOf(0x0a, at); end >= 0; end = buffer.indexOf(0x0a, at)) {
    const run = plainRunLine(buffer, at, end, reading.place);
    if (run) accept(reading, run, end + 1 - at);
    else if (!take(reading, batch, bytes.subarray(at, end), end + 1 - at)) break;
    at = end + 1;
  }
  if (at < bytes.length) leftOver(reading, batch, bytes, at, from, named);
  const open = batch.seq >= 0 && reading.place.seq <= batch.last;
  if (open && reading.damage.length === 0) {
    cutBatch(reading, batch, from, bytes.length);
  }
  compareHead(reading, head, before, bytes.length === 0 && from.offset === 0);
  return reading;
}

/** A batch being read: its first and last entry, and where it began. */
interface Batch {
  seq: number;
  last: number;
  place: Place;
}

/** Takes one line as the next entry; false when it is not. `size` includes its LF. */
function take(reading: Reading, batch: Batch, line: Uint8Array, size: number): boolean {
  const read = readLine(line);
  if (!read.ok) {
    if (read.fault === "newer version") {
      refuse("newer-format", `the book has entries of a newer ${read.detail}; this version reads format 1`, {
        file: BOOK,
        row: reading.place.seq + 1,
        hint: "use a newer coatwright",
      });
    }
    return false;
  }
  const { entry } = read;
  const { place } = reading;
  if (entry.seq !== place.seq || entry.prev !== place.prev) return false;
  if (entry.kind === "import" && entry.seq > batch.last && entry.data.entries > 0) {
    batch.seq = entry.seq;
    batch.last = entry.seq + entry.data.entries;
    batch.place = place;
  }
  accept(reading, entry, size);
  return true;
}

/** Counts an entry that has been found to be the next one. */
function accept(reading: Reading, entry: AnyEntry, size: number): void {
  reading.entries.push(entry);
  const { offset, seq } = reading.place;
  // A fresh object: a batch holds on to the place where it began.
  reading.place = { offset: offset + size, seq: seq + 1, prev: entry.hash };
}

/** Bytes from `at` on did not read as the next entry: an interrupted append, or damage. */
function leftOver(reading: Reading, batch: Batch, bytes: Uint8Array, at: number, from: Place, head: Head | null): void {
  const rest = bytes.subarray(at);
  const { seq } = reading.place;
  const acknowledged = head !== null && head.seq >= seq;
  const endsInLine = rest.indexOf(0x0a) < 0;
  if (acknowledged && endsInLine && head.seq === seq) {
    // whole but for its LF, and acknowledged: it counts
    const size = reading.place.offset;
    if (take(reading, batch, rest, rest.length)) {
      const taken = reading.entries.at(-1);
      if (taken?.hash === head.hash) {
        reading.lacksLineEnd = true;
        return;
      }
      reading.entries.pop();
      reading.place = { offset: size, seq, prev: taken?.prev ?? NO_HASH };
    }
  }
  const tail = (what: Tail["what"]): Tail => ({ offset: from.offset + at, bytes: rest.length, what });
  const inBatch = batch.seq >= 0 && seq <= batch.last && head !== null && head.seq < batch.seq;
  if (!acknowledged && endsInLine) reading.tail = tail("a line without its end");
  else if (head !== null && !acknowledged && (inBatch || !holdsEntry(rest)))
    reading.tail = tail("bytes that are no entry");
  else reading.damage = listDamage(rest, reading.place, acknowledged && endsInLine);
}

/** Does any line here read as an entry by itself? */
function holdsEntry(bytes: Uint8Array): boolean {
  let at = 0;
  for (let end = bytes.indexOf(0x0a); end >= 0; end = bytes.indexOf(0x0a, at)) {
    if (readLine(bytes.subarray(at, end)).ok) return true;
    at = end + 1;
  }
  return false;
}

/** An unfinished batch counts as not there. */
function cutBatch(reading: Reading, batch: Batch, from: Place, length: number): void {
  reading.entries.length = batch.seq - from.seq;
  reading.place = batch.place;
  reading.lacksLineEnd = false;
  reading.tail = {
    offset: batch.place.offset,
    bytes: from.offset + length - batch.place.offset,
    what: "an import that is not complete",
  };
}

function compareHead(
  reading: Reading,
  head: Head | "missing" | "unreadable",
  before: (seq: number) => string | undefined,
  empty: boolean,
): void {
  const { place, entries } = reading;
  if (head === "missing") {
    if (place.seq > 0) reading.notices.push(`${HEAD} is missing: entries lost at the end could not be noticed`);
    return;
  }
  if (head === "unreadable") {
    reading.notices.push(`${HEAD} cannot be read: entries lost at the end could not be noticed`);
    return;
  }
  if (reading.damage.length > 0) return;
  if (head.seq >= place.seq) {
    const lost = head.seq - place.seq + 1;
    const missing = `${lost === 1 ? `entry ${head.seq} is` : `entries ${place.seq} to ${head.seq} are`} missing`;
    reading.damage.push({
      entry: place.seq,
      row: place.seq + 1,
      offset: place.offset,
      kind: "loss",
      message: empty
        ? `${BOOK} is empty or gone, and ${HEAD} says it had ${head.seq + 1} entries`
        : `${missing} at the end of the book: ${HEAD} names entry ${head.seq} as the last`,
    });
    return;
  }
  const first = place.seq - entries.length;
  const own = head.seq >= first ? entries[head.seq - first]?.hash : before(head.seq);
  if (own !== undefined && own !== head.hash) {
    reading.damage.push({
      entry: head.seq,
      row: head.seq + 1,
      offset: 0,
      kind: "other head",
      message: `${HEAD} names another entry ${head.seq} than the book holds: one of the two files was exchanged`,
    });
  }
}
