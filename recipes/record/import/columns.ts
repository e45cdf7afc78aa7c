/**
 * What the headings of an import mean: a field of the list below, or a setting of the line with a unit, as in
 * silane_sccm, dense.time_s, pressure_mTorr, belt_speed_m_per_min. Capitals do not count. What is not understood is a
 * problem with its column, never left out silently.
 */
import { nearestWord, unitsOf } from "../../../engine/index.ts";
import type { Line, Setting } from "../../line/line.ts";
import { readName } from "./cells.ts";
import type { ImportMap } from "./map-file.ts";
import type { Problems } from "./problems.ts";
import type { Table } from "./table.ts";

export const FIELDS = [
  "chamber",
  "at",
  "event",
  "recipe",
  "step",
  "index",
  "thickness_nm",
  "weighted_reflectance_percent",
  "reflectance_minimum_nm",
  "on",
  "gauge",
  "by",
  "boat",
  "position",
  "count",
  "since_clean",
  "kind",
  "note",
] as const;
export type Field = (typeof FIELDS)[number];

export interface SettingColumn {
  column: number;
  setting: Setting;
  /** Flat name: "silane" or "dense.silane". */
  name: string;
  unit: string;
}

export interface Columns {
  /** Column number (from 1) of each field that is there. */
  fields: Map<Field, number>;
  settings: SettingColumn[];
  understood: { column: number; heading: string; meaning: string }[];
  ignored: string[];
}

const isField = (word: string): word is Field => (FIELDS as readonly string[]).includes(word);

/** Spellings of a unit that can stand in a heading, lower case: "mm/s" also as mm_per_s and mm_s. */
function unitWords(unit: string): string[] {
  const word = unit.toLowerCase();
  return [word, word.replace("/", "_per_"), word.replace("/", "_")];
}

/** "silane_sccm" of a line: the setting and its unit; or the setting alone when the unit is missing or wrong. */
function readSetting(word: string, line: Line): { setting: Setting; unit: string | null; given: string } | null {
  const settings = [...line.settings.values()].sort((a, b) => b.name.length - a.name.length);
  let nearly: { setting: Setting; unit: null; given: string } | null = null;
  for (const setting of settings) {
    const name = setting.name.toLowerCase();
    if (word === name && setting.dimension === "number") return { setting, unit: "", given: "" };
    if (word !== name && !word.startsWith(`${name}_`)) continue;
    const given = word.slice(name.length + 1);
    const unit = unitsOf(setting.dimension).find((one) => unitWords(one).includes(given));
    if (unit !== undefined) return { setting, unit, given };
    nearly ??= { setting, unit: null, given };
  }
  return nearly;
}

const wanted = (setting: Setting): string =>
  setting.unit === "" ? setting.name : `${setting.name}_${setting.unit.replace("/", "_per_")}`;

/** Understands the headings of a table. Problems go to `problems`. */
export function readColumns(table: Table, line: Line, map: ImportMap, problems: Problems): Columns {
  const columns: Columns = { fields: new Map(), settings: [], understood: [], ignored: [] };
  const row = table.headingRow;
  const taken = new Map<string, number>();
  const words = [...FIELDS, ...[...line.settings.values()].map(wanted)];
  const mapped = new Set<string>();
  for (const [i, heading] of table.headings.entries()) {
    const column = i + 1;
    const lower = heading.toLowerCase();
    if (map.columns.has(lower)) mapped.add(lower);
    if (map.ignore.has(lower)) {
      mapped.add(lower);
      columns.ignored.push(heading);
      continue;
    }
    const word = (map.columns.get(lower) ?? heading).toLowerCase();
    if (word === "") {
      if (table.rows.some(({ cells }) => (cells[i] ?? "").trim() !== "")) {
        problems.add("no-heading", `column ${column} has values and no heading`, { row, column });
      }
      continue;
    }
    const before = taken.get(word);
    if (before !== undefined) {
      problems.add("column-twice", `"${heading}" means the same as column ${before}`, { row, column });
      continue;
    }
    taken.set(word, column);
    if (isField(word)) {
      columns.fields.set(word, column);
      columns.understood.push({ column, heading, meaning: word });
      continue;
    }
    const dot = word.indexOf(".");
    const read = readSetting(word.slice(dot + 1), line);
    if (read?.unit != null) {
      const layer = dot < 0 ? null : (map.columns.get(lower) ?? heading).slice(0, dot);
      if (layer !== null && !problems.tried({ row, column }, () => readName(layer))) continue;
      const step = layer === null ? "" : `${layer}.`;
      const name = step + read.setting.name;
      const other = columns.settings.find((one) => one.name === name);
      if (other) {
        problems.add("column-twice", `"${heading}" gives ${name} again, as column ${other.column} does`, {
          row,
          column,
        });
        continue;
      }
      columns.settings.push({ column, setting: read.setting, name, unit: read.unit });
      columns.understood.push({ column, heading, meaning: read.unit ? `${name}, ${read.unit}` : name });
      continue;
    }
    const shown = map.columns.has(lower) ? `${heading}", mapped to "${map.columns.get(lower)}` : heading;
    tellUnknown(shown, word, column, row, read, words, problems);
  }
  for (const heading of [...map.columns.keys(), ...map.ignore]) {
    if (!mapped.has(heading)) {
      problems.add("no-such-heading", `the map file names a column "${heading}" that the file does not have`, { row });
    }
  }
  for (const field of ["chamber", "at"] as const) {
    if (!columns.fields.has(field)) {
      const hint = `a column ${field} is needed, or one mapped to it with --map`;
      problems.add("missing-column", `there is no column "${field}"`, { row, hint });
    }
  }
  return columns;
}

function tellUnknown(
  heading: string,
  lower: string,
  column: number,
  row: number,
  read: ReturnType<typeof readSetting>,
  words: readonly string[],
  problems: Problems,
): void {
  const place = { row, column };
  if (read) {
    const { setting, given } = read;
    const hint = `as in ${wanted(setting)}; units are ${unitsOf(setting.dimension).join(", ")}`;
    if (given === "") problems.add("missing-unit", `column "${heading}" has no unit`, { ...place, hint });
    else
      problems.add("wrong-unit", `column "${heading}": "${given}" is not a unit of ${setting.name}`, {
        ...place,
        hint,
      });
    return;
  }
  const bare = words.find((word) => word === `${lower}_nm` || word === `${lower}_percent`);
  if (bare) {
    problems.add("missing-unit", `column "${heading}" has no unit`, { ...place, hint: `write ${bare}` });
    return;
  }
  const near = nearestWord(lower, words);
  const hint = `${near ? `did you mean ${near}? ` : ""}Otherwise map it or ignore it with --map`;
  problems.add("unknown-column", `column "${heading}" is not understood`, { ...place, hint });
}
