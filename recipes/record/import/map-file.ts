/**
 * What an import map says about a foreign file: which heading means what, what to ignore, how numbers and columns are
 * separated. The file is YAML; it arrives here already read.
 */
import * as z from "zod/mini";
import { nearestWord, type Problem, Refusal } from "../../../engine/index.ts";

export interface ImportMap {
  /** Our column by the file's heading, headings in lower case: "sih4 flow" -> "silane_sccm". */
  columns: ReadonlyMap<string, string>;
  /** Headings to leave out, in lower case. */
  ignore: ReadonlySet<string>;
  skipLines: number;
  decimal: "." | ",";
  /** Null: found out from the heading line. */
  separator: "," | ";" | "\t" | null;
  encoding: "utf-8" | "utf-16le" | "windows-1252";
  /** IANA zone of times without offset; null: the line's. */
  timeZone: string | null;
}

/** What holds without a map file. */
export const NO_MAP: ImportMap = {
  columns: new Map(),
  ignore: new Set(),
  skipLines: 0,
  decimal: ".",
  separator: null,
  encoding: "utf-8",
  timeZone: null,
};

const SEPARATORS: Record<string, "," | ";" | "\t"> = {
  ",": ",",
  comma: ",",
  ";": ";",
  semicolon: ";",
  "\t": "\t",
  "\\t": "\t",
  tab: "\t",
};
const ENCODINGS: Record<string, ImportMap["encoding"]> = {
  "utf-8": "utf-8",
  utf8: "utf-8",
  "utf-16": "utf-16le",
  "utf-16le": "utf-16le",
  "windows-1252": "windows-1252",
  "latin-1": "windows-1252",
  latin1: "windows-1252",
  "iso-8859-1": "windows-1252",
};

/** YAML readers differ in whether they give numbers or text for a plain 3. */
const lines = z.pipe(
  z.pipe(
    z.union([z.number(), z.string()]),
    z.transform((given) => Number(given)),
  ),
  z.int().check(z.gte(0), z.lte(10_000)),
);
const oneOrMore = z.pipe(
  z.union([z.string(), z.array(z.string())]),
  z.transform((given) => (typeof given === "string" ? [given] : given)),
);

const shape = z.strictObject({
  columns: z.optional(z.record(z.string(), z.string())),
  ignore: z.optional(oneOrMore),
  skip_lines: z.optional(lines),
  decimal: z.optional(z.enum([".", ",", "point", "comma"])),
  separator: z.optional(z.string()),
  encoding: z.optional(z.string()),
  time_zone: z.optional(z.string()),
});

const keyHint = (key: string): string => {
  const near = nearestWord(key, KEYS);
  return near ? `did you mean ${near}?` : `keys are ${KEYS.join(", ")}`;
};

function lookedUp<T>(table: Record<string, T>, given: string): T | undefined {
  const word = given.toLowerCase();
  return Object.hasOwn(table, word) ? table[word] : undefined;
}

function zoneExists(zone: string): boolean {
  try {
    new Intl.DateTimeFormat("en", { timeZone: zone });
    return true;
  } catch (error) {
    if (error instanceof RangeError) return false;
    throw error;
  }
}

/** What each key wants, for hints. */
const WANTED: Record<keyof z.output<typeof shape>, string> = {
  columns: "a heading of the file and what it means a row, as in SiH4 flow: silane_sccm",
  ignore: "one heading, or a list, as in [ operator, shift ]",
  skip_lines: "a whole number from 0 to 10000",
  decimal: "point or comma",
  separator: 'comma, semicolon, tab, or "," ";"',
  encoding: "utf-8, utf-16le or windows-1252",
  time_zone: "as in Europe/Lisbon",
};
const KEYS = Object.keys(WANTED);

type MapPath = readonly (string | number)[];
/** Where a path of the map stands in its file, if that is known. */
type Place = (path: MapPath, at: "value" | "key") => { row?: number; column?: number };

/** Reads a map that was parsed from YAML. Throws `bad-import-map` with every problem, naming the key and its place. */
export function readImportMap(value: unknown, file = "import-map.yaml", place: Place = () => ({})): ImportMap {
  const parsed = shape.safeParse(value ?? {});
  const problems: Problem[] = [];
  const wrong = (path: MapPath, message: string, hint?: string, at: "value" | "key" = "value"): void => {
    problems.push({ code: "bad-import-map", message, file, ...place(path, at), ...(hint ? { hint } : {}) });
  };
  if (!parsed.success) {
    for (const issue of parsed.error.issues) {
      const path = issue.path as (string | number)[];
      if (issue.code === "unrecognized_keys") {
        for (const key of issue.keys)
          wrong([...path, key], `"${key}" is not a key of an import map`, keyHint(key), "key");
        continue;
      }
      const key = KEYS.find((one) => one === path[0]) as keyof typeof WANTED | undefined;
      if (key) wrong(path, `${path.join(": ")}: this cannot be read`, `${key} takes ${WANTED[key]}`);
      else wrong(path, "the map must hold keys and values", `keys are ${KEYS.join(", ")}; ${WANTED.columns}`);
    }
    throw new Refusal(problems);
  }
  const { data } = parsed;
  const separator = data.separator === undefined ? null : lookedUp(SEPARATORS, data.separator);
  if (separator === undefined) wrong(["separator"], `separator: "${data.separator}" is not one`, WANTED.separator);
  const encoding = lookedUp(ENCODINGS, data.encoding ?? "utf-8");
  if (encoding === undefined) wrong(["encoding"], `encoding: "${data.encoding}" is not known`, WANTED.encoding);
  if (data.time_zone !== undefined && !zoneExists(data.time_zone)) {
    wrong(["time_zone"], `time_zone: "${data.time_zone}" is not a time zone`, WANTED.time_zone);
  }
  const seen = new Set<string>();
  for (const heading of Object.keys(data.columns ?? {})) {
    const lower = heading.trim().toLowerCase();
    if (seen.has(lower))
      wrong(["columns", heading], `columns: "${heading}" stands there twice`, "capitals do not count", "key");
    seen.add(lower);
  }
  if (problems.length > 0) throw new Refusal(problems);
  return {
    columns: new Map(Object.entries(data.columns ?? {}).map(([from, to]) => [from.trim().toLowerCase(), to.trim()])),
    ignore: new Set((data.ignore ?? []).map((one) => one.trim().toLowerCase())),
    skipLines: data.skip_lines ?? 0,
    decimal: data.decimal === "," || data.decimal === "comma" ? "," : ".",
    separator: separator ?? null,
    encoding: encoding ?? "utf-8",
    timeZone: data.time_zone ?? null,
  };
}
