/**
 * Quantities as people type them: "812 sccm", "300..1200 sccm", "88 nm within 2 nm", "0.85 sd 0.05", "at most 2.5 %".
 * The same grammar serves line files, command lines and stack files. What people write first and wrongly (decimal comma,
 * thousands comma, missing unit, plus-minus sign) has a code and a hint of its own; nothing is guessed.
 */
import { type Problem, Refusal, refuse } from "./errors.ts";
import { nearestWord } from "./nearest-word.ts";
import { type Dimension, dimensionOf, toCanonical, toCanonicalStep, unitSpelling, unitsOf } from "./units.ts";

/** A quantity read from text: canonical value, and the unit it was written in (its shown spelling, "" for none). */
export interface ReadQuantity {
  value: number;
  unit: string;
}

export interface QuantityOptions {
  /** Unit to take when none is written. Without it a missing unit is refused. */
  defaultUnit?: string;
  /** The text is a step or a difference: one kelvin is one degree, and no offset is added. */
  difference?: boolean;
}

const NUMBER = /^([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(.*)$/s;
const PLUS_MINUS = /\u00b1|\+\/-|\+-/;
const NOT_NUMBERS = /^[+-]?\.?(nan|inf|infinity)\b/i;

const quoted = (text: string) => `"${text.length > 60 ? `${text.slice(0, 57)}...` : text}"`;

/**
 * The problem with commas in a text, or null: `thousands-comma` for 3,000 or 12,500.5, `decimal-comma` for 0,003 or 84,1.
 * 3,000 could be either and is refused as thousands.
 */
export function commaProblem(text: string): Problem | null {
  const number = /\d+(?:,\d+)+(?:\.\d+)?/.exec(text)?.[0];
  if (number === undefined) return null;
  if (/^[1-9]\d{0,2}(,\d{3})+(\.\d+)?$/.test(number)) {
    const whole = text.replace(/(\d),(?=\d{3})/g, "$1");
    const code = "thousands-comma";
    if (/,.*[,.]/s.test(text)) {
      const hint = `write ${whole}, or with a decimal point if a fraction was meant`;
      return { code, message: `${quoted(text)} has a comma between thousands`, hint };
    }
    const hint = `write ${text.replace(",", ".")} with a decimal point, or ${whole}`;
    return { code, message: `${quoted(text)} has a comma, which can be read in two ways`, hint };
  }
  const hint = `write ${text.replace(/(\d),(?=\d)/g, "$1.")}, with a decimal point`;
  return { code: "decimal-comma", message: `${quoted(text)} has a decimal comma`, hint };
}

const EXAMPLES: Record<Dimension, string> = {
  flow: "812 sccm",
  time: "560 s",
  power: "8 kW",
  pressure: "213 Pa",
  temperature: "450 degC",
  speed: "20 mm/s",
  length: "84.1 nm",
  percent: "2.5 %",
  angle: "52 deg",
  number: "2.06",
};

/** What a value of this dimension looks like, for hints: "a flow, as in 812 sccm". */
function expected(dimension: Dimension): string {
  if (dimension === "number") return "a plain number without a unit, as in 2.06";
  const named = dimension === "percent" ? "a percentage" : dimension === "angle" ? "an angle" : `a ${dimension}`;
  return `${named} in ${unitsOf(dimension).join(", ")}, as in ${EXAMPLES[dimension]}`;
}

/** Checks the unit written (or not) against the dimension wanted (null: any) and returns its spelling. */
function readUnit(written: string, text: string, dimension: Dimension | null, defaultUnit: string | undefined): string {
  if (written === "") {
    if (defaultUnit !== undefined) return defaultUnit;
    if (dimension === "number" || dimension === null) return "";
    refuse("missing-unit", `${quoted(text)} has no unit`, { hint: `${expected(dimension)}` });
  }
  const unit = unitSpelling(written);
  if (unit === null) {
    if (/^\d/.test(written)) {
      const joined = text.replace(/(\d)\s+(?=\d)/g, "$1");
      refuse("not-a-number", `${quoted(text)} is not one number`, { hint: `write ${joined} if one number was meant` });
    }
    const wanted = dimension === null || dimension === "number" ? null : unitsOf(dimension);
    const near = nearestWord(written, wanted ?? []);
    const hint = near ? `did you mean ${near}?` : dimension === null ? undefined : expected(dimension);
    refuse("unknown-unit", `${quoted(written)} is not a unit known here`, { hint });
  }
  if (dimension !== null && dimensionOf(unit) !== dimension) {
    const needed = dimension === "number" ? "a plain number" : `one of ${unitsOf(dimension).join(", ")}`;
    refuse("wrong-unit", `${quoted(text)} is in ${unit}, where ${needed} is needed`, { hint: expected(dimension) });
  }
  return unit;
}

/**
 * Reads one quantity, "812sccm" or "812 sccm". `dimension` null takes any unit or none.
 * Throws `decimal-comma`, `thousands-comma`, `missing-unit`, `unknown-unit`, `wrong-unit`, `plus-minus`, `not-a-number`.
 */
export function parseQuantity(text: string, dimension: Dimension | null, options: QuantityOptions = {}): ReadQuantity {
  const trimmed = text.trim();
  const comma = commaProblem(trimmed);
  if (comma) throw new Refusal([comma]);
  if (PLUS_MINUS.test(trimmed)) {
    refuse("plus-minus", `${quoted(trimmed)}: a plus-minus sign is not read here`, { hint: "write the number alone" });
  }
  const sign = /^(>=|<=|=>|=<|>|<|\u2265|\u2264)\s*(.*)$/s.exec(trimmed);
  if (sign) {
    const words = />|\u2265/.test(sign[1]) ? "at least" : "at most";
    refuse("comparison-sign", `${quoted(trimmed)} has a comparison sign`, { hint: `write ${words} ${sign[2]}` });
  }
  const match = NUMBER.exec(trimmed);
  const hint = dimension === null ? "a number with its unit, as in 812 sccm" : expected(dimension);
  if (!match) {
    const what = trimmed === "" ? "nothing is written" : `${quoted(trimmed)} is not a number`;
    refuse("not-a-number", NOT_NUMBERS.test(trimmed) ? `${quoted(trimmed)} is not a finite number` : what, { hint });
  }
  const number = Number(match[1]);
  if (!Number.isFinite(number)) refuse("not-a-number", `${quoted(trimmed)} is too large for a number`, { hint });
  const unit = readUnit(match[2].trim(), trimmed, dimension, options.defaultUnit);
  return { value: options.difference ? toCanonicalStep(number, unit) : toCanonical(number, unit), unit };
}

/** A closed interval in canonical units; open ends are infinite. `unit` as written. */
export interface ReadLimit {
  low: number;
  high: number;
  unit: string;
}

const RANGE_HINT = "write two numbers with two dots between, as in 300..1200 sccm";

/**
 * Reads "300..1200 sccm" (the unit after the second number, or after both). Throws as `parseQuantity`, and `not-a-range`,
 * `range-reversed` (also when both ends are equal).
 */
export function parseRange(text: string, dimension: Dimension | null, options: QuantityOptions = {}): ReadLimit {
  const trimmed = text.trim();
  const comma = commaProblem(trimmed);
  if (comma) throw new Refusal([comma]);
  const parts = trimmed.split(/\.\.+|\u2026/);
  if (parts.length !== 2 || parts.some((part) => part.trim() === "")) {
    const dash = /^(\d[\d.]*)\s*(?:-|\u2013|to)\s*(\d.*)$/.exec(trimmed);
    const hint = dash ? `write ${dash[1]}..${dash[2]}` : RANGE_HINT;
    refuse("not-a-range", `${quoted(trimmed)} is not a range`, { hint });
  }
  const high = parseQuantity(parts[1], dimension, options);
  const low = parseQuantity(parts[0], dimension ?? dimensionOf(high.unit), { ...options, defaultUnit: high.unit });
  if (low.value >= high.value) {
    const swapped = `${NUMBER.exec(parts[1].trim())?.[1]}..${parts[0].trim()}`;
    const withUnit = /[^\d.+-]/.test(parts[0]) || high.unit === "" ? swapped : `${swapped} ${high.unit}`;
    const hint = low.value > high.value ? `write ${withUnit}` : RANGE_HINT;
    refuse("range-reversed", `${quoted(trimmed)} does not rise from its first to its second number`, { hint });
  }
  return { low: low.value, high: high.value, unit: high.unit };
}

/**
 * Reads a centre and a tolerance: "2.06 within 0.02", "88 nm within 2 nm", "88 within 2 nm"; a plus-minus sign is read as
 * `within`. Throws as `parseQuantity`, and `not-a-tolerance`, `zero-tolerance`.
 */
export function parseTolerance(
  text: string,
  dimension: Dimension,
  options: QuantityOptions = {},
): { value: number; within: number; unit: string } {
  const example = dimension === "length" ? "88 nm within 2 nm" : "2.06 within 0.02";
  const parts = pair(text, /\bwithin\b|\u00b1|\+\/-|\+-/);
  if (parts === null) {
    refuse("not-a-tolerance", `${quoted(text.trim())} has no tolerance`, { hint: `write it as in ${example}` });
  }
  const [value, within] = readPair(parts, dimension, options);
  if (!(within.value > 0)) {
    refuse("zero-tolerance", `${quoted(text.trim())}: a tolerance must be above zero`, { hint: `as in ${example}` });
  }
  return { value: value.value, within: within.value, unit: value.unit };
}

/**
 * Reads a mean and a standard deviation: "0.85 sd 0.05". Throws as `parseQuantity`, and `plus-minus` (the sign does not
 * say which deviation is meant), `not-a-mean-and-sd`, `zero-sd`.
 */
export function parseMeanSd(
  text: string,
  dimension: Dimension,
  options: QuantityOptions = {},
): { mean: number; sd: number; unit: string } {
  const comma = commaProblem(text);
  if (comma) throw new Refusal([comma]);
  if (PLUS_MINUS.test(text)) {
    const hint = `write ${text
      .trim()
      .replace(PLUS_MINUS, "sd")
      .replace(/\s*\bsd\b\s*/, " sd ")}, a standard deviation`;
    refuse("plus-minus", `${quoted(text.trim())}: a plus-minus sign does not say which deviation is meant`, { hint });
  }
  const parts = pair(text, /\bsd\b/);
  if (parts === null) {
    // the mean alone may be wrong in a more telling way (a unit, say), which is then what is reported
    parseQuantity(text.replace(/\bwithin\b.*$/s, ""), dimension, options);
    refuse("not-a-mean-and-sd", `${quoted(text.trim())} has no standard deviation`, {
      hint: "write it as in 0.85 sd 0.05",
    });
  }
  const [mean, sd] = readPair(parts, dimension, options);
  if (!(sd.value > 0)) {
    refuse("zero-sd", `${quoted(text.trim())}: a standard deviation must be above zero`, {
      hint: "as in 0.85 sd 0.05",
    });
  }
  return { mean: mean.value, sd: sd.value, unit: mean.unit };
}

/** Splits at the one word between two quantities; null when it is not there exactly once. */
function pair(text: string, word: RegExp): [string, string] | null {
  const parts = text.split(word);
  return parts.length === 2 ? [parts[0], parts[1]] : null;
}

/** Reads both halves of a pair, the unit of one standing for the other where that has none. */
function readPair(
  [first, second]: [string, string],
  dimension: Dimension,
  options: QuantityOptions,
): [ReadQuantity, ReadQuantity] {
  const unitOf = (half: string) => unitSpelling(NUMBER.exec(half.trim())?.[2].trim() || "none");
  const known = unitOf(first) ?? unitOf(second) ?? options.defaultUnit;
  const value = parseQuantity(first, dimension, { ...options, defaultUnit: known });
  const spread = parseQuantity(second, dimension, { defaultUnit: known ?? value.unit, difference: true });
  return [value, spread];
}

/**
 * Reads "at most 2.5 %", "at least 4 kW" or "5..14". Throws as `parseQuantity` and `parseRange`, and `not-a-limit`.
 */
export function parseLimit(text: string, dimension: Dimension | null, options: QuantityOptions = {}): ReadLimit {
  const trimmed = text.trim();
  const words = /^at\s+(most|least)\b\s*(.*)$/s.exec(trimmed);
  if (words) {
    const { value, unit } = parseQuantity(words[2], dimension, options);
    return words[1] === "most"
      ? { low: Number.NEGATIVE_INFINITY, high: value, unit }
      : { low: value, high: Number.POSITIVE_INFINITY, unit };
  }
  if (/\.\.|\u2026/.test(trimmed)) return parseRange(trimmed, dimension, options);
  parseQuantity(trimmed, dimension, options);
  return refuse("not-a-limit", `${quoted(trimmed)} does not say which way it limits`, {
    hint: `write at most ${trimmed}, at least ${trimmed}, or a range a..b`,
  });
}
