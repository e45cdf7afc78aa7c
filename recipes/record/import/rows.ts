/**
 * One row of an import as an entry to be written: a run with its settings and readings, a clean, a precoat, a service.
 * Every cell that cannot be so is a problem with its row and column.
 */
import { refuse, toCanonical } from "../../../engine/index.ts";
import type { Chamber, Gauge, Line } from "../../line/line.ts";
import { asQuantity, refuseImpossible as refuseFarOff } from "../../line/settings.ts";
import { parseWhen } from "../../line/zoned-time.ts";
import type { AnyDraft, Quantity, Reading } from "../entries.ts";
import { bookTime } from "../format.ts";
import type { Ledger } from "../ledger.ts";
import { flatSettings, splitSettingName, stepsOf } from "../steps.ts";
import { recipeInForce, recipesOf } from "../versions.ts";
import {
  isBlank,
  MEASURED,
  type Measured,
  readCount,
  readMeasured,
  readName,
  readNumber,
  readPerson,
  readText,
  readWord,
  refuseImpossible,
} from "./cells.ts";
import type { Columns, Field } from "./columns.ts";
import type { ImportMap } from "./map-file.ts";
import type { Problems } from "./problems.ts";
import type { Row } from "./table.ts";

export const EVENTS = ["run", "clean", "precoat", "service"] as const;

export interface RowContext {
  file: string;
  line: Line;
  ledger: Ledger;
  map: ImportMap;
  columns: Columns;
  problems: Problems;
  nowMs: number;
  /** Recipe of rows that name none, when the chamber's own cannot be told. */
  recipe?: string;
  /** Instants by text: files repeat times, and zones take long. */
  times: Map<string, number>;
  /** Settings found missing, told once each. */
  missing: Set<string>;
  /** Settings outside the declared range: how many rows, by "chamber setting". */
  outside: Map<string, number>;
}

export interface RowRead {
  draft: AnyDraft;
  chamber: string;
  atMs: number;
  event: (typeof EVENTS)[number];
}

/** A clock may run ahead of the one that wrote the file by so much. */
const AHEAD_MS = 600_000;

/** Reads a row; null when it has problems, which are then in the context's list. */
export function readRow(row: Row, context: RowContext): RowRead | null {
  const { problems, columns } = context;
  const before = problems.count;
  const reader = new Cells(row, columns, problems);
  const named = reader.optional("event", (cell) => readWord(cell, EVENTS, "an event"));
  // a row whose event is not understood is not taken for a run
  const lost = named === undefined && problems.count > before;
  const event = named ?? "run";
  const chamber = reader.needed("chamber", (cell) => chamberOf(context.line, cell));
  const atMs = reader.needed("at", (cell) => instant(cell, context));
  const by = reader.optional("by", readPerson);
  if (lost || !chamber || atMs === undefined) return null;
  const head = { at: bookTime(atMs), ...(by === undefined ? {} : { by }) };
  const draft =
    event === "run"
      ? runDraft(reader, context, chamber, atMs, head)
      : otherDraft(reader, context, event, chamber, head);
  return draft && problems.count === before ? { draft, chamber: chamber.name, atMs, event } : null;
}

/** The cells of a row by field, with problems put to their column. */
class Cells {
  readonly row: Row;
  private readonly columns: Columns;
  private readonly problems: Problems;
  constructor(row: Row, columns: Columns, problems: Problems) {
    this.row = row;
    this.columns = columns;
    this.problems = problems;
  }
  cell(column: number): string {
    return (this.row.cells[column - 1] ?? "").trim();
  }
  /** The value of a field, or undefined when it is blank, absent or wrong. */
  optional<T>(field: Field, read: (cell: string) => T): T | undefined {
    const column = this.columns.fields.get(field);
    if (column === undefined || isBlank(this.cell(column))) return undefined;
    return this.at(column, read);
  }
  needed<T>(field: Field, read: (cell: string) => T): T | undefined {
    const column = this.columns.fields.get(field);
    if (column === undefined) return undefined;
    if (!isBlank(this.cell(column))) return this.at(column, read);
    this.problems.add("missing-value", `there is no ${field} in this row`, { row: this.row.row, column });
    return undefined;
  }
  at<T>(column: number, read: (cell: string) => T): T | undefined {
    try {
      return read(this.cell(column));
    } catch (error) {
      this.problems.take(error, { row: this.row.row, column });
      return undefined;
    }
  }
}

function chamberOf(line: Line, cell: string): Chamber {
  const chamber = line.chambers.get(cell);
  if (chamber) return chamber;
  const same = [...line.chambers.keys()].find((name) => name.toLowerCase() === cell.toLowerCase());
  return refuse("unknown-chamber", `"${cell.slice(0, 40)}" is not a chamber of this line`, {
    hint: same ? `it is written ${same}` : `chambers are ${[...line.chambers.keys()].join(", ")}`,
  });
}

function instant(cell: string, { times, map, line, nowMs }: RowContext): number {
  const known = times.get(cell);
  if (known !== undefined) return known;
  if (/^\d{1,2}:\d\d(:\d\d)?$/.test(cell)) {
    refuse("not-a-time", `"${cell}" has no date`, {
      hint: "write 2026-03-29T14:05, or with an offset, 2026-03-29T14:05+01:00",
    });
  }
  const ms = parseWhen(cell, { timeZone: map.timeZone ?? line.timeZone, nowMs });
  if (ms > nowMs + AHEAD_MS)
    refuse("in-the-future", `"${cell}" has not come yet`, { hint: "are day and month exchanged?" });
  times.set(cell, ms);
  return ms;
}

type Head = { at: string; by?: string };

function otherDraft(
  cells: Cells,
  context: RowContext,
  event: "clean" | "precoat" | "service",
  chamber: Chamber,
  head: Head,
): AnyDraft | null {
  const what = cells.optional("note", (cell) => readText(cell));
  const name = chamber.name;
  if (event === "clean")
    return { kind: "clean", ...head, data: { chamber: name, ...(what === undefined ? {} : { what }) } };
  if (event === "precoat") {
    const count = cells.optional("count", (cell) => readCount(cell, context.map.decimal, 1)) ?? 1;
    return { kind: "precoat", ...head, data: { chamber: name, count } };
  }
  if (what === undefined) {
    const hint = "a service needs what was done, in the column note";
    context.problems.add("missing-value", "there is no note in this row", { row: cells.row.row, hint });
    return null;
  }
  return { kind: "service", ...head, data: { chamber: name, what } };
}

function runDraft(cells: Cells, context: RowContext, chamber: Chamber, atMs: number, head: Head): AnyDraft | null {
  const { ledger, problems, file, map } = context;
  const recipe = recipeOf(cells, context, chamber.name);
  if (recipe === null) return null;
  const force = recipeInForce(ledger, chamber.name, recipe, atMs);
  const settings = new Map<string, Quantity>(force ? flatSettings(force.steps) : []);
  const given: string[] = [];
  for (const one of context.columns.settings) {
    if (isBlank(cells.cell(one.column))) continue;
    const value = cells.at(one.column, (cell) => settingValue(cell, one, chamber, context));
    if (value === undefined) continue;
    settings.set(one.name, value);
    given.push(one.name);
  }
  tellMissing(settings, chamber, recipe, cells.row.row, context);
  const readings = readingsOf(cells, context);
  const count = cells.optional("count", (cell) => readCount(cell, map.decimal, 1)) ?? 1;
  const sinceClean = cells.optional("since_clean", (cell) => readCount(cell, map.decimal, 0));
  const kind = cells.optional("kind", (cell) => readWord(cell, ["tuning", "production"] as const, "a kind of run"));
  const texts = textFields(cells);
  const from =
    !force || given.length >= settings.size
      ? "given"
      : given.length > 0
        ? `in force, with ${given.join(", ")} given`
        : force.stated
          ? "in force"
          : "latest run";
  try {
    return {
      kind: "run",
      ...head,
      data: {
        chamber: chamber.name,
        recipe,
        settings_from: from,
        steps: stepsOf(settings),
        count,
        ...(sinceClean === undefined ? {} : { since_clean: sinceClean }),
        ...(kind === undefined ? {} : { kind }),
        ...texts,
        readings,
        imported_from: { file, row: cells.row.row },
      },
    };
  } catch (error) {
    problems.take(error, { row: cells.row.row });
    return null;
  }
}

function textFields(cells: Cells): Partial<Record<"step" | "boat" | "position" | "note", string>> {
  const texts: Partial<Record<"step" | "boat" | "position" | "note", string>> = {};
  for (const field of ["step", "boat", "position", "note"] as const) {
    const text = cells.optional(field, field === "step" ? readName : (cell) => readText(cell));
    if (text !== undefined) texts[field] = text;
  }
  return texts;
}

/** The recipe named in the row, else the chamber's own; null when it names none that will do. */
function recipeOf(cells: Cells, context: RowContext, chamber: string): string | null {
  const before = context.problems.count;
  const named = cells.optional("recipe", readName);
  if (named !== undefined) return named;
  return context.problems.count > before ? null : defaultRecipe(context, chamber, cells.row.row);
}

function defaultRecipe(context: RowContext, chamber: string, row: number): string | null {
  const known = recipesOf(context.ledger, chamber);
  const recipe = context.recipe ?? (known.length === 1 ? known[0] : undefined);
  if (recipe !== undefined) return recipe;
  const key = `recipe of ${chamber}`;
  if (!context.missing.has(key)) {
    context.missing.add(key);
    const text = known.length > 1 ? `${chamber} runs ${known.join(", ")}` : `no recipe is known for ${chamber}`;
    context.problems.add("missing-recipe", `${text}, and this row names none`, {
      row,
      hint: "add a column recipe, or give --recipe NAME",
    });
  }
  // told once for the chamber; the rows are lost all the same
  return null;
}

function settingValue(
  cell: string,
  column: Columns["settings"][number],
  chamber: Chamber,
  context: RowContext,
): Quantity {
  const canonical = toCanonical(readNumber(cell, context.map.decimal), column.unit);
  const setting = chamber.settings.get(column.setting.name) ?? column.setting;
  refuseImpossible(canonical, setting.dimension, `${cell} ${column.unit}`.trim());
  refuseFarOff(setting, canonical, chamber.name);
  if (canonical < setting.low || canonical > setting.high) {
    const key = `${setting.name} on ${chamber.name}`;
    context.outside.set(key, (context.outside.get(key) ?? 0) + 1);
  }
  return asQuantity(setting, canonical);
}

/** What the tool may change must be known for every run; each setting is told once for a chamber and recipe. */
function tellMissing(
  settings: ReadonlyMap<string, Quantity>,
  chamber: Chamber,
  recipe: string,
  row: number,
  context: RowContext,
): void {
  const present = new Set([...settings.keys()].map((name) => splitSettingName(name).setting));
  for (const setting of chamber.settings.values()) {
    if (!setting.tune || present.has(setting.name)) continue;
    const key = `${setting.name} of ${recipe} on ${chamber.name}`;
    if (context.missing.has(key)) continue;
    context.missing.add(key);
    const message = `${setting.name} is not given, and nothing is in force on ${chamber.name} under ${recipe} then`;
    const unit = setting.unit.replace("/", "_per_");
    const hint = `add a column ${setting.name}${unit && `_${unit}`}, or state the recipe first with record recipe`;
    context.problems.add("missing-setting", message, { row, hint });
  }
}

function readingsOf(cells: Cells, context: RowContext): Reading[] {
  const { line, map } = context;
  const values = new Map<Measured, number>();
  for (const what of MEASURED) {
    const value = cells.optional(what, (cell) => readMeasured(cell, what, map.decimal));
    if (value !== undefined) values.set(what, value);
  }
  const on = cells.optional("on", (cell) => readWord(cell, ["polished", "cell"] as const, "where it was read"));
  const named = cells.optional("gauge", (cell) => gaugeNamed(line, cell));
  const pick = (...names: Measured[]): Partial<Record<Measured, number>> =>
    Object.fromEntries(names.flatMap((name) => (values.has(name) ? [[name, values.get(name)]] : [])));
  const film = pick("index", "thickness_nm");
  const light = pick("weighted_reflectance_percent", "reflectance_minimum_nm");
  const textured = line.wafer.surface === "pyramids";
  const readings: Reading[] = [];
  if (Object.keys(film).length > 0) {
    const where = on ?? "polished";
    if (where === "cell" && textured && values.has("index")) {
      cells.at(context.columns.fields.get("index") ?? 1, () =>
        refuse("index-on-texture", "an index read on a textured cell says nothing: only index times thickness shows", {
          hint: "read it on a polished witness, or leave the index out",
        }),
      );
    }
    readings.push({ gauge: gaugeFor(line, where, "film", named), on: where, ...film });
  }
  if (Object.keys(light).length > 0) {
    const where = on ?? (textured ? "cell" : "polished");
    readings.push({ gauge: gaugeFor(line, where, "light", named), on: where, ...light });
  }
  return readings;
}

function gaugeNamed(line: Line, cell: string): Gauge {
  const gauge = line.gauges.get(cell);
  if (gauge) return gauge;
  return refuse("unknown-gauge", `"${cell.slice(0, 40)}" is not a gauge of this line`, {
    hint: `gauges are ${[...line.gauges.keys()].join(", ")}`,
  });
}

const reads = (gauge: Gauge, what: "film" | "light"): boolean =>
  what === "film"
    ? gauge.index !== undefined || gauge.thicknessNm !== undefined
    : gauge.reflectanceMinimumNm !== undefined || gauge.weightedReflectancePercent !== undefined;

/** The gauge named, if it reads this; else the first declared that does, where it was read; else none by name. */
function gaugeFor(line: Line, on: "polished" | "cell", what: "film" | "light", named: Gauge | undefined): string {
  if (named && reads(named, what)) return named.name;
  const declared = [...line.gauges.values()].find((gauge) => gauge.on === on && reads(gauge, what));
  return declared?.name ?? "unnamed";
}
