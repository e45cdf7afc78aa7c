/**
 * Is the data of an entry of the right shape for its kind? Asked before writing, so that nothing odd enters the book,
 * and on reading, so that the rest of the program can rely on the types of entries.ts.
 */
import { z } from "zod";
import type { EntryData, Kind } from "./entries.ts";
import { isPlainRun } from "./plain-run.ts";

/** Longest free text in an entry, characters: a page, so that a pasted log file is refused. */
const text = z.string().max(4000);
const name = z.string().min(1).max(200);
const count = z.int().min(0).max(1_000_000_000);
const number = z.number();
const anything = z.record(z.string(), z.unknown());
const quantity = z.strictObject({ value: number, unit: z.string().max(40) });
const steps = z
  .array(z.strictObject({ name: name.optional(), settings: z.record(name, quantity) }))
  .min(1)
  .max(50);
const index = number.min(0).max(100).optional();
const thickness = number.min(0).max(1_000_000).optional();
const reading = z.strictObject({
  gauge: name,
  on: z.enum(["polished", "cell"]),
  index,
  thickness_nm: thickness,
  weighted_reflectance_percent: number.min(0).max(100).optional(),
  reflectance_minimum_nm: number.min(0).max(1_000_000).optional(),
  sites: z.int().min(1).max(100_000).optional(),
  site_values: z
    .array(z.strictObject({ position: text.optional(), site: text.optional(), index, thickness_nm: thickness }))
    .max(10_000)
    .optional(),
  spectrum: name.optional(),
});
const hash = z.string().regex(/^[0-9a-f]{64}$/);

const SCHEMAS: { [K in Kind]: z.ZodType<EntryData[K]> } = {
  line: z.strictObject({ line: name, created_by: name, line_file: z.string().max(200_000) }),
  "line file": z.strictObject({
    before: z.string().max(200_000),
    after: z.string().max(200_000),
    difference: z.array(text).max(1000),
    loosened: z.array(text).max(1000),
  }),
  run: z.strictObject({
    chamber: name,
    recipe: name,
    settings_from: name,
    steps,
    step: name.optional(),
    count: count.min(1),
    since_clean: count.optional(),
    kind: z.enum(["tuning", "production"]).optional(),
    boat: text.optional(),
    position: text.optional(),
    readings: z.array(reading).max(100),
    note: text.optional(),
    imported_from: z.strictObject({ file: text, row: count }).optional(),
  }),
  reading: z.strictObject({ run: count, reading, note: text.optional() }),
  recipe: z.strictObject({ chamber: name, recipe: name, steps, reason: text.optional() }),
  clean: z.strictObject({ chamber: name, what: text.optional() }),
  precoat: z.strictObject({ chamber: name, count: count.min(1) }),
  service: z.strictObject({ chamber: name, what: text }),
  gauge: z.strictObject({ gauge: name, reference: z.literal(true), index, thickness_nm: thickness }),
  note: z.strictObject({
    chamber: name.optional(),
    text,
    override: z.strictObject({ alarm: name, runs: count.min(1), chamber: name }).optional(),
  }),
  proposal: z.strictObject({
    chamber: name,
    recipe: name,
    basis: hash,
    document: anything,
    goal: anything,
    window: z.array(text).max(1000),
  }),
  adopt: z.strictObject({
    proposal: count,
    chamber: name,
    recipe: name,
    reason: text,
    before: steps,
    after: steps,
    predicted: anything,
    supersedes: count.optional(),
  }),
  approve: z.strictObject({ change: count }),
  enter: z.strictObject({ change: count, read_back: steps }),
  close: z.strictObject({
    change: count,
    verdict: text,
    expected: anything,
    got: anything,
    runs: z.array(count).max(100_000),
  }),
  undo: z.strictObject({
    change: count,
    reason: text,
    chamber: name,
    recipe: name,
    cancelled: z.boolean(),
    supersedes: count.optional(),
    before: steps,
    after: steps,
  }),
  correct: z.strictObject({ entry: count, fields: anything, reason: text }),
  torn: z.strictObject({ file: name, bytes: count }),
  import: z.strictObject({ file: text, entries: count.max(1_000_000), skipped: count }),
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
