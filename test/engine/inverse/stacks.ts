/** Stacks and unknowns that the tests of the inverse share. */
import { type FilmStackDescription, type FilmUnknown, materialByName, siliconNitride } from "../../../engine/index.ts";

export const polished = { kind: "polished" as const };
export const pyramids = { kind: "pyramids" as const, facetAngleDeg: 54.74 };

export const nitride = (index: number, thicknessNm = 80) => ({ material: siliconNitride(index), thicknessNm });
export const silica = (thicknessNm = 90) => ({ material: materialByName("silica"), thicknessNm });

/** On silicon, 300 to 1100 nm, photons; 20 nm steps unless said, to be quick. */
export function stackOf(
  film: FilmStackDescription["film"],
  more: Partial<FilmStackDescription> = {},
  stepNm = 20,
): FilmStackDescription {
  return {
    light: { fromNm: 300, toNm: 1100, stepNm, angleDeg: 0, polarisation: "both", weight: "photons" },
    seenFrom: "air",
    film,
    surface: polished,
    substrate: materialByName("silicon"),
    ...more,
  };
}

export const thickness = (layer: number, from: number, to: number, start: number | null = null): FilmUnknown => ({
  layer,
  what: "thickness",
  from,
  to,
  start,
});
export const index = (layer: number, from: number, to: number, start: number | null = null): FilmUnknown => ({
  layer,
  what: "index",
  from,
  to,
  start,
});
