/**
 * From reflectance and transmittance at each angle of incidence to those of a whole surface. A polished surface at one angle
 * is the case of a single path with a single bounce.
 */
import type { BouncePath } from "./bounce-paths.ts";
import type { CoverLight } from "./cover.ts";

/** Angles (radians) worth evaluating once, and the paths rewritten as positions in that list. */
export interface PathSum {
  anglesRad: readonly number[];
  paths: readonly {
    fraction: number;
    bounces: readonly number[];
    /** Polar angle in which the light leaves, radians; see `BouncePath`. */
    exitRad: number;
  }[];
}

/** Collects the distinct angles of a set of paths; angles closer than 1e-9 rad are one. */
export function pathSum(paths: readonly BouncePath[]): PathSum {
  const anglesRad: number[] = [];
  const position = (angle: number): number => {
    const known = anglesRad.findIndex((other) => Math.abs(other - angle) < 1e-9);
    return known >= 0 ? known : anglesRad.push(angle) - 1;
  };
  return {
    paths: paths.map(({ fraction, anglesRad: angles, exitRad = 0 }) => ({
      fraction,
      bounces: angles.map(position),
      exitRad,
    })),
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

/**
 * What the cover makes of the ways, at the wavelengths from place `first` to before `end`: of the light that arrives at the
 * surface once, `outLeaves` gets out to the viewer without coming down again and `outReturns` comes down again (the sums S_L and
 * S_B of `cover.ts`). `reflectance` as for `addPaths`; the cover's ways are those of the sum, in its order.
 */
export function addLeaving(
  sum: PathSum,
  cover: Pick<CoverLight, "leaves" | "returns">,
  wavelengths: number,
  reflectance: Float64Array,
  outLeaves: Float64Array,
  outReturns: Float64Array,
  first = 0,
  end = wavelengths,
): void {
  outLeaves.fill(0, first, end);
  outReturns.fill(0, first, end);
  sum.paths.forEach(({ fraction, bounces }, way) => {
    const leaves = cover.leaves[way];
    const returns = cover.returns[way];
    for (let i = first; i < end; i++) {
      let left = fraction;
      for (let b = 0; b < bounces.length; b++) left *= reflectance[bounces[b] * wavelengths + i];
      outLeaves[i] += left * leaves[i];
      outReturns[i] += left * returns[i];
    }
  });
}
