/**
 * Names what is wrong with a book from the first bad line on: which entry, which byte, and what happened to it. A line
 * that hashes right but stands in the wrong place was moved, doubled, or has lost its neighbours; one that does not hash
 * was changed.
 */
import type { AnyEntry } from "./entries.ts";
import { type LineFault, readLine } from "./format.ts";

export type DamageKind = LineFault | "broken chain" | "gap" | "swapped" | "duplicate" | "loss" | "other head";

export interface Damage {
  /** Number of the entry concerned: the one changed, missing, out of place or doubled. */
  entry: number;
  /** Line in the file, from 1. */
  row: number;
  /** Where that line begins, bytes from the start of the file. */
  offset: number;
  kind: DamageKind;
  message: string;
}

/** More than this is one disaster, not many. */
const MOST = 100;

interface Line {
  offset: number;
  entry: AnyEntry | null;
  fault: LineFault;
  detail: string;
}

/**
 * All damage in `bytes`, which begin at `place` of the file with a line that is not the next entry. `cutShort`: the last
 * line has no LF although the entry it should hold was acknowledged.
 */
export function listDamage(
  bytes: Uint8Array,
  place: { offset: number; seq: number; prev: string },
  cutShort: boolean,
): Damage[] {
  const lines = linesOf(bytes, place.offset, cutShort);
  const numbers = new Set(lines.flatMap((line) => (line.entry ? [line.entry.seq] : [])));
  const damage: Damage[] = [];
  let expected = place.seq;
  let prev: string | null = place.prev;
  for (const [i, line] of lines.entries()) {
    const add = (entry: number, kind: DamageKind, message: string): void => {
      damage.push({ entry, row: place.seq + i + 1, offset: line.offset, kind, message });
    };
    const { entry } = line;
    if (!entry) {
      add(expected, line.fault, `entry ${expected} cannot be trusted: ${line.detail}`);
      expected++;
      prev = null;
    } else if (entry.seq < expected) {
      const twice = entry.seq < place.seq || lines.slice(0, i).some((other) => other.entry?.hash === entry.hash);
      add(
        entry.seq,
        twice ? "duplicate" : "swapped",
        twice ? `entry ${entry.seq} is in the book twice` : `entry ${entry.seq} is not in its place`,
      );
    } else if (entry.seq > expected) {
      const later = numbers.has(expected);
      const last = entry.seq - 1;
      const which = last === expected ? `entry ${expected} is` : `entries ${expected} to ${last} are`;
      add(
        expected,
        later ? "swapped" : "gap",
        later ? `entry ${entry.seq} stands where entry ${expected} belongs` : `${which} missing`,
      );
      expected = entry.seq + 1;
      prev = entry.hash;
    } else {
      if (prev !== null && entry.prev !== prev) {
        add(entry.seq, "broken chain", `entry ${entry.seq} does not follow from the entry before it`);
      }
      expected = entry.seq + 1;
      prev = entry.hash;
    }
  }
  return together(damage);
}

function linesOf(bytes: Uint8Array, start: number, cutShort: boolean): Line[] {
  const lines: Line[] = [];
  let at = 0;
  while (at < bytes.length) {
    const end = bytes.indexOf(0x0a, at);
    if (end < 0 && !cutShort) break;
    const read = readLine(bytes.subarray(at, end < 0 ? bytes.length : end));
    const line: Line = { offset: start + at, entry: null, fault: "unreadable", detail: "" };
    if (read.ok) line.entry = read.entry;
    else if (read.fault !== "newer version") Object.assign(line, { fault: read.fault, detail: read.detail });
    if (end < 0 && read.ok) line.entry = null;
    if (end < 0) line.detail = "it was acknowledged, but its line is cut or changed at the end";
    lines.push(line);
    at = end < 0 ? bytes.length : end + 1;
  }
  return lines;
}

/** A converted file has the same fault in every line: say it once, with the number of lines. */
function together(damage: Damage[]): Damage[] {
  const crlf = damage.filter((one) => one.kind === "CRLF line ends");
  if (crlf.length > 1) {
    const [first] = crlf;
    const message = `${crlf.length} lines from entry ${first.entry} on end in CR LF: the file went through an editor or a checkout that converts line ends`;
    return [{ ...first, message }, ...damage.filter((one) => one.kind !== "CRLF line ends").slice(0, MOST)];
  }
  return damage.slice(0, MOST);
}
