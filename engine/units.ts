/**
 * Units of the trade: one table, and the way to and from the canonical unit of each dimension. Everything inside the
 * program is canonical (sccm, s, W, Pa, degC, mm/s, nm, percent 0 to 100, deg, plain number); units exist only at the
 * doors. Reading quantities from text is `quantity.ts`.
 *
 * Factors are exact by definition of the units, save the torr, which is 101325/760 Pa (exact as a fraction). A standard
 * cubic centimetre a minute is taken as the tool's own; the reference temperature differs by maker and is not converted.
 */
import { finite, refuse } from "./errors.ts";
import { nearestWord } from "./nearest-word.ts";

export type Dimension =
  | "flow"
  | "time"
  | "power"
  | "pressure"
  | "temperature"
  | "speed"
  | "length"
  | "percent"
  | "angle"
  | "number";

interface UnitRow {
  dimension: Dimension;
  /** canonical = value * factor + offset */
  factor: number;
  offset: number;
  /** Other spellings that mean the same. */
  also: readonly string[];
}

const row = (dimension: Dimension, factor: number, also: readonly string[] = [], offset = 0): UnitRow => ({
  dimension,
  factor,
  offset,
  also,
});

/** Every unit that can be declared, by the spelling that is shown. The first of a dimension is its canonical unit. */
const UNITS: ReadonlyMap<string, UnitRow> = new Map([
  ["sccm", row("flow", 1, ["SCCM"])],
  ["slm", row("flow", 1000, ["SLM"])],
  ["s", row("time", 1)],
  ["ms", row("time", 1e-3)],
  ["min", row("time", 60)],
  ["W", row("power", 1)],
  ["kW", row("power", 1000)],
  ["Pa", row("pressure", 1)],
  ["mbar", row("pressure", 100)],
  ["mTorr", row("pressure", 101325 / 760 / 1000)],
  ["Torr", row("pressure", 101325 / 760)],
  ["degC", row("temperature", 1, ["\u00b0C", "\u2103"])],
  ["K", row("temperature", 1, ["\u212a"], -273.15)],
  ["mm/s", row("speed", 1)],
  ["m/min", row("speed", 1000 / 60)],
  ["cm/min", row("speed", 10 / 60)],
  ["nm", row("length", 1)],
  // micro sign U+00B5 and Greek mu U+03BC look alike and are both typed
  ["um", row("length", 1000, ["\u00b5m", "\u03bcm"])],
  ["mm", row("length", 1e6)],
  // letter A with ring U+00C5, the angstrom sign U+212B, and A with a combining ring
  ["angstrom", row("length", 0.1, ["\u00c5", "\u212b", "A\u030a"])],
  ["%", row("percent", 1)],
  ["deg", row("angle", 1, ["\u00b0"])],
  ["", row("number", 1)],
]);

const SPELLINGS: ReadonlyMap<string, string> = new Map(
  [...UNITS].flatMap(([name, { also }]) => [name, ...also].map((spelling) => [spelling, name] as const)),
);

/** The spelling that is shown for a unit as typed ("µm" gives "um"), or null when it is not a unit we know. */
export function unitSpelling(text: string): string | null {
  return SPELLINGS.get(text) ?? null;
}

/** Units of one dimension as they can be written, canonical first. Empty for plain numbers. */
export function unitsOf(dimension: Dimension): readonly string[] {
  return [...UNITS].filter(([name, unit]) => unit.dimension === dimension && name !== "").map(([name]) => name);
}

/** The canonical unit of a dimension: sccm, s, W, Pa, degC, mm/s, nm, %, deg, or "" for plain numbers. */
export function canonicalUnit(dimension: Dimension): string {
  return unitsOf(dimension)[0] ?? "";
}

/** The dimension of a unit. Throws `unknown-unit`. */
export function dimensionOf(unit: string): Dimension {
  return lookUp(unit).dimension;
}

function lookUp(unit: string): UnitRow {
  const found = UNITS.get(SPELLINGS.get(unit) ?? unit);
  if (found) return found;
  const near = nearestWord(unit, SPELLINGS.keys());
  return refuse("unknown-unit", `"${unit}" is not a unit known here`, {
    hint: near ? `did you mean ${near}?` : `known are ${[...UNITS.keys()].filter((name) => name !== "").join(", ")}`,
  });
}

/**
 * Removes floating-point dust: 13 significant digits, four more than any gauge or controller gives, and three fewer than
 * a double holds, so that a chain of a few multiplications ends on the decimal number a person would write.
 */
export function withoutDust(value: number): number {
  return Number(value.toPrecision(13));
}

/** Value in `unit` to the canonical unit. A temperature is a point on the scale. Throws `unknown-unit`, `not-a-number`. */
export function toCanonical(value: number, unit: string): number {
  const { factor, offset } = lookUp(unit);
  finite(value, `a value in ${unit || "plain numbers"}`);
  const canonical = factor === 1 && offset === 0 ? value : withoutDust(value * factor + offset);
  return finite(canonical, `a value in ${unit}`);
}

/** Canonical value to `unit`. Throws `unknown-unit`, `not-a-number`. */
export function fromCanonical(canonical: number, unit: string): number {
  const { factor, offset } = lookUp(unit);
  finite(canonical, `a value to be shown in ${unit || "plain numbers"}`);
  return factor === 1 && offset === 0 ? canonical : withoutDust((canonical - offset) / factor);
}

/** A step or difference in `unit` to the canonical unit: as `toCanonical` but one kelvin is one degree. */
export function toCanonicalStep(step: number, unit: string): number {
  const { factor } = lookUp(unit);
  finite(step, `a step in ${unit || "plain numbers"}`);
  return factor === 1 ? step : withoutDust(step * factor);
}

/** A canonical step or difference in `unit`; the inverse of `toCanonicalStep`. */
export function fromCanonicalStep(step: number, unit: string): number {
  const { factor } = lookUp(unit);
  finite(step, `a step to be shown in ${unit || "plain numbers"}`);
  return factor === 1 ? step : withoutDust(step / factor);
}

/** Decimal places needed to write multiples of `step` (0.01 needs 2, 0.25 needs 2, 10 needs 0); at most 12. */
export function decimalsOf(step: number): number {
  for (let decimals = 0; decimals < 12; decimals++) {
    if (Math.abs(Number(step.toFixed(decimals)) - step) <= 1e-9 * Math.abs(step)) return decimals;
  }
  return 12;
}

/** Nearest multiple of `step` (measured from 0, both in the same unit), free of dust. `step` > 0. */
export function roundToStep(value: number, step: number): number {
  if (!(step > 0)) refuse("zero-step", `a step of ${step} cannot be rounded to`);
  return Number((Math.round(withoutDust(value / step)) * step).toFixed(Math.min(12, decimalsOf(step) + 1))) + 0;
}

/**
 * A canonical value as a number in `unit` fit to be shown: rounded to the smallest step that can be typed in
 * (`smallestCanonical`, measured from 0 of the unit shown), or to 6 significant digits when no step is given.
 */
export function shownValue(canonical: number, unit: string, smallestCanonical?: number): number {
  const value = fromCanonical(canonical, unit);
  if (smallestCanonical === undefined) return Number(value.toPrecision(6)) + 0;
  return roundToStep(value, fromCanonicalStep(smallestCanonical, unit));
}

/**
 * A canonical value as text in `unit`: "8.01 kW", "812 sccm", "2.06". Rounded as by `shownValue`; written with as many
 * decimals as the step needs and no exponent up to 21 digits.
 */
export function formatQuantity(canonical: number, unit: string, smallestCanonical?: number): string {
  const value = shownValue(canonical, unit, smallestCanonical);
  const digits =
    smallestCanonical === undefined
      ? String(value)
      : value.toFixed(decimalsOf(fromCanonicalStep(smallestCanonical, unit)));
  return unit === "" ? digits : `${digits} ${SPELLINGS.get(unit) ?? unit}`;
}
