/**
 * Materials given by a formula instead of a table: constant, Cauchy, Sellmeier. A constant answers at every wavelength, a
 * formula only inside the range it was fitted on. (Tauc-Lorentz has a file of its own.)
 */
import { finite, refuse } from "../errors.ts";
import { type Material, type OpticalConstants, requireInRange, requireRange } from "./material.ts";

/** The same n and k at every wavelength (dimensionless). Refuses n <= 0 or k < 0 ("material-value"). */
export function constantMaterial(n: number, k = 0, name = `index ${n}`): Material {
  finite(n, "index");
  finite(k, "extinction");
  if (n <= 0 || k < 0) refuse("material-value", `${name}: n ${n}, k ${k}; needs n > 0 and k >= 0`);
  const here = { n, k };
  return { name, source: "constant", rangeNm: [0, Number.POSITIVE_INFINITY], at: () => here };
}

/** A material known by a formula inside a range. */
export function formulaMaterial(
  name: string,
  source: string,
  rangeNm: readonly [number, number],
  continuedAt: (wavelengthNm: number) => OpticalConstants,
): Material {
  requireRange(name, rangeNm);
  return {
    name,
    source,
    rangeNm,
    at(wavelengthNm) {
      requireInRange(name, rangeNm, wavelengthNm);
      return continuedAt(wavelengthNm);
    },
    continuedAt,
  };
}

export interface CauchyCoefficients {
  /** Dimensionless. */
  a: number;
  /** nm^2. */
  bNm2: number;
  /** nm^4. */
  cNm4?: number;
  /** Extinction, the same at every wavelength; 0 when left out. */
  k?: number;
  rangeNm: readonly [number, number];
  name?: string;
  source?: string;
}

/**
 * Cauchy's n = a + b / l^2 + c / l^4 (l in nm) for transparent films. Refuses coefficients that are not finite
 * ("not-a-number"), k < 0 ("material-value"), a range that is none ("material-range"), wavelengths outside it
 * ("outside-table"), and wavelengths at which n <= 0 ("material-value").
 */
export function cauchyMaterial(c: CauchyCoefficients): Material {
  const name = c.name ?? "Cauchy film";
  const c4 = c.cNm4 ?? 0;
  const k = c.k ?? 0;
  for (const [label, value] of Object.entries({ a: c.a, b: c.bNm2, c: c4, k })) finite(value, `${name} ${label}`);
  if (k < 0) refuse("material-value", `${name}: k ${k}; needs k >= 0`);
  return formulaMaterial(name, c.source ?? "Cauchy formula", c.rangeNm, (wavelengthNm) => {
    const inverse = 1 / (wavelengthNm * wavelengthNm);
    const n = c.a + inverse * (c.bNm2 + inverse * c4);
    if (!(n > 0)) refuse("material-value", `${name}: the formula gives n ${n} at ${wavelengthNm} nm`);
    return { n, k };
  });
}

/**
 * Sellmeier's n^2 = 1 + sum b l^2 / (l^2 - c^2), l and c in micrometres, k = 0 (the formula has no absorption).
 * Refuses coefficients that are not finite ("not-a-number"), no terms, a negative c or a pole inside the range
 * ("material-value"), a range that is none ("material-range"), wavelengths outside it ("outside-table"), and wavelengths at
 * which n^2 <= 0 or which lie across a pole from the range ("material-value").
 */
export function sellmeierMaterial(given: {
  name: string;
  source: string;
  rangeNm: readonly [number, number];
  /** Pairs [b dimensionless, c micrometre]. */
  terms: readonly (readonly [number, number])[];
}): Material {
  const { name, source, rangeNm, terms } = given;
  if (terms.length === 0) refuse("material-value", `${name}: a Sellmeier formula needs at least one term`);
  for (const [b, c] of terms) {
    finite(b, `${name} b`);
    finite(c, `${name} c`);
    if (c < 0) refuse("material-value", `${name}: c ${c} um is negative`);
  }
  const polesNm = terms.filter(([b]) => b !== 0).map(([, c]) => 1000 * c);
  const inside = polesNm.find((pole) => pole >= rangeNm[0] && pole <= rangeNm[1]);
  if (inside !== undefined) {
    refuse("material-value", `${name}: the formula has a pole at ${inside} nm, inside its range`);
  }
  // Across a pole the formula may look sound again and mean nothing.
  const fromNm = Math.max(0, ...polesNm.filter((pole) => pole < rangeNm[0]));
  const toNm = Math.min(Number.POSITIVE_INFINITY, ...polesNm.filter((pole) => pole > rangeNm[1]));
  return formulaMaterial(name, source, rangeNm, (wavelengthNm) => {
    const l2 = (wavelengthNm / 1000) ** 2;
    let n2 = 1;
    for (const [b, c] of terms) n2 += (b * l2) / (l2 - c * c);
    if (!(wavelengthNm > fromNm && wavelengthNm < toNm)) {
      refuse("material-value", `${name}: ${wavelengthNm} nm lies beyond a pole of the formula`);
    }
    if (!(n2 > 0)) refuse("material-value", `${name}: the formula gives n^2 ${n2} at ${wavelengthNm} nm`);
    return { n: Math.sqrt(n2), k: 0 };
  });
}
