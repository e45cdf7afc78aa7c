/**
 * A quick yes for the commonest entry, as data and as a line of the book. Books hold thousands of runs and the general schema
 * costs most of the time of opening one; this says yes to a run of the ordinary shape and "perhaps" to everything else,
 * which then goes through the schema (data) or through `readLine` of format.ts (a line). It must never say yes where those
 * say no: tests hold them together.
 */
import * as crypto from "node:crypto";
import type { Entry } from "./entries.ts";

const isText = (v: unknown, least: number, most: number): boolean =>
  typeof v === "string" && v.length >= least && v.length <= most;
const isNumber = (v: unknown, low: number, high: number): boolean => typeof v === "number" && v >= low && v <= high;
const isCount = (v: unknown, least: number): boolean => Number.isInteger(v) && isNumber(v, least, 1_000_000_000);
const isObject = (v: unknown): v is Record<string, unknown> => typeof v === "object" && v !== null && !Array.isArray(v);

const runMembers: Record<string, (v: unknown) => boolean> = {
  chamber: (v) => isText(v, 1, 200),
  recipe: (v) => isText(v, 1, 200),
  settings_from: (v) => isText(v, 1, 200),
  steps: (v) => Array.isArray(v) && v.length === 1 && plainStep(v[0]),
  count: (v) => isCount(v, 1),
  since_clean: (v) => isCount(v, 0),
  kind: (v) => v === "tuning" || v === "production",
  boat: (v) => isText(v, 0, 4000),
  position: (v) => isText(v, 0, 4000),
  readings: (v) => Array.isArray(v) && v.length <= 100 && v.every(plainReading),
  note: (v) => isText(v, 0, 4000),
  imported_from: (v) =>
    isObject(v) && Object.keys(v).length === 2 && isText(v["file"], 0, 4000) && isCount(v["row"], 0),
};
const needed = ["chamber", "recipe", "settings_from", "steps", "count", "readings"];

const readingMembers: Record<string, (v: unknown) => boolean> = {
  gauge: (v) => isText(v, 1, 200),
  on: (v) => v === "polished" || v === "cell",
  index: (v) => isNumber(v, 0, 100),
  thickness_nm: (v) => isNumber(v, 0, 1_000_000),
  weighted_reflectance_percent: (v) => isNumber(v, 0, 100),
  reflectance_minimum_nm: (v) => isNumber(v, 0, 1_000_000),
};

function has(members: Record<string, (v: unknown) => boolean>, value: Record<string, unknown>): boolean {
  for (const key of Object.keys(value)) if (!Object.hasOwn(members, key) || !members[key](value[key])) return false;
  return true;
}

function plainReading(v: unknown): boolean {
  return isObject(v) && v["gauge"] !== undefined && v["on"] !== undefined && has(readingMembers, v);
}

function plainStep(v: unknown): boolean {
  if (!isObject(v) || Object.keys(v).length !== 1 || !isObject(v["settings"])) return false;
  for (const [name, quantity] of Object.entries(v["settings"])) {
    if (!isText(name, 1, 200) || !isObject(quantity) || Object.keys(quantity).length !== 2) return false;
    if (!Number.isFinite(quantity["value"]) || !isText(quantity["unit"], 0, 40)) return false;
  }
  return true;
}

/** True: certainly a valid run. False: ask the schema. */
export function isPlainRun(data: unknown): boolean {
  return isObject(data) && needed.every((key) => data[key] !== undefined) && has(runMembers, data);
}

// The line. A program that is asked one thing runs every function cold, so the whole form (members and their order, times,
// data) is one regular expression, which runs as machine code at once.

/** Text without escapes, controls or quotes; a line with them is for `readLine`. */
const text = (least: number, most: number) => `"[^"\\\\\\u0000-\\u001f]{${least},${most}}"`;
const number = "-?(?:0|[1-9]\\d{0,20})(?:\\.\\d{1,25})?";
/** Up to 99.999...: within every range of indices and percentages; up to 999999.999...: of nanometres. */
const percent = "\\d{1,2}(?:\\.\\d{1,25})?";
const nanometres = "\\d{1,6}(?:\\.\\d{1,25})?";
const count = (least: 0 | 1) => (least === 0 ? "(?:0|[1-9]\\d{0,8})" : "[1-9]\\d{0,8}");
/** The first 28 days of a month exist in all of them. */
const time = '"\\d{4}-(?:0[1-9]|1[0-2])-(?:0[1-9]|1\\d|2[0-8])T(?:[01]\\d|2[0-3]):[0-5]\\d:[0-5]\\d\\.\\d{3}Z"';
const maybe = (member: string) => `(?:${member},)?`;
const list = (item: string) => `(?:${item}(?:,${item}){0,99})?`;
const notForbidden = '(?!"(?:__proto__|constructor|prototype)")';
/** No zeros before a number: JSON has none. */
const plain = (digits: string) => `(?!0\\d)${digits}`;

/** Keys stand sorted, as the writer leaves them; `gauge` and `on` are always there. */
const reading =
  `\\{"gauge":${text(1, 200)},${maybe(`"index":${plain(percent)}`)}"on":"(?:polished|cell)"` +
  `(?:,"reflectance_minimum_nm":${plain(nanometres)})?(?:,"thickness_nm":${plain(nanometres)})?` +
  `(?:,"weighted_reflectance_percent":${plain(percent)})?\\}`;
const setting = `${notForbidden}${text(1, 200)}:\\{"unit":${text(0, 40)},"value":${number}\\}`;
const data =
  `\\{${maybe(`"boat":${text(0, 4000)}`)}"chamber":${text(1, 200)},"count":${count(1)},` +
  `${maybe(`"imported_from":\\{"file":${text(0, 4000)},"row":${count(0)}\\}`)}` +
  `${maybe('"kind":"(?:tuning|production)"')}${maybe(`"note":${text(0, 4000)}`)}` +
  `${maybe(`"position":${text(0, 4000)}`)}"readings":\\[${list(reading)}\\],"recipe":${text(1, 200)},` +
  `"settings_from":${text(1, 200)},${maybe(`"since_clean":${count(0)}`)}` +
  `"steps":\\[\\{"settings":\\{${list(setting)}\\}\\}\\]\\}`;
const RUN_LINE = new RegExp(
  `^\\{"v":1,"seq":${plain("\\d+")},"at":${time},"entered":${time},"by":${text(0, 4000)},"kind":"run","data":${data},` +
    '"prev":"[0-9a-f]{64}","hash":"[0-9a-f]{64}"\\}$',
);

const HASH_TAIL = 75;
/** Well under the book's limit of a line. */
const LONGEST = 65_536;

/** SHA-256 in hex; the one-shot form, where Node has it (20.12), takes half the time of making a Hash object. */
export const quickSha256: (bytes: Uint8Array) => string =
  typeof crypto.hash === "function"
    ? (bytes) => crypto.hash("sha256", bytes, "hex")
    : (bytes) => crypto.createHash("sha256").update(bytes).digest("hex");

/**
 * The run that stands in `buffer` from byte `at` up to `end` (its LF), when it certainly is entry `seq` after the entry of
 * hash `prev`; null when it must be looked at properly.
 */
export function plainRunLine(
  buffer: Buffer,
  at: number,
  end: number,
  place: { seq: number; prev: string },
): Entry<"run"> | null {
  if (end - at > LONGEST || end - at <= HASH_TAIL) return null;
  const line = buffer.toString("utf8", at, end);
  if (!RUN_LINE.test(line)) return null;
  const hash = quickSha256(buffer.subarray(at, end - HASH_TAIL));
  if (!line.endsWith(`,"prev":"${place.prev}","hash":"${hash}"}`)) return null;
  const entry = JSON.parse(line) as Entry<"run">;
  return entry.seq === place.seq ? entry : null;
}
