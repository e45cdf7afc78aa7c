/**
 * Averages over sunlight, by one rule: the quantity is linear between the points of its own wavelength grid, the spectrum is
 * taken on its own points (0.5 and 1 nm apart) within the range, its end points interpolated, and both integrals are
 * trapezoids over those points. Sampling the spectrum on the coarse grid instead is off by up to 0.1 % absolute.
 *
 * The rule is linear in the quantity, so it collapses to one weight a grid point, worked out once a grid, range and weight.
 * Photon weighting is the default: each absorbed photon gives at most one electron, so it is what the current feels.
 */
import { refuse } from "../errors.ts";
import { intervalOf, piecewiseLinear } from "../numerics/interpolate.ts";
import { photonCurrent, sunlightPower, sunlightRangeNm, sunlightWavelengthNm } from "./spectrum.ts";

/** A cell's internal quantum efficiency, 0 to 1 on its own wavelengths (nm, increasing); linear between them. */
export interface QuantumEfficiency {
  wavelengthNm: readonly number[];
  efficiency: readonly number[];
}

/** What counts: photons, power, or photons times the cell's internal quantum efficiency. */
export type SunlightWeight = "photons" | "power" | QuantumEfficiency;

/** Weights on a grid: `average` sums to 1; `currentMaCm2` turns a fraction into mA/cm2 and sums to the available current. */
export interface GridWeights {
  average: Float64Array;
  currentMaCm2: Float64Array;
  availableMaCm2: number;
}

const cache = new Map<string, GridWeights>();
const cacheLimit = 64;

/**
 * Weights of the grid points for the range [fromNm, toNm]. `wavelengthNm`: increasing, at least two points, covering the
 * range; the range within the spectrum, 280 to 1300 nm. Currents count photons whatever the weight.
 * Refuses a grid that does not cover the range, a range outside the spectrum or not increasing, a quantum efficiency table
 * that does not cover the range ("outside-table", "range-order") or is not 0 to 1 ("quantum-efficiency").
 */
export function gridWeights(
  wavelengthNm: Float64Array,
  fromNm: number,
  toNm: number,
  weight: SunlightWeight = "photons",
): GridWeights {
  const key = JSON.stringify([Array.from(wavelengthNm), fromNm, toNm, weight]);
  const known = cache.get(key);
  if (known) return known;
  const made = makeWeights(wavelengthNm, fromNm, toNm, weight);
  if (cache.size >= cacheLimit) cache.clear();
  cache.set(key, made);
  return made;
}

/** Weighted average of `values` (any unit) given on a wavelength grid in nm. Refuses as `gridWeights` does. */
export function weightedAverage(
  wavelengthNm: Float64Array,
  values: ArrayLike<number>,
  fromNm: number,
  toNm: number,
  weight: SunlightWeight = "photons",
): number {
  if (values.length !== wavelengthNm.length) {
    refuse("length-mismatch", `${values.length} values on a grid of ${wavelengthNm.length} wavelengths`);
  }
  return weightedSum(gridWeights(wavelengthNm, fromNm, toNm, weight).average, values);
}

/** Sum of weight times value over a grid. */
export function weightedSum(weights: ArrayLike<number>, values: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < weights.length; i++) sum += weights[i] * values[i];
  return sum;
}

function makeWeights(grid: Float64Array, fromNm: number, toNm: number, weight: SunlightWeight): GridWeights {
  checkRange(grid, fromNm, toNm);
  const points = pointsWithin(fromNm, toNm);
  const counts = weightAt(weight, fromNm, toNm);
  const power = piecewiseLinear(sunlightWavelengthNm, sunlightPower);
  const average = new Float64Array(grid.length);
  const currentMaCm2 = new Float64Array(grid.length);
  let total = 0;
  let availableMaCm2 = 0;
  for (let p = 0; p < points.length; p++) {
    const here = points[p];
    // Trapezoid: half the distance to each neighbour.
    const width = ((points[p + 1] ?? here) - (points[p - 1] ?? here)) / 2;
    const current = width * photonCurrent(power(here), here);
    const counted = weight === "power" ? width * power(here) : current * counts(here);
    const i = intervalOf(grid, here);
    const share = (here - grid[i]) / (grid[i + 1] - grid[i]);
    average[i] += counted * (1 - share);
    average[i + 1] += counted * share;
    currentMaCm2[i] += current * (1 - share);
    currentMaCm2[i + 1] += current * share;
    total += counted;
    availableMaCm2 += current;
  }
  if (!(total > 0)) refuse("quantum-efficiency", `the weight is zero everywhere between ${fromNm} and ${toNm} nm`);
  for (let i = 0; i < grid.length; i++) average[i] /= total;
  return { average, currentMaCm2, availableMaCm2 };
}

/** The spectrum's own points strictly inside the range, and the two ends. */
function pointsWithin(fromNm: number, toNm: number): number[] {
  return [fromNm, ...sunlightWavelengthNm.filter((point) => point > fromNm && point < toNm), toNm];
}

/** How much a photon counts at a wavelength. */
function weightAt(weight: SunlightWeight, fromNm: number, toNm: number): (wavelengthNm: number) => number {
  if (typeof weight === "string") return () => 1;
  const { wavelengthNm, efficiency } = weight;
  const curve = piecewiseLinear(wavelengthNm, efficiency);
  const last = wavelengthNm[wavelengthNm.length - 1];
  if (wavelengthNm[0] > fromNm || last < toNm) {
    refuse(
      "outside-table",
      `quantum efficiency runs from ${wavelengthNm[0]} to ${last} nm, ${fromNm} to ${toNm} is needed`,
    );
  }
  efficiency.forEach((value, i) => {
    if (value >= 0 && value <= 1) return;
    refuse("quantum-efficiency", `quantum efficiency is ${value} at ${wavelengthNm[i]} nm, 0 to 1 is needed`, {
      row: i + 1,
      hint: "percentages must be divided by 100",
    });
  });
  return curve;
}

function checkRange(grid: Float64Array, fromNm: number, toNm: number): void {
  // Written so that NaN is refused too.
  if (!(fromNm < toNm)) refuse("range-order", `wavelength range ${fromNm} to ${toNm} nm does not increase`);
  const first = grid[0];
  const last = grid[grid.length - 1];
  if (grid.length < 2 || !(first <= fromNm && last >= toNm)) {
    refuse("outside-table", `values run from ${first} to ${last} nm, ${fromNm} to ${toNm} nm was asked`);
  }
  if (fromNm < sunlightRangeNm[0] || toNm > sunlightRangeNm[1]) {
    refuse(
      "outside-table",
      `sunlight is carried from ${sunlightRangeNm[0]} to ${sunlightRangeNm[1]} nm, ${fromNm} to ${toNm} nm was asked`,
    );
  }
}
