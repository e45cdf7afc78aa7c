/**
 * Smooth values behind a rounded table. Optical constants printed to three digits move in stairs where the truth slopes gently,
 * and a curve through the stairs makes the place of a reflectance minimum jerk by nanometres. Any values within half a step
 * of the printed ones are as faithful to the table; these are the smoothest of them.
 */
import { refuse } from "../errors.ts";

/** Enough for stairs a few rows long; longer waves are already smooth in the printed values. */
const sweeps = 200;

/**
 * Values within `step` / 2 of the given ones with the least sum of squared second differences, by coordinate descent (each
 * value in turn to its best place given its neighbours, held within its rounding). The rows must be evenly spaced, which the
 * caller knows; refuses a step that is not positive ("bad-table").
 */
export function unrounded(values: ArrayLike<number>, step: number): Float64Array {
  if (!(step > 0)) refuse("bad-table", `a rounding step of ${step} is not positive`);
  const smooth = Float64Array.from(values);
  const last = smooth.length - 1;
  let moved = true;
  // Once a whole sweep has moved nothing, none after it will.
  for (let sweep = 0; sweep < sweeps && moved; sweep++) {
    moved = false;
    for (let i = 0; i <= last; i++) {
      const before = smooth[i];
      const low = values[i] - step / 2;
      const high = values[i] + step / 2;
      if (i > 1 && i < last - 1) {
        // The general case below written out: all but four values of a table come here, hundreds of times.
        const here = smooth[i];
        let sum = smooth[i - 2] - 2 * smooth[i - 1] + here - here;
        sum += -2 * (smooth[i - 1] - 2 * here + smooth[i + 1] + 2 * here);
        sum += here - 2 * smooth[i + 1] + smooth[i + 2] - here;
        smooth[i] = Math.min(high, Math.max(low, -sum / 6));
        if (smooth[i] !== before) moved = true;
        continue;
      }
      // The second differences that hold value i, with it left out, times its factor in them: 1, -2, 1.
      let pull = 0;
      let factors = 0;
      for (let centre = Math.max(1, i - 1); centre <= Math.min(last - 1, i + 1); centre++) {
        const factor = centre === i ? -2 : 1;
        const difference = smooth[centre - 1] - 2 * smooth[centre] + smooth[centre + 1];
        pull += factor * (difference - factor * smooth[i]);
        factors += factor * factor;
      }
      if (factors === 0) continue;
      smooth[i] = Math.min(high, Math.max(low, -pull / factors));
      if (smooth[i] !== before) moved = true;
    }
  }
  return smooth;
}
