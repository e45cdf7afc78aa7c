/**
 * Where a reflectance curve has its minimum, finer than its wavelength grid: the smooth curve itself is asked again around the
 * grid point that lies lower than its neighbours, instead of laying a parabola through rounded grid values, which makes the
 * answer jump.
 */
import { minimise } from "../numerics/minimise.ts";

/** Width, nm, to which the search closes in: far below the 1.5 nm a reflectometer repeats to (common practice). */
const closeEnoughNm = 0.005;

/**
 * Positions of grid points lower than the one before and not higher than the one after; never the first or last point, nor
 * those of a stretch `first` to `last` of the grid when one is given.
 */
export function valleys(values: ArrayLike<number>, first = 0, last = values.length - 1): number[] {
  const found: number[] = [];
  for (let i = first + 1; i < last; i++) {
    if (values[i] < values[i - 1] && values[i] <= values[i + 1]) found.push(i);
  }
  return found;
}

/**
 * The film's optical thickness in quarter waves, 4 n d / lambda, between which its main minimum is looked for. It lies within
 * 0.1 of 1 on silicon; the next minimum lies near 3, the maximum between them near 2.
 */
const quarterWaves = [0.75, 1.35] as const;

/**
 * First and last place of the grid that the main minimum can depend on: where the film is near a quarter wave, and one place
 * further each way. Half of a usual grid, so that reflectance need not be worked out elsewhere. `opticalNm` as below.
 */
export function mainStretch(wavelengthNm: ArrayLike<number>, opticalNm: (place: number) => number): [number, number] {
  let first = wavelengthNm.length;
  let last = -1;
  for (let i = 0; i < wavelengthNm.length; i++) {
    const waves = (4 * opticalNm(i)) / wavelengthNm[i];
    if (waves < quarterWaves[0] || waves > quarterWaves[1]) continue;
    if (i < first) first = i;
    last = i;
  }
  return last < 0 ? [0, 0] : [Math.max(0, first - 1), Math.min(wavelengthNm.length - 1, last + 1)];
}

/**
 * Position (nm) of the main minimum of one film: the valley nearest to a quarter wave. Not the lowest one, because structure of
 * silicon and film absorption in the violet make small dips of their own. `opticalNm` is n d at a place of the grid; only the
 * `stretch` of reflectances is read. Null when no valley lies near a quarter wave, strictly inside the grid.
 */
export function mainMinimum(
  wavelengthNm: ArrayLike<number>,
  reflectance: ArrayLike<number>,
  opticalNm: (place: number) => number,
  curve: (wavelengthNm: number) => number,
  stretch: readonly [number, number] = mainStretch(wavelengthNm, opticalNm),
): number | null {
  const waves = (i: number): number => (4 * opticalNm(i)) / wavelengthNm[i];
  const near = valleys(reflectance, stretch[0], stretch[1]).filter(
    (i) => waves(i) >= quarterWaves[0] && waves(i) <= quarterWaves[1],
  );
  return refined(wavelengthNm, near, (i) => Math.abs(Math.log(waves(i))), curve);
}

/** Position (nm) of the lowest valley of a curve; null when there is none strictly inside the grid. */
export function lowestMinimum(
  wavelengthNm: ArrayLike<number>,
  reflectance: ArrayLike<number>,
  curve: (wavelengthNm: number) => number,
): number | null {
  return refined(wavelengthNm, valleys(reflectance), (i) => reflectance[i], curve);
}

/** The valley of least cost, refined between its neighbours on the grid; null when there is no valley. */
function refined(
  wavelengthNm: ArrayLike<number>,
  candidates: readonly number[],
  cost: (valley: number) => number,
  curve: (wavelengthNm: number) => number,
): number | null {
  if (candidates.length === 0) return null;
  const valley = candidates.reduce((best, i) => (cost(i) < cost(best) ? i : best));
  return minimise(curve, wavelengthNm[valley - 1], wavelengthNm[valley + 1], closeEnoughNm).x;
}
