/**
 * From reflectance and transmittance at each angle of incidence to those of a whole surface. A polished surface at one angle
 * is the case of a single path with a single bounce.
 */
import type { BouncePath } from "./bounce-paths.ts";

/** Angles (radians) worth evaluating once, and the paths rewritten as positions in that list. */
export interface PathSum {
  anglesRad: readonly number[];
  paths: readonly { fraction: number; bounces: readonly number[] }[];
}

/** Collects the distinct angles of a set of paths; angles closer than 1e-9 rad are one. */
export function pathSum(paths: readonly BouncePath[]): PathSum {
  const anglesRad: number[] = [];
  const position = (angle: number): number => {
    const known = anglesRad.findIndex((other) => Math.abs(other - angle) < 1e-9);
    return known >= 0 ? known : anglesRad.push(angle) - 1;
  };
  return {
    paths: paths.map(({ fraction, anglesRad: angles }) => ({ fraction, bounces: angles.map(position) })),
    anglesRad,
  };
}

/**
 * Adds up the paths. `reflectance` and `transmittance` hold angle by angle what one bounce does, the value at angle a and
 * wavelength i at [a * wavelengths + i]; the results (fractions of the light that arrives) go to `outReflectance` and
 * `outTransmittance`. What one bounce neither reflects nor transmits counts as absorbed in the film.
 */
export function addPaths(
  sum: PathSum,
  wavelengths: number,
  reflectance: Float64Array,
  transmittance: Float64Array,
  outReflectance: Float64Array,
  outTransmittance: Float64Array,
): void {
  outReflectance.fill(0);
  outTransmittance.fill(0);
  for (const { fraction, bounces } of sum.paths) {
    for (let i = 0; i < wavelengths; i++) {
      let left = fraction;
      for (let b = 0; b < bounces.length; b++) {
        const at = bounces[b] * wavelengths + i;
        outTransmittance[i] += left * transmittance[at];
        left *= reflectance[at];
      }
      outReflectance[i] += left;
    }
  }
}

/** The reflectance of `addPaths` alone, at the wavelengths from place `first` to before `end`. */
export function addReflections(
  sum: PathSum,
  wavelengths: number,
  reflectance: Float64Array,
  outReflectance: Float64Array,
  first = 0,
  end = wavelengths,
): void {
  outReflectance.fill(0, first, end);
  for (const { fraction, bounces } of sum.paths) {
    for (let i = first; i < end; i++) {
      let left = fraction;
      for (let b = 0; b < bounces.length; b++) left *= reflectance[bounces[b] * wavelengths + i];
      outReflectance[i] += left;
    }
  }
}
