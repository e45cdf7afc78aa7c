/**
 * The goal of a stack file: what the improved film is to reach before anything else counts. Any subset of weighted reflectance,
 * place of the minimum, reflectance at wavelengths, and colour.
 */
import * as z from "zod/mini";
import { type FilmGoal, labOfHex, parseLimit, parseQuantity, parseTolerance, refuse } from "../../../engine/index.ts";
import { goalShape, LIGHT_NM, within } from "../goal-shape.ts";
import { type Reader, read } from "../shape.ts";

const percent = (value: number): number => within(value, 0, 100, "%");

/** "at most 8 %" or "1 % within 0.5 %". */
const spot = read((text) => {
  if (/\bwithin\b|\u00b1|\+\/-/.test(text)) {
    const { value, within: halfWidth } = parseTolerance(text, "percent");
    return { value: percent(value), within: percent(halfWidth) };
  }
  const { low, high } = parseLimit(text, "percent");
  if (low !== Number.NEGATIVE_INFINITY) {
    refuse("not-a-limit", `"${text}": a reflectance goal is an upper limit or a value with a tolerance`, {
      hint: "write it as in at most 8 %, or 1 % within 0.5 %",
    });
  }
  if (percent(high) === 0) refuse("out-of-bounds", "no film reflects nothing", { hint: "as in at most 0.1 %" });
  return { atMost: high };
});

const coordinate = (low: number, high: number) =>
  read((text) => within(parseQuantity(text, "number").value, low, high, ""));
/** CIELAB as far as surfaces go; a just noticeable difference is about 1 (common practice, no source). */
const colourShape = z.strictObject({
  like: z.optional(read(labOfHex)),
  lab: z.optional(z.tuple([coordinate(0, 100), coordinate(-130, 130), coordinate(-130, 130)])),
  within: read((text) => within(parseQuantity(text, "number").value, 0.01, 100, "")),
});

const shape = z.strictObject({
  weighted_reflectance: goalShape.shape.weighted_reflectance,
  reflectance_minimum: goalShape.shape.reflectance_minimum,
  reflectance: z.optional(z.record(z.string(), spot)),
  colour: z.optional(colourShape),
});

/** Reads `goal`; an empty goal when there is none, undefined when it is wrong, with the problems kept in the reader. */
export function readStackGoal(reader: Reader): FilmGoal | undefined {
  const path = ["goal"];
  if (reader.at(path) === undefined) return {};
  const read = reader.shaped(shape, path);
  if (!read) return undefined;
  const { weighted_reflectance: weighted, reflectance_minimum: minimum, colour } = read;
  const spots = Object.entries(read.reflectance ?? {}).map(([key, wanted]) => {
    const wavelengthNm = reader.attempt([...path, "reflectance", key], () =>
      within(parseQuantity(key, "length").value, ...LIGHT_NM, "nm"),
    );
    return wavelengthNm === undefined ? undefined : { wavelengthNm, ...wanted };
  });
  if (colour && (colour.like === undefined) === (colour.lab === undefined)) {
    const hint = 'as in { like: "#20305f", within: 3 } or { lab: [21, 9, -28], within: 3 }';
    reader.add([...path, "colour"], "colour-goal", "a colour goal has one of like and lab", hint);
    return undefined;
  }
  const lab = colour?.like ?? colour?.lab;
  if (spots.some((one) => one === undefined)) return undefined;
  const goal: FilmGoal = {
    ...(weighted ? { weightedReflectancePercent: weighted } : {}),
    ...(minimum ? { reflectanceMinimumNm: minimum } : {}),
    ...(spots.length > 0 ? { reflectance: spots as NonNullable<FilmGoal["reflectance"]> } : {}),
    ...(colour && lab ? { colour: { lab, within: colour.within } } : {}),
  };
  if (Object.keys(goal).length === 0) {
    const hint = "weighted_reflectance, reflectance_minimum, reflectance, colour; or leave goal out";
    reader.add(path, "empty-goal", "the goal asks for nothing", hint);
    return undefined;
  }
  return goal;
}
