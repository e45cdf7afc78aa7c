/**
 * The declared wafer as the engine computes it, and its light for the implications of `check`.
 */
import { type CoatedWafer, coatedWafer, type WaferDescription } from "../../engine/index.ts";
import type { CoatedLight } from "./implications.ts";
import type { Line } from "./line.ts";

/**
 * The coated wafer of a line: its surface, what it is seen from, its light range and weight. Film thickness handed to it
 * is on the surface itself: for pyramids, facet factor times the witness's. Throws as `coatedWafer`.
 */
export function lineWafer(line: Pick<Line, "wafer" | "light">): CoatedWafer {
  return coatedWafer(waferDescription(line));
}

/** The same as the engine describes a wafer. */
export function waferDescription({ wafer, light }: Pick<Line, "wafer" | "light">): WaferDescription {
  const { surface, facetAngleDeg, seenFrom } = wafer;
  const { fromNm, toNm, weight } = light;
  return {
    surface: surface === "polished" ? { kind: "polished" } : { kind: "pyramids", facetAngleDeg },
    seenFrom,
    fromNm,
    toNm,
    weight,
  };
}

const wafers = new WeakMap<Line["wafer"], { light: Line["light"]; wafer: CoatedWafer }>();

/** The optics behind the implications of `check`, for `readLine`'s `light` door. */
export const waferLight: CoatedLight = (line, index, filmNm) => {
  let known = wafers.get(line.wafer);
  if (known?.light !== line.light) {
    known = { light: line.light, wafer: lineWafer(line) };
    wafers.set(line.wafer, known);
  }
  return {
    weightedReflectancePercent: known.wafer.weightedReflectancePercent(index, filmNm),
    reflectanceMinimumNm: known.wafer.reflectanceMinimumNm(index, filmNm),
  };
};
