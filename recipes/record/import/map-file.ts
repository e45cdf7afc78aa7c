/**
 * What an import map says about a foreign file: which heading means what, what to ignore, how numbers and columns are
 * separated. The file is YAML; it arrives here already read.
 */
import * as z from "zod/mini";
import { type Problem, Refusal } from "../../../engine/index.ts";

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

function zoneExists(zone: string): boolean {
  try {
    new Intl.DateTimeFormat("en", { timeZone: zone });
    return true;
  } catch (error) {
    if (error instanceof RangeError) return false;
    throw error;
  }
}

/** Reads a map that was parsed from YAML. Throws `bad-import-map` with every problem, naming the key. */
export function readImportMap(value: unknown, file = "import-map.yaml"): ImportMap {
  const parsed = shape.safeParse(value ?? {});
  const problems: Problem[] = [];
  const wrong = (message: string, hint?: string): void => {
    problems.push({ code: "bad-import-map", message, file, ...(hint ? { hint } : {}) });
  };
  if (!parsed.success) {
    for (const issue of parsed.error.issues) wrong(`${issue.path.join(".") || "the map"}: ${issue.message}`);
    throw new Refusal(problems);
  }
  const { data } = parsed;
  const separator = data.separator === undefined ? null : SEPARATORS[data.separator.toLowerCase()];
  if (separator === undefined) wrong(`separator: "${data.separator}" is not one`, 'comma, semicolon, tab, or "," ";"');
  const encoding = ENCODINGS[(data.encoding ?? "utf-8").toLowerCase()];
  if (encoding === undefined) wrong(`encoding: "${data.encoding}" is not known`, "utf-8, utf-16le or windows-1252");
  if (data.time_zone !== undefined && !zoneExists(data.time_zone)) {
    wrong(`time_zone: "${data.time_zone}" is not a time zone`, "as in Europe/Lisbon");
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
