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

/** Numbers kept a wavelength and angle: 2 pi q / lambda (re, im), then r01, r12 (re, im each) and the power factor, s and p. */
const stride = 12;

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

  /** Precomputes for all angles and wavelengths. Input arrays are trusted to be of one length and finite. */
  constructor({ wavelengthNm, incidenceIndex, film, substrate, anglesRad }: OneFilmInput) {
    this.wavelengths = wavelengthNm.length;
    this.angles = anglesRad.length;
    this.parts = new Float64Array(stride * this.wavelengths * this.angles);
    const q = new Float64Array(6);
    let at = 0;
    for (const angleRad of anglesRad) {
      const sine2 = Math.sin(angleRad) ** 2;
      for (let i = 0; i < this.wavelengths; i++) {
        const n0 = incidenceIndex[i];
        const n1 = film.n[i];
        const k1 = film.k[i];
        const n2 = substrate.n[i];
        const k2 = substrate.k[i];
        const along = n0 * n0 * sine2;
        writeNormalIndex(n0, 0, along, q, 0);
        writeNormalIndex(n1, k1, along, q, 2);
        writeNormalIndex(n2, k2, along, q, 4);
        const turn = (2 * Math.PI) / wavelengthNm[i];
        this.parts[at] = turn * q[2];
        this.parts[at + 1] = turn * q[3];
        writeReflection("s", n0, 0, q[0], q[1], n1, k1, q[2], q[3], this.parts, at + 2);
        writeReflection("s", n1, k1, q[2], q[3], n2, k2, q[4], q[5], this.parts, at + 4);
        writeReflection("p", n0, 0, q[0], q[1], n1, k1, q[2], q[3], this.parts, at + 6);
        writeReflection("p", n1, k1, q[2], q[3], n2, k2, q[4], q[5], this.parts, at + 8);
        // Re(admittance of the substrate) / admittance of the medium above, for s and p; times |t01 t12|^2.
        const power = q[4] / q[0];
        const size = q[4] * q[4] + q[5] * q[5];
        const powerP = (((n2 * n2 - k2 * k2) * q[4] - 2 * n2 * k2 * q[5]) / size) * (q[0] / (n0 * n0));
        this.parts[at + 10] = power * onePlus(this.parts, at + 2) * onePlus(this.parts, at + 4);
        this.parts[at + 11] = powerP * onePlus(this.parts, at + 6) * onePlus(this.parts, at + 8);
        at += stride;
      }
    }
  }

  /**
   * Reflectance and transmittance (into the substrate) for a thickness in nm, unpolarised, written angle by angle: the value
   * at angle a and wavelength i goes to [a * wavelengths + i]. What is in neither was absorbed in the film.
   * Refuses a thickness that is negative or not finite ("film-thickness").
   */
  evaluate(thicknessNm: number, reflectance: Float64Array, transmittance: Float64Array): void {
    if (!(thicknessNm >= 0 && Number.isFinite(thicknessNm))) {
      refuse("film-thickness", `film thickness ${thicknessNm} nm; a finite number of 0 or more is needed`);
    }
    const parts = this.parts;
    const count = this.wavelengths * this.angles;
    for (let i = 0, at = 0; i < count; i++, at += stride) {
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
        t += (parts[at + 10 + p] * size) / down;
      }
      reflectance[i] = r / 2;
      transmittance[i] = t / 2;
    }
  }
}

/** |1 + r|^2 of a coefficient stored as two numbers: the transmission coefficient of tangential fields, squared. */
function onePlus(parts: Float64Array, at: number): number {
  return (1 + parts[at]) ** 2 + parts[at + 1] ** 2;
}
