/**
 * Materials known from a table of measured optical constants. n is interpolated by a monotone cubic in wavelength; k by a
 * monotone cubic in ln k within each stretch where k > 0, and linearly between two rows of which one has k = 0 (a logarithm
 * of zero says nothing). Outside the table there is no answer.
 */
import { refuse } from "../errors.ts";
import { type Curve, intervalOf, monotoneCubic, piecewiseLinear } from "../numerics/interpolate.ts";
import { type Material, type OpticalConstants, requireInRange } from "./material.ts";
import { unrounded } from "./unrounded.ts";

/** A material's numbers as they are carried in `data/`: rows of [wavelength nm, n, k]. */
export interface MaterialData {
  name: string;
  source: string;
  rows: readonly (readonly [number, number, number])[];
  /** Set where n was printed in steps this coarse on evenly spaced rows: the smoothest n within the rounding is used. */
  nStep?: number;
}

/**
 * A material from rows of [wavelength nm, n, k].
 * Refuses: fewer than two rows ("bad-table"), a value that is not finite ("not-a-number"), wavelengths that do not
 * increase ("not-increasing"), n <= 0 or k < 0 ("table-value"); `row` counts the data rows from 1.
 */
export function tabulated(data: MaterialData): Material {
  checkRows(data);
  const wavelength = Float64Array.from(data.rows, (row) => row[0]);
  const printed = data.rows.map((row) => row[1]);
  const nCurve = monotoneCubic(wavelength, data.nStep === undefined ? printed : unrounded(printed, data.nStep));
  const kCurve = extinctionCurve(
    wavelength,
    data.rows.map((row) => row[2]),
  );
  const rangeNm = [wavelength[0], wavelength[wavelength.length - 1]] as const;

  return {
    name: data.name,
    source: data.source,
    rangeNm,
    indexAt(wavelengthNm) {
      requireInRange(data.name, rangeNm, wavelengthNm);
      return nCurve(wavelengthNm);
    },
    at(wavelengthNm): OpticalConstants {
      requireInRange(data.name, rangeNm, wavelengthNm);
      return { n: nCurve(wavelengthNm), k: kCurve(wavelengthNm) };
    },
  };
}

/**
 * Curve of k through rows of a table (wavelengths in nm, increasing): monotone cubic in ln k within each unbroken stretch of
 * k > 0, each stretch a curve of its own so that a zero next door does not bend it; straight where an end has k = 0.
 */
export function extinctionCurve(wavelengthNm: Float64Array, k: readonly number[]): Curve {
  let straight: Curve | null = null;
  const logarithmic = new Array<Curve | undefined>(k.length - 1).fill(undefined);
  let start = 0;
  while (start < k.length) {
    let end = start;
    while (end < k.length && k[end] > 0) end++;
    if (end - start >= 2) {
      const curve = monotoneCubic(wavelengthNm.subarray(start, end), k.slice(start, end).map(Math.log));
      logarithmic.fill(curve, start, end - 1);
    }
    start = Math.max(end, start + 1);
  }
  return (at) => {
    const logK = logarithmic[intervalOf(wavelengthNm, at)];
    if (logK) return Math.exp(logK(at));
    straight ??= piecewiseLinear(wavelengthNm, k);
    return straight(at);
  };
}

function checkRows({ name, rows }: MaterialData): void {
  if (rows.length < 2) refuse("bad-table", `${name}: ${rows.length} row(s), at least 2 are needed`);
  rows.forEach(([wavelengthNm, n, k], i) => {
    const row = i + 1;
    if (![wavelengthNm, n, k].every(Number.isFinite)) {
      refuse("not-a-number", `${name}: row ${row} holds ${wavelengthNm}, ${n}, ${k}; finite numbers are needed`, {
        row,
      });
    }
    if (i > 0 && wavelengthNm <= rows[i - 1][0]) {
      refuse("not-increasing", `${name}: ${wavelengthNm} nm follows ${rows[i - 1][0]} nm; wavelengths must increase`, {
        row,
      });
    }
    if (wavelengthNm <= 0 || n <= 0 || k < 0) {
      refuse("table-value", `${name}: wavelength ${wavelengthNm} nm, n ${n}, k ${k}; needs n > 0 and k >= 0`, {
        row,
        hint: "k counts as absorption when positive, whatever sign convention the table's author used",
      });
    }
  });
}
