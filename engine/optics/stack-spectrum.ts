/**
 * A coherent stack over a whole spectrum, for questions asked thousands of times: reflectance, transmittance into the
 * substrate, and their derivatives with respect to every thickness, index and extinction in the same pass. Same physics and
 * same recursion as `stack.ts`, which stays the plain statement of it and gives the absorptance of each layer.
 *
 * What does not depend on thickness (q of every medium, interface coefficients) is worked out once and kept; new thicknesses
 * then cost one sine and cosine a layer and wavelength. Derivatives are taken backwards through the recursion
 *
 *   P_j = G_j exp(-i phi_j),   G_(j-1) = (r_(j-1) + P_j) / (1 + r_(j-1) P_j),   phi_j = 4 pi q_j d_j / lambda
 *
 * (chain rule from R = |G_0|^2 down), so all of them together cost little more than the value: `stack-slopes.ts`.
 */
import { refuse } from "../errors.ts";
import type { OpticalConstantsOnGrid } from "../materials/material.ts";
import { writeTurn } from "../numerics/turn.ts";
import { type Polarisation, writeNormalIndex, writeReflection } from "./fresnel.ts";

export interface StackSpectrumInput {
  wavelengthNm: Float64Array;
  /** Real index of the medium the light comes from, one number a wavelength. */
  incidenceIndex: Float64Array;
  /** In that medium, from the normal, 0 <= angle < pi/2: one for all or one a wavelength. */
  angleRad: number | Float64Array;
  /** "both" is the mean of s and p. */
  polarisation: Polarisation | "both";
  /** From the light inwards; each as long as the grid. */
  layers: readonly OpticalConstantsOnGrid[];
  substrate: OpticalConstantsOnGrid;
}

/** What the derivatives read, too: everything of a stack that does not depend on thickness. */
export interface StackParts {
  readonly wavelengths: number;
  readonly layers: number;
  readonly polarisations: readonly Polarisation[];
  /** n and k of every medium, incidence first, substrate last. */
  readonly n: readonly Float64Array[];
  readonly k: readonly Float64Array[];
  /** Re q, Im q at [2 (i (layers + 2) + medium)]. */
  readonly q: Float64Array;
  /** 4 pi q / lambda of the layers, per nm, re and im at [2 (i layers + layer)]. */
  readonly turn: Float64Array;
  /** A polarisation each: coefficient of the interface under medium j, re and im at [2 (i (layers + 1) + j)]. */
  readonly r: readonly Float64Array[];
  /** A polarisation and wavelength each: Re(y substrate) / y incidence * product of |1 + r_j|^2. */
  readonly power: readonly Float64Array[];
}

export class StackSpectrum implements StackParts {
  readonly wavelengths: number;
  readonly layers: number;
  readonly polarisations: readonly Polarisation[];
  readonly n: Float64Array[];
  readonly k: Float64Array[];
  readonly q: Float64Array;
  readonly turn: Float64Array;
  readonly r: readonly Float64Array[];
  /** (n0 sin theta0)^2, or null when all light goes straight down. */
  private readonly along: Float64Array | null;
  /** 4 pi / lambda, per nm. */
  private readonly perNm: Float64Array;
  /** Working space: exp(-i phi) of the layers at one wavelength. */
  private readonly e: Float64Array;
  private powers: readonly Float64Array[] | null = null;

  /**
   * Works out all that thickness does not touch. Refuses arrays of another length than the grid ("length-mismatch"); values
   * are trusted to be finite, n > 0, k >= 0 (materials see to that).
   */
  constructor(input: StackSpectrumInput) {
    const { wavelengthNm, incidenceIndex, angleRad, polarisation, layers, substrate } = input;
    const count = wavelengthNm.length;
    const m = layers.length;
    this.wavelengths = count;
    this.layers = m;
    this.n = [incidenceIndex, ...layers.map((layer) => layer.n), substrate.n];
    this.k = [zerosOf(count), ...layers.map((layer) => layer.k), substrate.k];
    for (const array of [...this.n, ...this.k]) checkLength(array, count);
    this.along = alongOf(incidenceIndex, angleRad);
    // Straight down s and p are the same light.
    this.polarisations = polarisation !== "both" ? [polarisation] : this.along === null ? ["s"] : ["s", "p"];
    // One piece of memory for all: asking for it costs more than filling it.
    const memory = new Float64Array(
      count * (1 + 2 * (m + 2) + 2 * m + this.polarisations.length * 2 * (m + 1)) + 2 * m,
    );
    let used = 0;
    const take = (size: number): Float64Array => {
      used += size;
      return memory.subarray(used - size, used);
    };
    this.perNm = take(count);
    this.q = take(2 * count * (m + 2));
    this.turn = take(2 * count * m);
    this.r = this.polarisations.map(() => take(2 * count * (m + 1)));
    this.e = take(2 * m);
    for (let i = 0; i < count; i++) this.perNm[i] = (4 * Math.PI) / wavelengthNm[i];
    for (let medium = 0; medium < m + 2; medium++) this.enter(medium);
    for (let j = 0; j <= m; j++) this.meet(j);
  }

  /** Other layers, as many as before, and another substrate on the same grid: the same as building anew, without its memory. */
  restack(layers: readonly OpticalConstantsOnGrid[], substrate: OpticalConstantsOnGrid): void {
    const media = [...layers, substrate];
    if (layers.length !== this.layers) refuse("length-mismatch", `${layers.length} layers in place of ${this.layers}`);
    for (const [j, medium] of media.entries()) this.replace(j + 1, medium);
    for (let j = 0; j <= this.layers; j++) this.meet(j);
    this.powers = null;
  }

  get power(): readonly Float64Array[] {
    this.powers ??= this.polarisations.map((polarisation, p) => this.powerOf(polarisation, this.r[p]));
    return this.powers;
  }

  /** New optical constants of one layer (0 is the outermost), on the same grid. */
  setLayer(layer: number, constants: OpticalConstantsOnGrid): void {
    this.replace(layer + 1, constants);
    this.meet(layer);
    this.meet(layer + 1);
    this.powers = null;
  }

  private replace(medium: number, { n, k }: OpticalConstantsOnGrid): void {
    checkLength(n, this.wavelengths);
    checkLength(k, this.wavelengths);
    this.n[medium] = n;
    this.k[medium] = k;
    this.enter(medium);
  }

  /** Reflectance, 0 to 1, for thicknesses in nm, written to `out`. Refuses as `checkThicknesses`. */
  reflectance(thicknessNm: ArrayLike<number>, out: Float64Array): void {
    this.evaluate(thicknessNm, out, null);
  }

  /** The same with the transmittance into the substrate; what is in neither was absorbed in the layers. */
  evaluate(thicknessNm: ArrayLike<number>, reflectance: Float64Array, transmittance: Float64Array | null): void {
    checkThicknesses(thicknessNm, this.layers);
    const { layers: m, r, e, turn, wavelengths } = this;
    const polarisations = r.length;
    const power = transmittance ? this.power : null;
    for (let i = 0; i < wavelengths; i++) {
      let passed = 1;
      for (let j = 0, t = 2 * i * m; j < m; j++, t += 2) {
        const thickness = thicknessNm[j];
        writeTurn(-thickness * turn[t], e, 2 * j);
        const fade = turn[t + 1];
        if (fade !== 0) {
          const size = Math.exp(thickness * fade);
          e[2 * j] *= size;
          e[2 * j + 1] *= size;
          passed *= size;
        }
      }
      let sumR = 0;
      let sumT = 0;
      const at = 2 * i * (m + 1);
      for (let p = 0; p < polarisations; p++) {
        const rp = r[p];
        // G = X / Y, so that only the last step divides; |Y|^2 is the product of all |1 + r P|^2.
        let xRe = rp[at + 2 * m];
        let xIm = rp[at + 2 * m + 1];
        let yRe = 1;
        let yIm = 0;
        for (let j = 2 * m - 2; j >= 0; j -= 2) {
          const eRe = e[j];
          const eIm = e[j + 1];
          const backRe = xRe * eRe - xIm * eIm;
          const backIm = xRe * eIm + xIm * eRe;
          const rRe = rp[at + j];
          const rIm = rp[at + j + 1];
          xRe = rRe * yRe - rIm * yIm + backRe;
          xIm = rRe * yIm + rIm * yRe + backIm;
          yRe += rRe * backRe - rIm * backIm;
          yIm += rRe * backIm + rIm * backRe;
        }
        const down = yRe * yRe + yIm * yIm;
        const share = down === 0 ? 0 : 1 / down;
        sumR += (xRe * xRe + xIm * xIm) * share;
        if (power) sumT += power[p][i] * passed * share;
      }
      reflectance[i] = polarisations === 2 ? sumR / 2 : sumR;
      if (transmittance) transmittance[i] = polarisations === 2 ? sumT / 2 : sumT;
    }
  }

  /** q of a medium, and the phase of a layer. */
  private enter(medium: number): void {
    const { layers: m, q, turn, perNm, along } = this;
    const n = this.n[medium];
    const k = this.k[medium];
    const layer = medium - 1;
    const isLayer = layer >= 0 && layer < m;
    for (let i = 0, at = 2 * medium, t = 2 * layer; i < n.length; i++, at += 2 * m + 4, t += 2 * m) {
      if (along === null) {
        // Straight down q is the index itself.
        q[at] = n[i];
        q[at + 1] = -k[i];
      } else writeNormalIndex(n[i], k[i], along[i], q, at);
      if (!isLayer) continue;
      turn[t] = perNm[i] * q[at];
      turn[t + 1] = perNm[i] * q[at + 1];
    }
  }

  /** Coefficients of the interface under medium `j`: (a - b) / (a + b) of the admittances, as `writeReflection` says. */
  private meet(j: number): void {
    const { layers: m, q } = this;
    for (let p = 0; p < this.polarisations.length; p++) {
      const r = this.r[p];
      if (this.polarisations[p] === "p") {
        this.meetP(j, r);
        continue;
      }
      for (let i = 0, a = 2 * j, at = 2 * j; i < this.wavelengths; i++, a += 2 * m + 4, at += 2 * m + 2) {
        const aRe = q[a];
        const aIm = q[a + 1];
        const bRe = q[a + 2];
        const bIm = q[a + 3];
        const downRe = aRe + bRe;
        const downIm = aIm + bIm;
        const upRe = aRe - bRe;
        const upIm = aIm - bIm;
        const share = 1 / (downRe * downRe + downIm * downIm);
        r[at] = (upRe * downRe + upIm * downIm) * share;
        r[at + 1] = (upIm * downRe - upRe * downIm) * share;
      }
    }
  }

  private meetP(j: number, r: Float64Array): void {
    const { layers: m, q, n, k } = this;
    const na = n[j];
    const ka = k[j];
    const nb = n[j + 1];
    const kb = k[j + 1];
    for (let i = 0, a = 2 * j, at = 2 * j; i < this.wavelengths; i++, a += 2 * m + 4, at += 2 * m + 2)
      writeReflection("p", na[i], ka[i], q[a], q[a + 1], nb[i], kb[i], q[a + 2], q[a + 3], r, at);
  }

  private powerOf(polarisation: Polarisation, r: Float64Array): Float64Array {
    const { layers: m, q, n, k } = this;
    const power = new Float64Array(this.wavelengths);
    for (let i = 0; i < power.length; i++) {
      const first = 2 * i * (m + 2);
      const last = first + 2 * (m + 1);
      const n0 = n[0][i];
      const ns = n[m + 1][i];
      const ks = k[m + 1][i];
      const qRe = q[last];
      const qIm = q[last + 1];
      // s: Re q; p: Re(N^2 / q). The incidence medium is transparent.
      let ratio = qRe / q[first];
      if (polarisation === "p") {
        const real = ((ns * ns - ks * ks) * qRe - 2 * ns * ks * qIm) / (qRe * qRe + qIm * qIm);
        ratio = real * (q[first] / (n0 * n0));
      }
      for (let j = 0, at = 2 * i * (m + 1); j <= m; j++, at += 2) ratio *= (1 + r[at]) ** 2 + r[at + 1] ** 2;
      power[i] = ratio;
    }
    return power;
  }
}

function checkLength(array: Float64Array, count: number): void {
  if (array.length !== count)
    refuse("length-mismatch", `${array.length} optical constants on a grid of ${count} wavelengths`);
}

let zeros = new Float64Array(0);

/** k of the incidence medium; shared, and never written. */
function zerosOf(count: number): Float64Array {
  if (zeros.length < count) zeros = new Float64Array(count);
  return zeros.subarray(0, count);
}

function alongOf(incidenceIndex: Float64Array, angleRad: number | Float64Array): Float64Array | null {
  if (angleRad === 0) return null;
  const along = new Float64Array(incidenceIndex.length);
  let straight = true;
  for (let i = 0; i < along.length; i++) {
    along[i] = (incidenceIndex[i] * Math.sin(typeof angleRad === "number" ? angleRad : angleRad[i])) ** 2;
    if (along[i] !== 0) straight = false;
  }
  return straight ? null : along;
}

/** Refuses another number of thicknesses than layers ("length-mismatch") and one that is negative or not finite ("film-thickness"). */
export function checkThicknesses(thicknessNm: ArrayLike<number>, layers: number): void {
  if (thicknessNm.length !== layers)
    refuse("length-mismatch", `${thicknessNm.length} thicknesses for ${layers} layers`);
  for (let j = 0; j < layers; j++) {
    const thickness = thicknessNm[j];
    if (!(thickness >= 0 && Number.isFinite(thickness)))
      refuse("film-thickness", `film thickness ${thickness} nm; a finite number of 0 or more is needed`);
  }
}
