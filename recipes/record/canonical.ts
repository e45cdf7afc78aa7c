/**
 * One way, and only one, to write a value as JSON: the form whose bytes the record book hashes, and whose hash tells
 * whether two bases of a proposal are the same.
 *
 * - Object keys sorted by UTF-16 code unit; properties that are `undefined` are left out.
 * - No white space. Numbers as ECMAScript writes them (shortest that reads back equal); -0 is 0; NaN and infinities are
 *   refused.
 * - Text, keys included, in Unicode normal form C. Escapes as JSON requires, and beyond that as \uXXXX for everything
 *   that could act on a terminal when the file is shown raw: DEL, C1 controls, bidirectional controls, zero-width
 *   characters, line and paragraph separators, byte-order mark.
 * - The keys __proto__, constructor and prototype are refused anywhere; so is nesting deeper than 20.
 */
import { createHash } from "node:crypto";
import { refuse } from "../../engine/index.ts";

const DEEPEST = 20;
const FORBIDDEN = new Set(["__proto__", "constructor", "prototype"]);
/** Acts on a terminal or hides in it, yet passes JSON.stringify unescaped. */
const HIDDEN = /[\u007f-\u009f\u00ad\u061c\u180e\u200b-\u200f\u2028-\u202e\u2060-\u206f\ufeff\ufff9-\ufffb]/g;

/** Text as a canonical JSON string, quotes included. */
export function canonicalText(text: string): string {
  const quoted = JSON.stringify(text.normalize("NFC"));
  return quoted.replace(HIDDEN, (c) => "\\u" + c.charCodeAt(0).toString(16).padStart(4, "0"));
}

/**
 * A JSON value in canonical form. Throws `not-a-number` (NaN, infinity), `not-json` (functions, bigint, undefined in a
 * list, class instances), `forbidden-key`, `too-deep`; `where` names the value in the message.
 */
export function canonicalJson(value: unknown, where = "value", depth = 0): string {
  if (depth > DEEPEST) refuse("too-deep", `${where} is nested deeper than ${DEEPEST}`);
  if (value === null || typeof value === "boolean") return String(value);
  if (typeof value === "string") return canonicalText(value);
  if (typeof value === "number") {
    if (!Number.isFinite(value)) refuse("not-a-number", `${where} is ${value}, a finite number is needed`);
    return JSON.stringify(value);
  }
  if (Array.isArray(value)) {
    return "[" + value.map((item, i) => canonicalJson(item, `${where}[${i}]`, depth + 1)).join(",") + "]";
  }
  if (typeof value === "object") return canonicalObject(value, where, depth);
  return refuse("not-json", `${where} is ${typeof value}, which cannot be recorded`);
}

function canonicalObject(value: object, where: string, depth: number): string {
  const prototype: unknown = Object.getPrototypeOf(value);
  if (prototype !== Object.prototype && prototype !== null) {
    refuse("not-json", `${where} is not a plain object and cannot be recorded`);
  }
  const parts: string[] = [];
  const seen = new Set<string>();
  const entries = Object.entries(value)
    .map(([key, item]) => [key.normalize("NFC"), item] as const)
    .sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0));
  for (const [key, item] of entries) {
    if (FORBIDDEN.has(key)) refuse("forbidden-key", `${where} has a key "${key}", which is not allowed`);
    if (item === undefined) continue;
    if (seen.has(key)) refuse("not-json", `${where} has the key "${key}" twice once written in normal form`);
    seen.add(key);
    parts.push(canonicalText(key) + ":" + canonicalJson(item, `${where}.${key}`, depth + 1));
  }
  return "{" + parts.join(",") + "}";
}

/** SHA-256, 64 lower-case hex digits. Text is hashed as UTF-8. */
export function sha256(bytes: Uint8Array | string): string {
  return createHash("sha256").update(bytes).digest("hex");
}
