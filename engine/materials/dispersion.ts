/**
 * Materials given by a formula instead of a table: constant, Cauchy, Sellmeier. A constant answers at every wavelength, a
 * formula only inside the range it was fitted on.
 */
import { finite, refuse } from "../errors.ts";
import { type Material, requireInRange } from "./material.ts";

/** The same n and k at every wavelength (dimensionless). Refuses n <= 0 or k < 0 ("material-value"). */
export function constantMaterial(n: number, k = 0, name = `index ${n}`): Material {
  finite(n, "index");
  finite(k, "extinction");
  if (n <= 0 || k < 0) refuse("material-value", `${name}: n ${n}, k ${k}; needs n > 0 and k >= 0`);
  const here = { n, k };
  return { name, source: "constant", rangeNm: [0, Number.POSITIVE_INFINITY], at: () => here };
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

/** Cauchy's n = a + b / l^2 + c / l^4 (l in nm) for transparent films. Refuses outside its range and where n <= 0. */
export function cauchyMaterial(c: CauchyCoefficients): Material {
  const name = c.name ?? "Cauchy film";
  const c4 = c.cNm4 ?? 0;
  const k = c.k ?? 0;
  for (const [label, value] of Object.entries({ a: c.a, b: c.bNm2, c: c4, k })) finite(value, `${name} ${label}`);
  if (k < 0) refuse("material-value", `${name}: k ${k}; needs k >= 0`);
  return {
    name,
    source: c.source ?? "Cauchy formula",
    rangeNm: c.rangeNm,
    at(wavelengthNm) {
      requireInRange(name, c.rangeNm, wavelengthNm);
      const inverse = 1 / (wavelengthNm * wavelengthNm);
      const n = c.a + inverse * (c.bNm2 + inverse * c4);
      if (!(n > 0)) refuse("material-value", `${name}: the formula gives n ${n} at ${wavelengthNm} nm`);
      return { n, k };
    },
  };
}

/**
 * Sellmeier's n^2 = 1 + sum b l^2 / (l^2 - c^2), l and c in micrometres, k = 0 (the formula has no absorption).
 * Refuses outside its range.
 */
export function sellmeierMaterial(given: {
  name: string;
  source: string;
  rangeNm: readonly [number, number];
  /** Pairs [b dimensionless, c micrometre]. */
  terms: readonly (readonly [number, number])[];
}): Material {
  const { name, source, rangeNm, terms } = given;
  return {
    name,
    source,
    rangeNm,
    at(wavelengthNm) {
      requireInRange(name, rangeNm, wavelengthNm);
      const l2 = (wavelengthNm / 1000) ** 2;
      let n2 = 1;
      for (const [b, c] of terms) n2 += (b * l2) / (l2 - c * c);
      if (!(n2 > 0)) refuse("material-value", `${name}: the formula gives n^2 ${n2} at ${wavelengthNm} nm`);
      return { n: Math.sqrt(n2), k: 0 };
    },
  };
}
