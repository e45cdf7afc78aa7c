/**
 * Shapes of the parts of line.yaml that stand on their own: wafer, goal, light, gauges, people. What refers to other
 * parts (settings, window, anchor, chambers) is read by `read-settings.ts` and `read-window.ts`.
 *
 * Bounds on index, facet angle and wavelength are those of the optics below, so that a line that reads can be computed.
 * The others catch slips (a facet factor of 75, a film of 88 um), not processes; wide, common practice, no source.
 */
import * as z from "zod/mini";
import {
  type Dimension,
  facetAngleRange,
  nitrideIndexRange,
  parseLimit,
  parseMeanSd,
  parseQuantity,
  parseTolerance,
  Refusal,
  refuse,
} from "../../engine/index.ts";
import { read } from "./shape.ts";

/** Wavelengths at which sunlight (280 to 1300 nm) and the nitride family (250 to 1240 nm) are both known. */
export const LIGHT_NM: readonly [number, number] = [280, 1240];

/** Throws `out-of-bounds` unless the value lies within; the bounds are in the message. */
export function within(value: number, low: number, high: number, unit: string, hint?: string): number {
  if (value >= low && value <= high) return value;
  const shown = (number: number) => `${number}${unit === "" ? "" : ` ${unit}`}`;
  return refuse("out-of-bounds", `${shown(value)} lies outside ${low} to ${shown(high)}`, { hint });
}

const tolerance = (dimension: Dimension, low: number, high: number, unit: string) =>
  read((text) => {
    const { value, within: halfWidth } = parseTolerance(text, dimension);
    within(value, low, high, unit);
    within(halfWidth, 0, value, unit, "a tolerance cannot be wider than the goal itself");
    return { value, within: halfWidth };
  });

const atMostPercent = read((text) => {
  const { low, high } = parseLimit(text, "percent");
  if (low !== Number.NEGATIVE_INFINITY) {
    refuse("not-a-limit", `"${text}": a reflectance goal is an upper limit`, { hint: "write it as in at most 2.5 %" });
  }
  if (!(high > 0 && high <= 100)) {
    refuse("out-of-bounds", `${high} % lies outside 0 to 100 %`, { hint: "write it as in at most 2.5 %" });
  }
  return { atMost: high };
});

/** Goals; film goals on a polished witness, index at 632.8 nm. */
export const goalShape = z.strictObject({
  index: z.optional(tolerance("number", nitrideIndexRange[0], nitrideIndexRange[1], "")),
  thickness: z.optional(tolerance("length", 1, 2000, "nm")),
  weighted_reflectance: z.optional(atMostPercent),
  reflectance_minimum: z.optional(tolerance("length", LIGHT_NM[0], LIGHT_NM[1], "nm")),
});

const facetFactor = read((text) => {
  const hint =
    "film on a facet over film on a polished witness: 75 nm beside 88 nm is 0.85, written as in 0.85 sd 0.05";
  if (/^\s*[\d.]+\s*(nm|um|%)/.test(text)) {
    refuse("wrong-unit", `"${text}": the facet factor is a plain ratio, not a thickness or a percentage`, { hint });
  }
  const { mean, sd } = parseMeanSd(text, "number");
  within(mean, 0.3, 1.2, "", hint);
  within(sd, 0, 0.3, "", hint);
  return { mean, sd };
});

export const waferShape = z.strictObject({
  surface: z.enum(["polished", "pyramids"]),
  facet_angle: z.optional(read((text) => within(parseQuantity(text, "angle").value, ...facetAngleRange, "deg"))),
  facet_factor: z.optional(facetFactor),
  seen_from: z.optional(z.enum(["air", "glass"])),
});

const wavelength = read((text) => within(parseQuantity(text, "length").value, ...LIGHT_NM, "nm"));

export const lightShape = z.strictObject({
  from: z.optional(wavelength),
  to: z.optional(wavelength),
  weight: z.optional(z.string()),
});

const repeatability = (dimension: Dimension, zeroAllowed = false) =>
  read((text) => {
    if (/\u00b1|\+\/-/.test(text)) {
      const hint = `write the standard deviation alone, as in ${text.replace(/\u00b1|\+\/-/g, "").trim()}`;
      throw new Refusal([{ code: "plus-minus", message: `"${text}": a plus-minus sign is not read here`, hint }]);
    }
    const { value } = parseQuantity(text.replace(/^\s*sd\b/, ""), dimension, { difference: true });
    if (value < 0) refuse("out-of-bounds", `"${text}": a repeatability cannot be negative`);
    if (value === 0 && !zeroAllowed) {
      const hint =
        "give the standard deviation of repeated readings; leave the key out when the gauge does not read it";
      refuse("zero-gauge", `"${text}": no gauge repeats exactly`, { hint });
    }
    return value;
  });

/**
 * A certified value, "2.045" or "2.045 within 0.002". A certificate's tolerance is taken as its expanded uncertainty, two
 * standard deviations (common practice, no source).
 */
const certified = (dimension: Dimension, low: number, high: number, unit: string) =>
  read((text) => {
    if (!/\bwithin\b|\u00b1|\+\/-/.test(text))
      return { value: within(parseQuantity(text, dimension).value, low, high, unit), sd: 0 };
    const { value, within: halfWidth } = parseTolerance(text, dimension);
    within(value, low, high, unit);
    within(halfWidth, 0, value, unit, "a tolerance cannot be wider than the value itself");
    return { value, sd: halfWidth / 2 };
  });

const correlation = read((text) =>
  within(
    parseQuantity(text, "number").value,
    -0.999,
    0.999,
    "",
    "the correlation of its errors in index and thickness: -0.98 for a fitted spectrum, 0 when left out",
  ),
);

export const gaugeShape = z.strictObject({
  on: z.enum(["polished", "cell"]),
  index: z.optional(repeatability("number")),
  thickness: z.optional(repeatability("length")),
  weighted_reflectance: z.optional(repeatability("percent")),
  reflectance_minimum: z.optional(repeatability("length")),
  day_to_day: z.optional(
    z.strictObject({
      index: z.optional(repeatability("number", true)),
      thickness: z.optional(repeatability("length", true)),
    }),
  ),
  correlation: z.optional(correlation),
  reference: z.optional(
    z.strictObject({
      // any wafer will do, so the index of an oxide (1.46) or of silicon (3.87) too
      index: z.optional(certified("number", 1.3, 4, "")),
      thickness: z.optional(certified("length", 1, 2000, "nm")),
    }),
  ),
});

/** Free text of one row: 1 to 100 characters, no control characters; normalised to NFC. */
export const oneRow = read((text) => {
  const trimmed = text.trim().normalize("NFC");
  if (trimmed === "") refuse("empty-text", "nothing is written");
  if (trimmed.length > 100) refuse("text-too-long", `the text has ${trimmed.length} characters, at most 100 are kept`);
  if (/\p{Cc}|\p{Zl}|\p{Zp}/u.test(trimmed)) refuse("control-character", "the text holds a control character");
  return trimmed;
});

export const peopleShape = z.strictObject({
  approve: z.optional(z.array(oneRow)),
  override: z.optional(z.array(oneRow)),
});

/** An IANA zone known to this system. */
export const timeZone = read((text) => {
  try {
    Intl.DateTimeFormat("en", { timeZone: text });
    return text;
  } catch {
    return refuse("unknown-time-zone", `"${text}" is not a time zone known here`, { hint: "as in Europe/Lisbon" });
  }
});
