/**
 * The record book, byte by byte. A reader written from this comment alone can read and verify every book.
 *
 * FILE. `book.jsonl`, UTF-8, no byte-order mark. Each entry is one line ended by a single LF (0x0A). No empty lines, no
 * CR. A line has at most 1,048,576 bytes, LF not counted. The file only ever grows, except that an unfinished end is
 * taken off (below).
 *
 * LINE. One JSON object without white space, with exactly these nine members in exactly this order:
 *
 *   {"v":1,"seq":N,"at":T,"entered":T,"by":S,"kind":S,"data":{...},"prev":H,"hash":H}
 *
 *   v        format version, the number 1. A reader meeting a higher one must refuse and say which it needs.
 *   seq      0 for the first line, then one more each line, no gaps.
 *   at       when it happened; UTC, "YYYY-MM-DDThh:mm:ss.sssZ". Entries need not be in this order.
 *   entered  when it was written, same form. Informative: clocks jump. The order of entries is that of `seq`.
 *   by       who, free text.
 *   kind     what (the table is in entries.ts).
 *   data     the members of that kind. Keys at every depth sorted by UTF-16 code unit. Numbers as ECMAScript's
 *            Number-to-string writes them; no NaN or infinity; -0 is written 0. Text in Unicode normal form C; escapes:
 *            \" \\ \b \f \n \r \t, other controls below 0x20 and lone surrogates as \uXXXX (lower-case hex), and
 *            likewise U+007F-009F, 00AD, 061C, 180E, 200B-200F, 2028-202E, 2060-206F, FEFF, FFF9-FFFB, so that the file
 *            can be shown on a terminal. All other characters stand as themselves.
 *   prev     `hash` of the line before; for the first line 64 zeros.
 *   hash     SHA-256 over the bytes of this very line from its first byte up to, not including, the comma before
 *            "hash"; 64 lower-case hex digits. So the line always ends in 75 bytes: ,"hash":"<64 hex>"}
 *            and those before them are 74 bytes: ,"prev":"<64 hex>"
 *
 * VERIFY by bytes: cut the last 75 bytes, hash the rest, compare; then compare `prev` with the hash of the line before
 * and `seq` with the count. Never by writing the object anew.
 *
 * BATCH. An entry of kind "import" says in data.entries how many entries after it belong to it. They are in the book
 * together or not at all: a book that ends before they are complete ends, for a reader, before the "import" entry.
 *
 * END. Bytes after the last LF, and a batch not complete, are an interrupted append. Readers ignore them; the next
 * writer moves them to `book.torn-<time>` and tells so in an entry of kind "torn". One case is kept: when the end lacks
 * nothing but its LF and `book.head` names it, the LF is put back. Anything wrong before the end is damage, and nothing
 * is written until a person has looked.
 *
 * HEAD. `book.head`, a side file: {"v":1,"seq":N,"hash":H} and LF, naming the last entry, replaced after each append and
 * before the append is acknowledged. Behind the book: a crash between the two, harmless. Ahead of the book, or naming
 * another hash for an entry: entries were lost or exchanged. With it, bytes that no longer parse after entry N are an
 * interrupted append even when they hold an LF, since nothing after N was acknowledged.
 */
import { type Problem, refuse } from "../../engine/index.ts";
import { canonicalJson, canonicalText, sha256 } from "./canonical.ts";
import type { AnyDraft, AnyEntry } from "./entries.ts";
import { checkData, isKind } from "./entry-schema.ts";

export const VERSION = 1;
export const LINE_LIMIT = 1_048_576;
export const NO_HASH = "0".repeat(64);
const HASH_TAIL = 75;
const PREV_TAIL = 74;
const TIME = /^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d\.\d{3}Z$/;
const HASH_PATTERN = /^,"hash":"([0-9a-f]{64})"\}$/;
const PREV_PATTERN = /^,"prev":"([0-9a-f]{64})"$/;

export interface Stamp {
  seq: number;
  entered: string;
  by: string;
  prev: string;
}

/** Is this a time as the book writes it, and a moment that exists? */
export function isBookTime(text: string): boolean {
  if (!TIME.test(text)) return false;
  const ms = Date.parse(text);
  return Number.isFinite(ms) && new Date(ms).toISOString() === text;
}

/** Milliseconds since 1970 as the book writes a time. Throws `bad-time` outside the years 0 to 9999. */
export function bookTime(ms: number): string {
  const date = new Date(ms);
  const text = Number.isFinite(date.getTime()) ? date.toISOString() : "";
  if (!TIME.test(text)) refuse("bad-time", `${ms} ms is not a time that can be recorded`);
  return text;
}

/**
 * The line of one entry (LF included), its hash, and the entry as a reader will get it. Throws what `canonicalJson`
 * throws, `bad-entry` when data does not fit the kind, `bad-time`, and `too-long` past the line limit.
 */
export function encodeEntry(draft: AnyDraft, stamp: Stamp): { line: Buffer; entry: AnyEntry } {
  const at = draft.at ?? stamp.entered;
  for (const time of [at, stamp.entered]) {
    if (!isBookTime(time)) refuse("bad-time", `"${time}" is not a time like 2026-03-01T22:40:00.000Z`);
  }
  const by = (draft.by ?? stamp.by).trim();
  if (by === "") refuse("nobody", "an entry needs the name of who made it", { hint: "give --by NAME" });
  const complaint = checkData(draft.kind, draft.data);
  if (complaint) refuse("bad-entry", `this ${draft.kind} entry cannot be recorded: ${complaint}`);
  const body =
    `{"v":${VERSION},"seq":${stamp.seq},"at":"${at}","entered":"${stamp.entered}","by":${canonicalText(by)},` +
    `"kind":${canonicalText(draft.kind)},"data":${canonicalJson(draft.data, draft.kind)},"prev":"${stamp.prev}"`;
  const hash = sha256(body);
  const line = Buffer.from(`${body},"hash":"${hash}"}\n`, "utf8");
  if (line.length - 1 > LINE_LIMIT) {
    refuse("too-long", `an entry of ${line.length - 1} bytes is longer than the limit of ${LINE_LIMIT}`);
  }
  return { line, entry: JSON.parse(line.toString("utf8")) as AnyEntry };
}

/** What is wrong with one line taken by itself. */
export type LineFault = "bad hash" | "unreadable" | "NUL bytes" | "CRLF line ends" | "byte-order mark" | "too long";

export type LineReading =
  | { ok: true; entry: AnyEntry }
  | { ok: false; fault: LineFault; detail: string }
  | { ok: false; fault: "newer version"; detail: string };

/** Reads one line (LF not included) by itself: its form, its own hash, its data. Place in the chain is the reader's. */
export function readLine(bytes: Uint8Array): LineReading {
  const buffer = Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  if (buffer.length > LINE_LIMIT) return { ok: false, fault: "too long", detail: `${buffer.length} bytes` };
  const split = buffer.length - HASH_TAIL;
  const tail = split > PREV_TAIL ? HASH_PATTERN.exec(buffer.toString("latin1", split)) : null;
  if (!tail || sha256(buffer.subarray(0, split)) !== tail[1]) return faultOf(buffer, tail !== null);
  const forbidden = ['"__proto__":', '"constructor":', '"prototype":'].find((key) => buffer.includes(key));
  if (forbidden) return { ok: false, fault: "unreadable", detail: `a key ${forbidden} is not allowed` };
  let parsed: unknown;
  try {
    parsed = JSON.parse(buffer.toString("utf8"));
  } catch (error) {
    return { ok: false, fault: "unreadable", detail: error instanceof Error ? error.message : String(error) };
  }
  const version = (parsed as { v?: unknown }).v;
  if (typeof version === "number" && version > VERSION) {
    return { ok: false, fault: "newer version", detail: `format ${version}` };
  }
  const complaint = formFault(parsed) ?? prevFault(buffer, split, parsed);
  if (complaint) return { ok: false, fault: "unreadable", detail: complaint };
  return { ok: true, entry: parsed as AnyEntry };
}

/** The likeliest reason why a line fails its own hash, for saying something more useful than "bad hash". */
function faultOf(buffer: Buffer, hasTail: boolean): LineReading {
  if (buffer.at(-1) === 0x0d && readLine(buffer.subarray(0, -1)).ok) {
    return { ok: false, fault: "CRLF line ends", detail: "the line ends in CR LF" };
  }
  if (buffer[0] === 0xef && buffer[1] === 0xbb && buffer[2] === 0xbf && readLine(buffer.subarray(3)).ok) {
    return { ok: false, fault: "byte-order mark", detail: "three bytes were put before the first entry" };
  }
  if (buffer.includes(0)) return { ok: false, fault: "NUL bytes", detail: "the line holds NUL bytes" };
  return hasTail
    ? { ok: false, fault: "bad hash", detail: "the line does not hash to what it says" }
    : { ok: false, fault: "unreadable", detail: "the line does not end in a hash" };
}

const MEMBERS = "v,seq,at,entered,by,kind,data,prev,hash";

function formFault(parsed: unknown): string | null {
  if (typeof parsed !== "object" || parsed === null || Array.isArray(parsed)) return "not an object";
  const entry = parsed as Record<string, unknown>;
  if (Object.keys(entry).join() !== MEMBERS) return `members are ${Object.keys(entry).join(", ")}`;
  if (entry["v"] !== VERSION) return `version ${String(entry["v"])}`;
  if (!Number.isSafeInteger(entry["seq"]) || (entry["seq"] as number) < 0) return "seq is not a count";
  for (const key of ["at", "entered"]) {
    const time = entry[key];
    if (typeof time !== "string" || !isBookTime(time)) return `${key} is not a time`;
  }
  if (typeof entry["by"] !== "string") return "by is not text";
  const kind = entry["kind"];
  if (typeof kind !== "string" || !isKind(kind)) return `unknown kind ${JSON.stringify(kind)}`;
  return checkData(kind, entry["data"]);
}

function prevFault(buffer: Buffer, split: number, parsed: unknown): string | null {
  const place = PREV_PATTERN.exec(buffer.toString("latin1", split - PREV_TAIL, split));
  return place && place[1] === (parsed as { prev: unknown }).prev ? null : "prev is not where it belongs";
}

/** `book.head` as bytes. */
export function encodeHead(seq: number, hash: string): Buffer {
  return Buffer.from(`{"v":1,"seq":${seq},"hash":"${hash}"}\n`, "utf8");
}

export interface Head {
  seq: number;
  hash: string;
}

/** Reads `book.head`; null when it is not one. */
export function decodeHead(bytes: Uint8Array): Head | null {
  const match = /^\{"v":1,"seq":(\d{1,15}),"hash":"([0-9a-f]{64})"\}\n$/.exec(Buffer.from(bytes).toString("latin1"));
  return match ? { seq: Number(match[1]), hash: match[2] } : null;
}

/** A problem as data for a fault of the book, with the file and the row (line number from 1). */
export function bookProblem(code: string, message: string, row?: number, hint?: string): Problem {
  return { code, message, file: "book.jsonl", ...(row === undefined ? {} : { row }), ...(hint ? { hint } : {}) };
}
