/**
 * How colour moves with the reflected spectrum: the chain rule from reflectance through tristimulus values to CIELAB, and the
 * slope of the CIEDE2000 difference in CIELAB, by central differences there (its formula has branches; the difference is
 * smooth between them, and 1e-4 of a CIELAB unit is far below what any eye or gauge resolves).
 */

import { d65, xBar, yBar, zBar } from "../colour/data/observer.ts";
import { colourDifference } from "../colour/difference.ts";
import { type Triple, whitePoint } from "../colour/observer.ts";

/** Where CIELAB turns from a cube root to a straight line (ISO/CIE 11664-4). */
const turn = (6 / 29) ** 3;
const straight = (29 / 3) ** 3 / 116;

const step = 1e-4;

/** Slope of CIELAB's f. */
const fSlope = (t: number): number => (t > turn ? 1 / (3 * Math.cbrt(t) ** 2) : straight);

/** Slope of the CIEDE2000 difference between `lab` and `other` with L, a and b of the first. */
export function colourDifferenceSlopes(lab: Triple, other: Triple): Triple {
  const moved = (by: Triple): number => colourDifference([lab[0] + by[0], lab[1] + by[1], lab[2] + by[2]], other);
  const slope = (along: Triple): number => (moved(along) - moved([-along[0], -along[1], -along[2]])) / (2 * step);
  return [slope([step, 0, 0]), slope([0, step, 0]), slope([0, 0, step])];
}

/**
 * Slope with reflectance at each of `colourWavelengthNm` of a quantity whose slopes with L, a and b are `perLab`, where the
 * tristimulus values (white Y = 100) are `xyz`.
 */
export function labSlopes(xyz: Triple, perLab: Triple): Float64Array {
  const [fx, fy, fz] = xyz.map((value, i) => fSlope(value / whitePoint[i]) / whitePoint[i]);
  const [perL, perA, perB] = perLab;
  const perX = 500 * perA * fx;
  const perY = (116 * perL - 500 * perA + 200 * perB) * fy;
  const perZ = -200 * perB * fz;
  const scale = 100 / yBar.reduce((sum, y, i) => sum + y * d65[i], 0);
  return Float64Array.from(d65, (light, i) => scale * light * (perX * xBar[i] + perY * yBar[i] + perZ * zBar[i]));
}
