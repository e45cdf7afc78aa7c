/**
 * The mistakes people make first in YAML, in words they can act on: those that YAML accepts and reads as something else
 * (a missing space after a colon, a decimal comma inside braces), and those it refuses in its own language (a tab, a
 * comparison sign, two documents).
 */
import type { ErrorCode, Pair, Scalar, YAMLMap } from "yaml";
import { commaProblem } from "../../engine/index.ts";

interface Found {
  offset: number;
  code: string;
  message: string;
  hint?: string;
  /** Keys of this map whose content must not be judged again. */
  spoils: string[];
}

const MISSING_SPACE = /^([A-Za-z_][\w.+/-]*):(?=[^\s:/])(.+)$/s;

/** The problem of a key that its value sticks to ("range:300..1200 sccm"), or null. */
export function gluedKey(text: string): { code: string; message: string; hint: string; key: string } | null {
  const glued = MISSING_SPACE.exec(text);
  if (!glued) return null;
  const [, key, rest] = glued;
  const value = rest.replace(/\s+#.*$/s, "").trim();
  const message = `a space is missing after the colon in "${key}:${value}"`;
  return { code: "missing-space", message, hint: `write ${key}: ${value}`, key };
}

/**
 * Mistakes inside one map that parsed. `skip` holds the positions of pairs that are debris of a mistake, not keys.
 */
export function mistakeInMap(map: YAMLMap<Scalar, Scalar | null>, text: string): { found: Found[]; skip: Set<number> } {
  const found: Found[] = [];
  const skip = new Set<number>();
  const { items } = map;
  const keyText = (i: number) => String(items[i]?.key?.value ?? "");
  const bare = (i: number) => {
    const value = items[i]?.value;
    return value === null || value === undefined || (value.value === null && (value.source ?? "") === "");
  };
  for (let i = 0; i < items.length; i++) {
    const pair = items[i] as Pair<Scalar, Scalar | null>;
    const key = keyText(i);
    const glued = bare(i) ? gluedKey(key) : null;
    if (glued) {
      skip.add(i);
      const { code, message, hint } = glued;
      const offset = (pair.key.range?.[0] ?? 0) + glued.key.length;
      found.push({ offset, code, message, hint, spoils: [glued.key, key] });
    }
    if (map.flow !== true) continue;
    // {index: 0,003} parses as index: 0 and a second key 003 without a value
    let last = i;
    while (last + 1 < items.length && bare(last + 1) && /^\d/.test(keyText(last + 1))) last++;
    if (last === i || skip.has(i)) continue;
    const start = bare(i) ? pair.key.range?.[0] : pair.value?.range?.[0];
    const end = items[last].key.range?.[1];
    if (start === undefined || end === undefined) continue;
    const written = text.slice(start, end);
    const comma = commaProblem(written.replace(/,\s+/g, ","));
    if (comma) {
      const { code, message, hint } = comma;
      found.push({ offset: start, code, message, hint, spoils: [key] });
      for (let j = i + 1; j <= last; j++) skip.add(j);
    }
  }
  return { found, skip };
}

/** Words for what the parser refused, and the offset to point at. `offset` is where the parser stopped. */
export function syntaxProblem(
  parserCode: ErrorCode,
  parserMessage: string,
  text: string,
  offset: number,
): { code: string; message: string; hint?: string; offset: number } {
  const start = text.lastIndexOf("\n", Math.max(0, offset - 1)) + 1;
  const end = text.indexOf("\n", offset);
  const row = text.slice(start, end < 0 ? text.length : end);
  if (parserCode === "TAB_AS_INDENT" || /^\s*\t/.test(row)) {
    return { code: "tab-indent", message: "a tab stands where spaces must indent", hint: "indent with spaces", offset };
  }
  const sign = /(?:^|[:,{[]|\bat\s)\s*([<>]=?)\s*(\d[^,}\]#\n]*)/.exec(row);
  if (sign) {
    const words = sign[1].startsWith(">") ? "at least" : "at most";
    const hint = `write ${words} ${sign[2].trim()}`;
    const at = start + row.indexOf(sign[1], sign.index);
    return { code: "comparison-sign", message: `${sign[1]} is not read here`, hint, offset: at };
  }
  // the parser often stops at the row after the one that lacks its space
  for (const candidate of [start, text.lastIndexOf("\n", Math.max(0, start - 2)) + 1]) {
    const line = text.slice(candidate).split("\n", 1)[0];
    const before = /^\s*(?:- )?(?:[^#"']*[{,]\s*)?/.exec(line)?.[0] ?? "";
    const glued = gluedKey(line.slice(before.length).replace(/,.*$/s, ""));
    if (glued) {
      const { code, message, hint } = glued;
      return { code, message, hint, offset: candidate + before.length + glued.key.length };
    }
  }
  const [code, message, hint] = SYNTAX[parserCode] ?? ["yaml", `this cannot be read as YAML: ${parserMessage}`];
  return { code, message, hint, offset };
}

const SYNTAX: Partial<Record<ErrorCode, [code: string, message: string, hint?: string]>> = {
  MULTIPLE_DOCS: ["many-documents", "a second document begins here (---)", "one file holds one document"],
  NON_STRING_KEY: ["key-not-text", "a key must be a plain word"],
  TAG_RESOLVE_FAILED: ["tag", "tags (!name) are not read here", "write the value without it"],
  RESOURCE_EXHAUSTION: ["too-deep", "too many levels are nested here"],
  BAD_ALIAS: ["alias", "references (*name) are not read here", "write the value out"],
  MULTILINE_IMPLICIT_KEY: ["yaml", "a key and its value are broken over rows here", "check the colon and the indent"],
  BLOCK_AS_IMPLICIT_KEY: [
    "yaml",
    "a second colon or a wrong indent makes this value unreadable",
    "put text that holds a colon between double quotes, and align keys of one level",
  ],
  BAD_INDENT: ["yaml", "a bracket is not closed, or the indent is wrong", "check { } and [ ], and align keys"],
  MISSING_CHAR: ["yaml", "a quote, colon, comma or bracket is missing", undefined],
  BAD_SCALAR_START: ["yaml", "a value cannot begin with this character", "put the text between double quotes"],
};
