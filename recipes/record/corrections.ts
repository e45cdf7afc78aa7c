/**
 * What a `correct` entry does to the entry it corrects: fields are replaced by name, and the result must again be a valid
 * entry of its kind. Runs, readings, cleans, precoats, services and
 * readings of a reference wafer can be corrected.
 *
 * Fields of a run: `at`, any of its own (chamber, recipe, step, count, since_clean, kind, boat, position, note), a
 * reading's (index, thickness_nm, ... of the reading entered with the run that has it, else of the one that reads such
 * things), or a setting by its flat name with a {value, unit}, also one that was left out. Of a reading: `at`, `run`,
 * `note`, or the reading's own. Of the others: `at` and their own. null takes a value away.
 */
import { type Problem, Refusal } from "../../engine/index.ts";
import type { AnyEntry, Entry, EntryData, Quantity, Reading } from "./entries.ts";
import { checkData } from "./entry-schema.ts";
import { isBookTime } from "./format.ts";
import { flatSettings, stepsOf } from "./steps.ts";

const READING_FIELDS = new Set([
  "gauge",
  "on",
  "index",
  "thickness_nm",
  "weighted_reflectance_percent",
  "reflectance_minimum_nm",
  "sites",
  "spectrum",
]);
const RUN_FIELDS = new Set(["chamber", "recipe", "step", "count", "since_clean", "kind", "boat", "position", "note"]);
const OWN_FIELDS = {
  clean: new Set(["chamber", "what"]),
  precoat: new Set(["chamber", "count"]),
  service: new Set(["chamber", "what"]),
  gauge: new Set(["gauge", "index", "thickness_nm"]),
} as const;

type Correctable =
  | Entry<"run">
  | Entry<"reading">
  | Entry<"clean">
  | Entry<"precoat">
  | Entry<"service">
  | Entry<"gauge">;

export type Corrected = { original: Correctable; data: Correctable["data"]; at: string } | { problem: Problem };

function fault(code: string, message: string, hint?: string): never {
  throw new Refusal([{ code, message, ...(hint ? { hint } : {}) }]);
}

/**
 * The entry numbered `number` with all `fields` applied in order, or the problem: `no-such-entry`, `cannot-correct`,
 * `no-such-field`, `bad-entry`.
 */
export function corrected(
  entry: AnyEntry | undefined,
  number: number,
  fields: readonly Record<string, unknown>[],
): Corrected {
  try {
    if (!entry) return fault("no-such-entry", `there is no entry ${number}`);
    const original = correctable(entry);
    let data = structuredClone(original.data);
    let at = original.at;
    for (const one of fields) {
      for (const [name, value] of Object.entries(one)) {
        if (name === "at") at = time(value);
        else data = withField(original.kind, data, name, value);
      }
    }
    // a reading of which everything was taken away is no reading
    if ("readings" in data) data = { ...data, readings: data.readings.filter(readsSomething) };
    if (original.kind === "gauge" && !("index" in data || "thickness_nm" in data))
      return fault("bad-entry", `entry ${number} would read nothing with this correction`);
    if ("reading" in data && !readsSomething(data.reading))
      return fault("bad-entry", `entry ${number} would read nothing with this correction`);
    const complaint = checkData(original.kind, data);
    if (complaint) return fault("bad-entry", `entry ${number} would not be valid with this correction: ${complaint}`);
    return { original, data, at };
  } catch (error) {
    if (error instanceof Refusal) return { problem: error.problems[0] };
    throw error;
  }
}

function correctable(entry: AnyEntry): Correctable {
  switch (entry.kind) {
    case "run":
    case "reading":
    case "clean":
    case "precoat":
    case "service":
    case "gauge":
      return entry;
    default:
      return fault(
        "cannot-correct",
        `entry ${entry.seq} is a ${entry.kind}, which cannot be corrected`,
        entry.kind === "recipe" ? "state the recipe anew with record recipe" : "record a note instead",
      );
  }
}

function time(value: unknown): string {
  if (typeof value === "string" && isBookTime(value)) return value;
  return fault("bad-entry", "`at` needs a time like 2026-03-01T22:40:00.000Z");
}

function withField(
  kind: Correctable["kind"],
  data: Correctable["data"],
  name: string,
  value: unknown,
): Correctable["data"] {
  if (kind === "run") return runField(data as EntryData["run"], name, value);
  if (kind === "reading") {
    const reading = data as EntryData["reading"];
    if (READING_FIELDS.has(name)) return { ...reading, reading: replaced(reading.reading, name, value) };
    if (name === "run" || name === "note") return replaced(reading, name, value);
    return noField(kind, name);
  }
  const own = OWN_FIELDS[kind] as ReadonlySet<string>;
  return own.has(name) ? replaced(data, name, value) : noField(kind, name);
}

function runField(run: EntryData["run"], name: string, value: unknown): EntryData["run"] {
  if (RUN_FIELDS.has(name)) return replaced(run, name, value);
  if (READING_FIELDS.has(name)) {
    const at = readingWith(run.readings, name);
    return { ...run, readings: run.readings.map((one, i) => (i === at ? replaced<Reading>(one, name, value) : one)) };
  }
  const flat = flatSettings(run.steps);
  if (!flat.has(name) && !isQuantity(value)) return noField("run", name);
  if (value === null) flat.delete(name);
  else if (isQuantity(value)) flat.set(name, value);
  else return fault("bad-entry", `${name} needs a value with a unit`);
  return { ...run, steps: stepsOf(flat) };
}

const FILM = ["index", "thickness_nm"];
const LIGHT = ["weighted_reflectance_percent", "reflectance_minimum_nm"];

const readsSomething = (reading: Reading): boolean =>
  [...FILM, ...LIGHT].some((name) => name in reading) || reading.spectrum !== undefined;

/** Which of a run's readings a field belongs to: film and light are read by different gauges. */
function readingWith(readings: readonly Reading[], name: string): number {
  const later = "a reading that came later is entered with coatwright record reading --run ENTRY";
  if (readings.length === 0) return fault("no-such-field", "the run has no reading of its own", later);
  const places = (is: (reading: Reading) => boolean): number[] => readings.flatMap((one, i) => (is(one) ? [i] : []));
  const having = places((one) => name in one);
  if (having.length === 1) return having[0];
  const kind = [FILM, LIGHT].find((names) => names.includes(name));
  if (kind) {
    const alike = places((one) => kind.some((other) => other in one));
    const emptied = places((one) => !readsSomething(one));
    const [found = emptied[0]] = alike;
    if (found === undefined) return fault("no-such-field", `no reading of the run reads ${name}`, later);
    if (alike.length < 2) return found;
  } else if (readings.length === 1) return 0;
  return fault("no-such-field", `the run has ${readings.length} readings, and ${name} could be of more than one`);
}

function isQuantity(value: unknown): value is Quantity {
  const { value: number, unit } = (value ?? {}) as Partial<Quantity>;
  return typeof number === "number" && typeof unit === "string";
}

/** A copy with one field set, or taken away by null. The schema judges the result. */
function replaced<T extends object>(record: T, name: string, value: unknown): T {
  const fields = Object.entries(record).filter(([key]) => key !== name);
  if (value !== null) fields.push([name, value]);
  return Object.fromEntries(fields) as T;
}

function noField(kind: string, name: string): never {
  return fault("no-such-field", `a ${kind} has no field "${name}" that could be corrected`);
}
