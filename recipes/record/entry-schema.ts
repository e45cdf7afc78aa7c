/**
 * Is the data of an entry of the right shape for its kind? Asked before writing, so that nothing odd enters the book,
 * and on reading, so that the rest of the program can rely on the types of entries.ts.
 */
import * as z from "zod/mini";
import type { EntryData, Kind } from "./entries.ts";
import { isPlainRun } from "./plain-run.ts";

const textOf = (most: number, least = 0) => z.string().check(z.minLength(least), z.maxLength(most));
const between = (low: number, high: number) => z.number().check(z.gte(low), z.lte(high));
const whole = (low: number, high: number) => z.int().check(z.gte(low), z.lte(high));
const list = <T extends z.ZodMiniType>(of: T, most: number, least = 0) =>
  z.array(of).check(z.minLength(least), z.maxLength(most));
const maybe = <T extends z.ZodMiniType>(type: T) => z.optional(type);

/** Longest free text in an entry, characters: a page, so that a pasted log file is refused. */
const text = textOf(4000);
/** A file's text: line.yaml of a large line with comments. */
const file = textOf(200_000);
const name = textOf(200, 1);
const count = whole(0, 1_000_000_000);
const positive = whole(1, 1_000_000_000);
const anything = z.record(z.string(), z.unknown());
const quantity = z.strictObject({ value: z.number(), unit: textOf(40) });
const steps = list(z.strictObject({ name: maybe(name), settings: z.record(name, quantity) }), 50, 1);
const index = maybe(between(0, 100));
const thickness = maybe(between(0, 1_000_000));
const reading = z.strictObject({
  gauge: name,
  on: z.enum(["polished", "cell"]),
  index,
  thickness_nm: thickness,
  weighted_reflectance_percent: maybe(between(0, 100)),
  reflectance_minimum_nm: maybe(between(0, 1_000_000)),
  sites: maybe(whole(1, 100_000)),
  site_values: maybe(
    list(z.strictObject({ position: maybe(text), site: maybe(text), index, thickness_nm: thickness }), 10_000),
  ),
  spectrum: maybe(name),
});
const hash = z.string().check(z.regex(/^[0-9a-f]{64}$/));

const SCHEMAS: { [K in Kind]: z.ZodMiniType<EntryData[K]> } = {
  line: z.strictObject({ line: name, created_by: name, line_file: file }),
  "line file": z.strictObject({ before: file, after: file, difference: list(text, 1000), loosened: list(text, 1000) }),
  run: z.strictObject({
    chamber: name,
    recipe: name,
    settings_from: name,
    steps,
    step: maybe(name),
    count: positive,
    since_clean: maybe(count),
    kind: maybe(z.enum(["tuning", "production"])),
    boat: maybe(text),
    position: maybe(text),
    readings: list(reading, 100),
    note: maybe(text),
    imported_from: maybe(z.strictObject({ file: text, row: count })),
  }),
  reading: z.strictObject({ run: count, reading, note: maybe(text) }),
  recipe: z.strictObject({ chamber: name, recipe: name, steps, reason: maybe(text) }),
  clean: z.strictObject({ chamber: name, what: maybe(text) }),
  precoat: z.strictObject({ chamber: name, count: positive }),
  service: z.strictObject({ chamber: name, what: text }),
  gauge: z.strictObject({ gauge: name, reference: z.literal(true), index, thickness_nm: thickness }),
  note: z.strictObject({
    chamber: maybe(name),
    text,
    override: maybe(z.strictObject({ alarm: name, runs: positive, chamber: name })),
  }),
  proposal: z.strictObject({
    chamber: name,
    recipe: name,
    basis: hash,
    document: anything,
    goal: anything,
    window: list(text, 1000),
  }),
  adopt: z.strictObject({
    proposal: count,
    chamber: name,
    recipe: name,
    reason: text,
    before: steps,
    after: steps,
    predicted: anything,
    supersedes: maybe(count),
  }),
  approve: z.strictObject({ change: count }),
  enter: z.strictObject({ change: count, read_back: steps }),
  close: z.strictObject({
    change: count,
    verdict: text,
    expected: anything,
    got: anything,
    runs: list(count, 100_000),
  }),
  undo: z.strictObject({
    change: count,
    reason: text,
    chamber: name,
    recipe: name,
    cancelled: z.boolean(),
    supersedes: maybe(count),
    before: steps,
    after: steps,
  }),
  correct: z.strictObject({ entry: count, fields: anything, reason: text }),
  torn: z.strictObject({ file: name, bytes: count }),
  import: z.strictObject({ file: text, entries: whole(0, 1_000_000), skipped: count }),
};

/** Is this a kind of entry we know? */
export function isKind(kind: string): kind is Kind {
  return Object.hasOwn(SCHEMAS, kind);
}

/** Null when `data` fits `kind`, else what is wrong in words: "readings.0.index: expected number". */
export function checkData(kind: Kind, data: unknown): string | null {
  if (kind === "run" && isPlainRun(data)) return null;
  const result = SCHEMAS[kind].safeParse(data);
  if (result.success) return null;
  const issue = result.error.issues[0];
  return `${issue.path.join(".") || "data"}: ${issue.message}`;
}
