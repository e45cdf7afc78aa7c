/**
 * What lies between the eye and the coated wafer: air, another medium, or the front of a module (soda-lime glass 3.2 mm, encapsulant
 * 0.45 mm, both thick and incoherent).
 */
import { finite, refuse } from "../errors.ts";
import { materialByName } from "../materials/library.ts";
import type { Polarisation } from "../optics/fresnel.ts";
import { ThickLayers } from "../optics/thick-layers.ts";

export type SeenFrom = "air" | "glass" | { index: number };

/** Thicknesses of a module's front, mm (common practice, no source). */
const glassMm = 3.2;
const encapsulantMm = 0.45;

/** The medium on the film, on a wavelength grid, and the thick cover above it if there is one. */
export interface Surroundings {
  /** Real index of the medium on the film, one number a wavelength. */
  incidenceIndex: Float64Array;
  /** Angle in that medium, radians, one number a wavelength. */
  angleRad: Float64Array;
  cover: ThickLayers | null;
}

/**
 * Surroundings on a grid (nm) for light at an angle (radians) in the outermost medium.
 * Refuses an index that is not positive ("stack-value") and wavelengths glass or encapsulant are not known at
 * ("outside-table": 300 to 1690 nm).
 */
export function surroundings(
  seenFrom: SeenFrom,
  wavelengthNm: Float64Array,
  angleRad = 0,
  polarisation: Polarisation = "s",
): Surroundings {
  if (seenFrom === "glass") {
    const layers = [
      { material: materialByName("glass"), thicknessMm: glassMm },
      { material: materialByName("encapsulant"), thicknessMm: encapsulantMm },
    ];
    const cover = new ThickLayers(wavelengthNm, layers, 1, angleRad, polarisation);
    return { incidenceIndex: cover.innerIndex, angleRad: cover.innerAngleRad, cover };
  }
  const index = seenFrom === "air" ? 1 : finite(seenFrom.index, "incidence index");
  if (index <= 0) refuse("stack-value", `incidence index ${index} is not positive`);
  return {
    incidenceIndex: new Float64Array(wavelengthNm.length).fill(index),
    angleRad: new Float64Array(wavelengthNm.length).fill(angleRad),
    cover: null,
  };
}
