/**
 * What every material is to the rest of the engine: a name, where its numbers come from, the wavelengths it is known at,
 * and its complex index there. Convention everywhere: N = n - ik with time factor exp(+iwt), so k >= 0 absorbs.
 */
import { finite, refuse } from "../errors.ts";

/** Complex index at one wavelength, dimensionless; k >= 0 absorbs. */
export interface OpticalConstants {
  n: number;
  k: number;
}

/** A material asked for beyond what is known of it: which, how far it is known, and what was done beyond. */
export interface Extrapolation {
  readonly name: string;
  /** First and last wavelength, nm, at which it is known. */
  readonly knownNm: readonly [number, number];
  /** The last n and k kept as they are, or the formula used beyond the range it was fitted on. */
  readonly how: "held" | "formula";
}

export interface Material {
  readonly name: string;
  /** Author and year, file name, or "constant". */
  readonly source: string;
  /** First and last wavelength, nm, at which `at` answers. */
  readonly rangeNm: readonly [number, number];
  /** What lies beyond the known range where `at` answers all the same; absent when nothing does. */
  readonly extrapolations?: readonly Extrapolation[];
  /** Complex index at a vacuum wavelength in nm. Refuses (code "outside-table") outside `rangeNm`. */
  at(wavelengthNm: number): OpticalConstants;
  /** The same n alone, where that is cheaper. */
  indexAt?(wavelengthNm: number): number;
  /** The same as `at` along a whole grid, where that is cheaper. */
  along?(wavelengthNm: ArrayLike<number>): OpticalConstantsOnGrid;
  /** Of a formula: its value at any wavelength, range or not. Refuses ("material-value") where it is not physical. */
  continuedAt?(wavelengthNm: number): OpticalConstants;
}

/** Complex index on a whole wavelength grid: two arrays as long as the grid. */
export interface OpticalConstantsOnGrid {
  n: Float64Array;
  k: Float64Array;
}

/** Evaluates a material on a grid of wavelengths (nm). Refuses as `Material.at` does. */
export function onGrid(material: Material, wavelengthNm: ArrayLike<number>): OpticalConstantsOnGrid {
  if (material.along) return material.along(wavelengthNm);
  const n = new Float64Array(wavelengthNm.length);
  const k = new Float64Array(wavelengthNm.length);
  for (let i = 0; i < wavelengthNm.length; i++) {
    const here = material.at(wavelengthNm[i]);
    n[i] = here.n;
    k[i] = here.k;
  }
  return { n, k };
}

/** Refuses (code "outside-table") a wavelength a material is not known at; nothing here extrapolates in silence. */
export function requireInRange(name: string, rangeNm: readonly [number, number], wavelengthNm: number): void {
  if (wavelengthNm >= rangeNm[0] && wavelengthNm <= rangeNm[1]) return;
  refuse("outside-table", `${name} is known from ${rangeNm[0]} to ${rangeNm[1]} nm, ${wavelengthNm} nm was asked`, {
    hint: "narrow the wavelength range, or give a table that covers it",
  });
}

/** Refuses a wavelength range that is not finite ("not-a-number"), or not positive and increasing ("material-range"). */
export function requireRange(name: string, rangeNm: readonly [number, number]): void {
  for (const end of rangeNm) finite(end, `${name} range`);
  if (rangeNm[0] > 0 && rangeNm[0] < rangeNm[1]) return;
  refuse("material-range", `${name}: a range from ${rangeNm[0]} to ${rangeNm[1]} nm does not increase from above zero`);
}
