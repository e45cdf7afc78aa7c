/**
 * The fast path: one film on a substrate, over a whole spectrum and a few angles at once, unpolarised mean at each angle.
 *
 * Everything that does not depend on the film's thickness (interface coefficients, q of the film) is worked out once; a
 * thickness then costs one exponential and one sine and cosine a wavelength and angle. Same physics as `stack.ts`, in the
 * closed form for one film (Born and Wolf, section 1.6.4): r = (r01 + r12 E)/(1 + r01 r12 E), E = exp(-2 i delta).
 */
import { refuse } from "../errors.ts";
import type { OpticalConstantsOnGrid } from "../materials/material.ts";
import { writeNormalIndex, writeReflection } from "./fresnel.ts";

/** Numbers kept a wavelength and angle: 2 pi q / lambda (re, im), then r01, r12 (re, im each), s and p. */
const stride = 10;

/** Working space: q of the three media, re and im. */
const q = new Float64Array(6);

export interface OneFilmInput {
  wavelengthNm: Float64Array;
  /** Real index of the medium above, one number a wavelength. */
  incidenceIndex: Float64Array;
  film: OpticalConstantsOnGrid;
  substrate: OpticalConstantsOnGrid;
  /** Angles of incidence in the medium above, each in [0, pi/2). */
  anglesRad: readonly number[];
}

export class OneFilm {
  readonly wavelengths: number;
  readonly angles: number;
  private readonly parts: Float64Array;
  private readonly sine2: readonly number[];
  private readonly input: OneFilmInput;
  /** Power factor of s and p, a wavelength and angle; worked out when transmittance is first asked. */
  private powers: Float64Array | null = null;

  /** Precomputes for all angles and wavelengths. Input arrays are trusted to be of one length and finite. */
  constructor(input: OneFilmInput) {
    const { wavelengthNm, incidenceIndex, film, substrate, anglesRad } = input;
    this.input = input;
    this.wavelengths = wavelengthNm.length;
    this.angles = anglesRad.length;
    this.parts = new Float64Array(stride * this.wavelengths * this.angles);
    this.sine2 = anglesRad.map((angleRad) => Math.sin(angleRad) ** 2);
    for (let i = 0; i < this.wavelengths; i++)
      this.aim(i, wavelengthNm[i], incidenceIndex[i], film.n[i], film.k[i], substrate.n[i], substrate.k[i]);
  }

  /**
   * Sets the wavelength of place `i` and the indices of the three media there, at all angles: for walking along a curve of
   * reflectance a wavelength at a time without building anything. Transmittance does not follow.
   */
  aim(i: number, wavelengthNm: number, n0: number, n1: number, k1: number, n2: number, k2: number): void {
    const { parts, sine2, wavelengths } = this;
    const turn = (2 * Math.PI) / wavelengthNm;
    for (let angle = 0; angle < sine2.length; angle++) {
      const at = stride * (angle * wavelengths + i);
      const along = n0 * n0 * sine2[angle];
      writeNormalIndex(n0, 0, along, q, 0);
      writeNormalIndex(n1, k1, along, q, 2);
      writeNormalIndex(n2, k2, along, q, 4);
      parts[at] = turn * q[2];
      parts[at + 1] = turn * q[3];
      writeReflection("s", n0, 0, q[0], q[1], n1, k1, q[2], q[3], parts, at + 2);
      writeReflection("s", n1, k1, q[2], q[3], n2, k2, q[4], q[5], parts, at + 4);
      writeReflection("p", n0, 0, q[0], q[1], n1, k1, q[2], q[3], parts, at + 6);
      writeReflection("p", n1, k1, q[2], q[3], n2, k2, q[4], q[5], parts, at + 8);
    }
  }

  /** Re(admittance of the substrate) / admittance of the medium above, for s and p; times |t01 t12|^2. */
  private powerFactors(): Float64Array {
    if (this.powers) return this.powers;
    const { parts, sine2, wavelengths } = this;
    const { incidenceIndex, substrate } = this.input;
    const powers = new Float64Array(2 * wavelengths * this.angles);
    for (let angle = 0; angle < sine2.length; angle++)
      for (let i = 0; i < wavelengths; i++) {
        const place = angle * wavelengths + i;
        const at = stride * place;
        const n0 = incidenceIndex[i];
        const n2 = substrate.n[i];
        const k2 = substrate.k[i];
        const along = n0 * n0 * sine2[angle];
        writeNormalIndex(n0, 0, along, q, 0);
        writeNormalIndex(n2, k2, along, q, 4);
        const power = q[4] / q[0];
        const size = q[4] * q[4] + q[5] * q[5];
        const powerP = (((n2 * n2 - k2 * k2) * q[4] - 2 * n2 * k2 * q[5]) / size) * (q[0] / (n0 * n0));
        powers[2 * place] = power * onePlus(parts, at + 2) * onePlus(parts, at + 4);
        powers[2 * place + 1] = powerP * onePlus(parts, at + 6) * onePlus(parts, at + 8);
      }
    this.powers = powers;
    return powers;
  }

  /**
   * Reflectance and transmittance (into the substrate) for a thickness in nm, unpolarised, written angle by angle: the value
   * at angle a and wavelength i goes to [a * wavelengths + i]. What is in neither was absorbed in the film.
   * Without `transmittance` only reflectance is worked out; `first` and `end` leave out wavelengths before and from them on.
   * Refuses a thickness that is negative or not finite ("film-thickness").
   */
  evaluate(
    thicknessNm: number,
    reflectance: Float64Array,
    transmittance: Float64Array | null,
    first = 0,
    end = this.wavelengths,
  ): void {
    if (!(thicknessNm >= 0 && Number.isFinite(thicknessNm))) {
      refuse("film-thickness", `film thickness ${thicknessNm} nm; a finite number of 0 or more is needed`);
    }
    for (let angle = 0; angle < this.angles; angle++) {
      const from = angle * this.wavelengths;
      this.stretch(thicknessNm, reflectance, transmittance, from + first, from + end);
    }
  }

  private stretch(
    thicknessNm: number,
    reflectance: Float64Array,
    transmittance: Float64Array | null,
    first: number,
    end: number,
  ): void {
    const parts = this.parts;
    const powers = transmittance ? this.powerFactors() : null;
    for (let i = first, at = first * stride; i < end; i++, at += stride) {
      const phase = 2 * thicknessNm * parts[at];
      const decay = Math.exp(thicknessNm * parts[at + 1]);
      const size = decay * decay;
      const eRe = size * Math.cos(phase);
      const eIm = -size * Math.sin(phase);
      let r = 0;
      let t = 0;
      for (let p = 0; p < 2; p++) {
        const j = at + 2 + 4 * p;
        const aRe = parts[j];
        const aIm = parts[j + 1];
        const bRe = parts[j + 2] * eRe - parts[j + 3] * eIm;
        const bIm = parts[j + 2] * eIm + parts[j + 3] * eRe;
        const upRe = aRe + bRe;
        const upIm = aIm + bIm;
        const downRe = 1 + aRe * bRe - aIm * bIm;
        const downIm = aRe * bIm + aIm * bRe;
        const down = downRe * downRe + downIm * downIm;
        r += (upRe * upRe + upIm * upIm) / down;
        if (powers) t += (powers[2 * i + p] * size) / down;
      }
      reflectance[i] = r / 2;
      if (transmittance) transmittance[i] = t / 2;
    }
  }
}

/** |1 + r|^2 of a coefficient stored as two numbers: the transmission coefficient of tangential fields, squared. */
function onePlus(parts: Float64Array, at: number): number {
  return (1 + parts[at]) ** 2 + parts[at + 1] ** 2;
}
