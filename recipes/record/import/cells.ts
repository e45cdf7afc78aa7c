/** What one cell of an import says: a number with the declared decimal sign, a word out of a few, a whole number. */
import { type Dimension, refuse } from "../../../engine/index.ts";
import { nameProblem } from "../../line/names.ts";
import { safeText } from "../safe-text.ts";

const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;

const shown = (text: string): string => `"${text.length > 40 ? `${text.slice(0, 37)}...` : text}"`;

/** Nothing was measured or given: an empty cell, or a dash. */
export function isBlank(cell: string): boolean {
  return cell === "" || cell === "-";
}

/** A finite number. Throws `decimal-comma`, `decimal-point`, `not-a-number`, each with what would do. */
export function readNumber(cell: string, decimal: "." | ","): number {
  const other = decimal === "." ? "," : ".";
  if (/^[+-]?[\d.,]*\d[\d.,]*$/.test(cell) && cell.includes(other)) {
    if (decimal === ".") {
      return refuse("decimal-comma", `${shown(cell)} has a comma`, {
        hint: `write ${cell.replace(",", ".")}, or say \`decimal: comma\` in the map file; thousands are written without a sign`,
      });
    }
    return refuse("decimal-point", `${shown(cell)} has a point, and the map file says the decimal sign is a comma`, {
      hint: "write a comma, or take `decimal: comma` out of the map file",
    });
  }
  const text = decimal === "," ? cell.replace(",", ".") : cell;
  const value = NUMBER.test(text) ? Number(text) : Number.NaN;
  if (Number.isFinite(value)) return value;
  const unit = /^[+-]?[\d.,]+\s*[A-Za-z%\u00b0]/.test(cell) && !/^[\d.]+e/i.test(cell);
  return refuse("not-a-number", `${shown(cell)} is not a number`, {
    hint: unit ? "the unit belongs in the heading" : "leave the cell empty when nothing was measured",
  });
}

/** A whole number of at least `least`. Throws `not-a-count` and what `readNumber` throws. */
export function readCount(cell: string, decimal: "." | ",", least: number): number {
  const value = readNumber(cell, decimal);
  if (Number.isInteger(value) && value >= least && value <= 1_000_000) return value;
  return refuse("not-a-count", `${shown(cell)} is not a whole number from ${least} to 1000000`);
}

/** One of the words, capitals aside. Throws `unknown-word`. */
export function readWord<W extends string>(cell: string, words: readonly W[], what: string): W {
  const found = words.find((word) => word === cell.toLowerCase());
  return found ?? refuse("unknown-word", `${shown(cell)} is not ${what}`, { hint: `one of ${words.join(", ")}` });
}

/** Free text, not longer than the record takes. Throws `too-long`. */
export function readText(cell: string, most = 4000): string {
  if (cell.length > most)
    refuse("too-long", `a text of ${cell.length} characters is too long`, { hint: `at most ${most}` });
  return cell;
}

/** Words that mean something of their own where names become keys. */
const POISONED = ["__proto__", "constructor", "prototype"];

/** The name of a recipe or a step, which becomes part of a path and a key. Throws `bad-name`. */
export function readName(cell: string): string {
  const complaint = nameProblem(cell.length > 80 ? `${cell.slice(0, 77)}...` : cell);
  if (complaint) refuse("bad-name", complaint.message, { hint: complaint.hint });
  if (POISONED.includes(cell)) refuse("bad-name", `"${cell}" cannot be a name here`, { hint: "choose another" });
  return cell;
}

/** Who did it: as for --by. Throws `bad-name`. */
export function readPerson(cell: string): string {
  if (cell.length <= 100 && safeText(cell) === cell) return cell;
  return refuse("bad-name", `${shown(safeText(cell))} is not a name`, { hint: "1 to 100 printable characters" });
}

/**
 * What a setting can be at all, canonical units: beyond it the column or the unit is wrong. Wide on purpose: the declared
 * range is another matter, since history may lie outside it.
 */
const PHYSICAL: Record<Dimension, { low: number; high: number; open: boolean }> = {
  flow: { low: 0, high: 200_000, open: false },
  time: { low: 0, high: 1_000_000, open: true },
  power: { low: 0, high: 1_000_000, open: false },
  pressure: { low: 0, high: 110_000, open: true },
  temperature: { low: -50, high: 1500, open: false },
  speed: { low: 0, high: 100_000, open: true },
  length: { low: 0, high: 1e9, open: false },
  percent: { low: 0, high: 100, open: false },
  angle: { low: 0, high: 360, open: false },
  number: { low: -1e12, high: 1e12, open: false },
};

/** Throws `impossible-value` when a setting of this dimension cannot have this canonical value. */
export function refuseImpossible(canonical: number, dimension: Dimension, written: string): void {
  const { low, high, open } = PHYSICAL[dimension];
  if (canonical > high || canonical < low || (open && canonical === low)) {
    refuse("impossible-value", `${written} is impossible for a ${dimension}`, {
      hint: "is it the right column and unit?",
    });
  }
}

/** What a film can be: index at 632.8 nm, thickness, and what light can show of it. */
const FILM = {
  index: { low: 1.3, high: 4, unit: "" },
  thickness_nm: { low: 0, high: 2000, unit: " nm" },
  weighted_reflectance_percent: { low: 0, high: 100, unit: " %" },
  reflectance_minimum_nm: { low: 200, high: 2000, unit: " nm" },
} as const;

export type Measured = keyof typeof FILM;
export const MEASURED = Object.keys(FILM) as Measured[];

/** A measured value. Throws `impossible-value` and what `readNumber` throws. */
export function readMeasured(cell: string, what: Measured, decimal: "." | ","): number {
  return possibleReading(readNumber(cell, decimal), what, cell);
}

/** The value, if a film can read so. Throws `impossible-value`, quoting what was written. */
export function possibleReading(value: number, what: Measured, written: string): number {
  const { low, high, unit } = FILM[what];
  if (value >= low && value <= high) return value;
  return refuse(
    "impossible-value",
    `${what} ${shown(written)} is impossible: it must lie in ${low} to ${high}${unit}`,
    {
      hint: what === "index" && value > high ? "is it the thickness?" : "is it the right column and unit?",
    },
  );
}
