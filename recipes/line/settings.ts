/**
 * Values of settings at the door: from what a person or a book wrote to canonical numbers and back, onto the grid that
 * can be typed in, and against a chamber's ranges.
 */
import {
  dimensionOf,
  formatQuantity,
  fromCanonical,
  fromCanonicalStep,
  nearestWord,
  type Problem,
  parseQuantity,
  Refusal,
  refuse,
  roundToStep,
  toCanonical,
  unitSpelling,
} from "../../engine/index.ts";
import type { Chamber, Setting } from "./line.ts";

/** A value with the unit it is written in, as entries of the book hold it. */
export interface UnitValue {
  value: number;
  unit: string;
}

/** Settings as given: words "silane=812sccm", or values by name as text or {value, unit}. */
export type GivenSettings = readonly string[] | Readonly<Record<string, string | number | UnitValue>>;

export interface SetOptions {
  /** Take values outside the chamber's range: for recording what was run, never for proposing. */
  allowOutside?: boolean;
}

/**
 * Canonical values by setting name, in the order given. Throws a Refusal with all problems: `unknown-setting`,
 * `set-twice`, `outside-range`, `not-a-set`, and those of `parseQuantity`.
 */
export function parseSet(
  given: GivenSettings,
  chamber: Pick<Chamber, "name" | "settings">,
  { allowOutside = false }: SetOptions = {},
): Map<string, number> {
  const values = new Map<string, number>();
  const problems: Problem[] = [];
  const words = Array.isArray(given) ? (given as readonly string[]) : null;
  const pairs = words ? words.map(splitWord) : Object.entries(given);
  for (const pair of pairs) {
    try {
      if (pair instanceof Refusal) throw pair;
      const [name, written] = pair;
      const setting = settingOf(chamber, name);
      if (values.has(name)) refuse("set-twice", `${name} is set twice`);
      const value = readValue(setting, written);
      if (allowOutside) refuseImpossible(setting, value, chamber.name);
      else refuseOutside(setting, value, chamber.name);
      values.set(name, value);
    } catch (error) {
      if (!(error instanceof Refusal)) throw error;
      problems.push(...error.problems);
    }
  }
  if (problems.length > 0) throw new Refusal(problems);
  return values;
}

/**
 * As `parseSet`, for recipes of several steps: `dense.silane=900sccm` belongs to the step `dense`. Values by step name, ""
 * for settings given without one.
 */
export function parseStepSet(
  given: GivenSettings,
  chamber: Pick<Chamber, "name" | "settings">,
  options: SetOptions = {},
): Map<string, Map<string, number>> {
  const byStep = new Map<string, string[] | Record<string, string | number | UnitValue>>();
  const split = (word: string): [step: string, rest: string] => {
    // a point after the equals sign is a decimal point
    const dot = /^\s*([A-Za-z0-9][\w-]*)\.(?=[A-Za-z][^=]*)/.exec(word.split("=", 1)[0]);
    return dot ? [dot[1], word.slice(dot[0].length)] : ["", word];
  };
  if (Array.isArray(given)) {
    for (const word of given as readonly string[]) {
      const [step, rest] = split(word);
      byStep.set(step, [...((byStep.get(step) as string[] | undefined) ?? []), rest]);
    }
  } else {
    for (const [name, value] of Object.entries(given)) {
      const [step, rest] = split(name);
      byStep.set(step, { ...((byStep.get(step) as Record<string, UnitValue> | undefined) ?? {}), [rest]: value });
    }
  }
  const values = new Map<string, Map<string, number>>();
  const problems: Problem[] = [];
  for (const [step, part] of byStep) {
    try {
      values.set(step, parseSet(part, chamber, options));
    } catch (error) {
      if (!(error instanceof Refusal)) throw error;
      problems.push(...error.problems);
    }
  }
  if (problems.length > 0) throw new Refusal(problems);
  return values;
}

function splitWord(word: string): [string, string] | Refusal {
  const at = word.indexOf("=");
  if (at > 0) return [word.slice(0, at).trim(), word.slice(at + 1)];
  return new Refusal([
    {
      code: "not-a-set",
      message: `"${word}" does not set anything`,
      hint: "write setting=value, as in silane=812sccm",
    },
  ]);
}

/** The chamber's setting of this name. Throws `unknown-setting` with the nearest name. */
export function settingOf(chamber: Pick<Chamber, "name" | "settings">, name: string): Setting {
  const setting = chamber.settings.get(name);
  if (setting) return setting;
  const near = nearestWord(name, chamber.settings.keys());
  const hint = near ? `did you mean ${near}?` : `settings are ${[...chamber.settings.keys()].join(", ")}`;
  return refuse("unknown-setting", `"${name}" is not a setting of ${chamber.name}`, { hint });
}

function readValue(setting: Setting, written: string | number | UnitValue): number {
  try {
    if (typeof written === "object") return fromQuantity(setting, written);
    return parseQuantity(String(written), setting.dimension).value;
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    throw new Refusal(
      error.problems.map((problem) => ({ ...problem, message: `${setting.name}: ${problem.message}` })),
    );
  }
}

function refuseOutside(setting: Setting, value: number, chamber: string): void {
  if (value >= setting.low && value <= setting.high) return;
  const { name, low, high } = setting;
  const range = `${shown(setting, low)} to ${shown(setting, high)}`;
  refuse("outside-range", `${name} ${shown(setting, value)} lies outside ${range}, the range of ${chamber}`);
}

/** How far beyond its declared range a value can still be something a tool ran, as a factor. */
const farthest = 3;

/**
 * Refuses what no tool can have run: below zero or zero where the range starts above it, over the controller's full scale,
 * or over three times beyond the range: a dropped digit or a slip of units. Outside the range but nearer than that is
 * taken, because what happened must be recorded. Throws `impossible-setting`.
 */
export function refuseImpossible(setting: Setting, value: number, chamber: string): void {
  const { name, low, high, fullScale } = setting;
  // A temperature's zero means nothing, so a factor does neither: there the range's own width is the measure.
  const span = high - low;
  const [least, most] =
    setting.dimension === "temperature"
      ? [low - farthest * span, high + farthest * span]
      : [low > 0 ? low / farthest : 0, Math.min(high * farthest, fullScale ?? Number.POSITIVE_INFINITY)];
  if (value >= least && value <= Math.max(most, high)) return;
  const range = `${shown(setting, low)} to ${shown(setting, high)}`;
  refuse(
    "impossible-setting",
    `${name} ${shown(setting, value)} cannot have run on ${chamber}, whose range is ${range}`,
    {
      hint: "a digit dropped, or a slip of units?",
    },
  );
}

/** A value of a setting as text in its declared unit: "8.01 kW". More digits than the step has are kept, up to 6. */
export function shown(setting: Pick<Setting, "unit" | "smallest">, canonical: number): string {
  const onGrid = Math.abs(snap(canonical, setting) - canonical) <= 1e-9 * Math.max(1, Math.abs(canonical));
  return formatQuantity(canonical, setting.unit, onGrid ? setting.smallest : undefined);
}

/**
 * The nearest value that can be typed in: a multiple of the smallest step, measured from zero of the declared unit (not
 * from the low end of the range), free of floating-point dust. Canonical in, canonical out. May leave the range by less
 * than a step; `typeable` gives the multiples inside.
 */
export function snap(canonical: number, { unit, smallest }: Pick<Setting, "unit" | "smallest">): number {
  return toCanonical(roundToStep(fromCanonical(canonical, unit), fromCanonicalStep(smallest, unit)), unit);
}

/** First and last value inside the range that can be typed in, canonical. Null when no step lies inside. */
export function typeable(
  setting: Pick<Setting, "unit" | "smallest" | "low" | "high">,
): { first: number; last: number } | null {
  const { unit, smallest, low, high } = setting;
  const step = fromCanonicalStep(smallest, unit);
  // a share of a step forgives the dust of the division, and no more
  const from = Math.ceil(fromCanonical(low, unit) / step - 1e-9) * step;
  const to = Math.floor(fromCanonical(high, unit) / step + 1e-9) * step;
  if (from > to + 1e-9 * step) return null;
  return { first: toCanonical(roundToStep(from, step), unit), last: toCanonical(roundToStep(to, step), unit) };
}

/** The nearest value inside the range that can be typed in. Throws `no-step-in-range` when there is none. */
export function snapInside(
  canonical: number,
  setting: Pick<Setting, "name" | "unit" | "smallest" | "low" | "high">,
): number {
  const inside = typeable(setting);
  if (!inside) refuse("no-step-in-range", `no value of ${setting.name} that can be typed in lies inside its range`);
  return Math.min(inside.last, Math.max(inside.first, snap(canonical, setting)));
}

/**
 * A canonical value in the declared unit, without dust but with every digit that was meant (12 significant): what was
 * read back at the tool is kept even when it is not on the grid.
 */
export function asQuantity({ unit }: Pick<Setting, "unit">, canonical: number): UnitValue {
  return { value: Number(fromCanonical(canonical, unit).toPrecision(12)) + 0, unit };
}

/** Canonical value of a quantity in any unit of the setting's dimension. Throws `unknown-unit`, `wrong-unit`. */
export function fromQuantity(
  setting: Pick<Setting, "name" | "unit" | "dimension">,
  { value, unit }: UnitValue,
): number {
  const spelling = unitSpelling(unit) ?? unit;
  if (dimensionOf(spelling) !== setting.dimension) {
    const hint = `${setting.name} is declared in ${setting.unit || "plain numbers"}`;
    refuse("wrong-unit", `${setting.name} cannot be ${value} ${unit}`.trim(), { hint });
  }
  return toCanonical(value, spelling);
}

/** All values of a recipe as quantities in declared units, in the chamber's order. */
export function asQuantities(
  settings: ReadonlyMap<string, number>,
  chamber: Pick<Chamber, "name" | "settings">,
): Record<string, UnitValue> {
  const quantities: Record<string, UnitValue> = {};
  for (const [name, setting] of chamber.settings) {
    const value = settings.get(name);
    if (value !== undefined) quantities[name] = asQuantity(setting, value);
  }
  return quantities;
}
