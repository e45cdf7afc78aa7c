/**
 * Derivatives of a stack's reflectance and transmittance with respect to every thickness, index and extinction, exact, in one
 * pass: up through the recursion of `stack-spectrum.ts` in its form without divisions, then down again by the chain rule.
 *
 * Up, with E_j = exp(-i phi_j) and B_j = X_j E_j (everything complex):
 *
 *   X_m = r_m, Y_m = 1;   X_(j-1) = r Y_j + B_j,   Y_(j-1) = Y_j + r B_j,   r = r_(j-1);   R = |X_0|^2 / |Y_0|^2
 *
 * Down, x and y being what multiplies dX and dY in d(..)/2 = Re(x dX + y dY); for R they start as conj(X_0) / |Y_0|^2 and
 * -R / Y_0, for ln T = ln |A|^2 + const as 0 and -1 / Y_0:
 *
 *   by r: x Y_j + y B_j,   by B: b = x + y r,   by phi: -i b B_j;   then x = b E_j, y = x r + y
 *
 * Into the layers: phi_j = 4 pi q_j d_j / lambda with dq = N / q dN, as q^2 = N^2 - (n0 sin theta0)^2, and
 * dr = (1 - r^2) / 2 (dln y_above - dln y_below), dln y = N / q^2 dN for s, (2 / N - N / q^2) dN for p. The transmittance has
 * direct terms besides, ln |1 + r|^2 of every interface and the fading of the waves. N = n - ik: d/dn is dN = 1, d/dk is dN = -i.
 */
import { writeTurn } from "../numerics/turn.ts";
import { checkThicknesses, type StackParts } from "./stack-spectrum.ts";

/**
 * Where the answers go: values a wavelength; slopes a parameter and wavelength, at [parameter * wavelengths + i], parameters
 * being the thickness (per nm) of every layer from the light inwards, then n of every layer, then k of every layer.
 */
export interface StackSlopes {
  reflectance: Float64Array;
  reflectanceSlopes: Float64Array;
  /** Left out: only reflectance is worked out, at half the cost. */
  transmittance?: Float64Array;
  transmittanceSlopes?: Float64Array;
}

/** Room for the slopes of a stack, transmittance included. */
export function stackSlopes(stack: { wavelengths: number; layers: number }): Required<StackSlopes> {
  const { wavelengths, layers } = stack;
  return {
    reflectance: new Float64Array(wavelengths),
    reflectanceSlopes: new Float64Array(3 * layers * wavelengths),
    transmittance: new Float64Array(wavelengths),
    transmittanceSlopes: new Float64Array(3 * layers * wavelengths),
  };
}

/** Slopes of one stack, kept with it: what they need of each layer is worked out once. */
export class StackDerivative {
  /** A layer and wavelength: dphi / dN per nm of thickness, re and im, at [2 (i layers + layer)]. */
  private readonly phase: Float64Array;
  /** A polarisation each: dr / dN of the interface above the layer and of the one below, at [4 (i layers + layer)]. */
  private readonly reflect: readonly Float64Array[];
  /** Working space, a layer: E, B and Y under its upper interface, d/dN; then X_0, Y_0. */
  private readonly e: Float64Array;
  private readonly back: Float64Array;
  private readonly under: Float64Array;
  private readonly byIndex: Float64Array;
  private readonly top = new Float64Array(4);

  constructor(private readonly stack: StackParts) {
    const { layers: m, wavelengths } = stack;
    this.phase = new Float64Array(2 * wavelengths * m);
    this.reflect = stack.polarisations.map(() => new Float64Array(4 * wavelengths * m));
    this.e = new Float64Array(2 * m);
    this.back = new Float64Array(2 * m);
    this.under = new Float64Array(2 * m);
    this.byIndex = new Float64Array(2 * m);
    for (let layer = 0; layer < m; layer++) this.prepare(layer);
  }

  /** To be called when a layer of the stack got new optical constants: its neighbours share its interfaces. */
  refresh(layer: number): void {
    for (let j = Math.max(0, layer - 1); j <= Math.min(layer + 1, this.stack.layers - 1); j++) this.prepare(j);
  }

  private prepare(layer: number): void {
    const { stack, phase, reflect } = this;
    const { layers: m, turn } = stack;
    const n = stack.n[layer + 1];
    const k = stack.k[layer + 1];
    for (let i = 0; i < stack.wavelengths; i++) {
      const q = 2 * (i * (m + 2) + layer + 1);
      const qRe = stack.q[q];
      const qIm = stack.q[q + 1];
      const size = qRe * qRe + qIm * qIm;
      // N / q, N / q^2, and 2 / N.
      const overRe = (n[i] * qRe - k[i] * qIm) / size;
      const overIm = (-k[i] * qRe - n[i] * qIm) / size;
      const sRe = (overRe * qRe + overIm * qIm) / size;
      const sIm = (overIm * qRe - overRe * qIm) / size;
      const square = n[i] * n[i] + k[i] * k[i];
      const t = 2 * (i * m + layer);
      // dphi / dN = d (4 pi / lambda) N / q = d turn N / q^2.
      phase[t] = turn[t] * sRe - turn[t + 1] * sIm;
      phase[t + 1] = turn[t] * sIm + turn[t + 1] * sRe;
      for (let p = 0; p < reflect.length; p++) {
        const isS = stack.polarisations[p] === "s";
        const lawRe = isS ? sRe : (2 * n[i]) / square - sRe;
        const lawIm = isS ? sIm : (2 * k[i]) / square - sIm;
        const r = stack.r[p];
        for (let below = 0; below < 2; below++) {
          const at = 2 * (i * (m + 1) + layer + below);
          const half = below === 0 ? -0.5 : 0.5;
          const keepRe = half * (1 - r[at] * r[at] + r[at + 1] * r[at + 1]);
          const keepIm = half * -2 * r[at] * r[at + 1];
          const out = 4 * (i * m + layer) + 2 * below;
          reflect[p][out] = keepRe * lawRe - keepIm * lawIm;
          reflect[p][out + 1] = keepRe * lawIm + keepIm * lawRe;
        }
      }
    }
  }

  /** Fills `out` for thicknesses in nm. Refuses as `checkThicknesses`. */
  evaluate(thicknessNm: ArrayLike<number>, out: StackSlopes): void {
    const { stack, e, top } = this;
    const m = stack.layers;
    checkThicknesses(thicknessNm, m);
    const share = 1 / stack.polarisations.length;
    const { reflectance, reflectanceSlopes, transmittance, transmittanceSlopes } = out;
    for (const array of [reflectance, reflectanceSlopes, transmittance, transmittanceSlopes]) array?.fill(0);
    const powers = transmittance && transmittanceSlopes ? stack.power : null;
    for (let i = 0; i < stack.wavelengths; i++) {
      let passed = 1;
      for (let j = 0, t = 2 * i * m; j < m; j++, t += 2) {
        writeTurn(-thicknessNm[j] * stack.turn[t], e, 2 * j);
        const fade = stack.turn[t + 1];
        if (fade === 0) continue;
        const size = Math.exp(thicknessNm[j] * fade);
        e[2 * j] *= size;
        e[2 * j + 1] *= size;
        passed *= size;
      }
      for (let p = 0; p < stack.r.length; p++) {
        this.up(i, p);
        const xRe = top[0];
        const xIm = top[1];
        const yRe = top[2];
        const yIm = top[3];
        const down = yRe * yRe + yIm * yIm;
        const over = down === 0 ? 0 : 1 / down;
        const r = (xRe * xRe + xIm * xIm) * over;
        reflectance[i] += share * r;
        top[0] = xRe * over;
        top[1] = -xIm * over;
        top[2] = -r * yRe * over;
        top[3] = r * yIm * over;
        this.down(i, p, false, 2 * share, thicknessNm, reflectanceSlopes);
        if (!powers || !transmittance || !transmittanceSlopes) continue;
        const t = share * powers[p][i] * passed * over;
        transmittance[i] += t;
        top[0] = 0;
        top[1] = 0;
        top[2] = -yRe * over;
        top[3] = yIm * over;
        this.down(i, p, true, 2 * t, thicknessNm, transmittanceSlopes);
      }
    }
  }

  /** The recursion from the substrate up, keeping B and Y of every layer; leaves X_0 and Y_0 in `top`. */
  private up(i: number, p: number): void {
    const { stack, e, back, under, top } = this;
    const m = stack.layers;
    const r = stack.r[p];
    const at = 2 * i * (m + 1);
    let xRe = r[at + 2 * m];
    let xIm = r[at + 2 * m + 1];
    let yRe = 1;
    let yIm = 0;
    for (let j = 2 * m - 2; j >= 0; j -= 2) {
      const bRe = xRe * e[j] - xIm * e[j + 1];
      const bIm = xRe * e[j + 1] + xIm * e[j];
      const rRe = r[at + j];
      const rIm = r[at + j + 1];
      back[j] = bRe;
      back[j + 1] = bIm;
      under[j] = yRe;
      under[j + 1] = yIm;
      xRe = rRe * yRe - rIm * yIm + bRe;
      xIm = rRe * yIm + rIm * yRe + bIm;
      yRe += rRe * bRe - rIm * bIm;
      yIm += rRe * bIm + rIm * bRe;
    }
    top[0] = xRe;
    top[1] = xIm;
    top[2] = yRe;
    top[3] = yIm;
  }

  /**
   * Down again from the multipliers of dX_0 and dY_0 in `top`. `direct` adds what ln T takes from each interface and layer
   * itself. Slopes get `factor` times the real part.
   */
  private down(
    i: number,
    p: number,
    direct: boolean,
    factor: number,
    thicknessNm: ArrayLike<number>,
    slopes: Float64Array,
  ): void {
    const { stack, e, back, under, byIndex, phase, top } = this;
    const { layers: m, wavelengths: count, turn } = stack;
    if (m === 0) return;
    const r = stack.r[p];
    const reflect = this.reflect[p];
    const at = 2 * i * (m + 1);
    let xRe = top[0];
    let xIm = top[1];
    let yRe = top[2];
    let yIm = top[3];
    for (let j = 0, b = 0, t = 2 * i * m, part = 4 * i * m; j < m; j++, b += 2, t += 2, part += 4) {
      const rRe = r[at + b];
      const rIm = r[at + b + 1];
      const bRe = back[b];
      const bIm = back[b + 1];
      let byRRe = xRe * under[b] - xIm * under[b + 1] + yRe * bRe - yIm * bIm;
      let byRIm = xRe * under[b + 1] + xIm * under[b] + yRe * bIm + yIm * bRe;
      if (direct) {
        const size = (1 + rRe) * (1 + rRe) + rIm * rIm;
        byRRe += (1 + rRe) / size;
        byRIm -= rIm / size;
      }
      const byBRe = xRe + yRe * rRe - yIm * rIm;
      const byBIm = xIm + yRe * rIm + yIm * rRe;
      const byPhiRe = byBRe * bIm + byBIm * bRe;
      const byPhiIm = byBIm * bIm - byBRe * bRe - (direct ? 0.5 : 0);
      slopes[j * count + i] += factor * (byPhiRe * turn[t] - byPhiIm * turn[t + 1]);
      if (j > 0) {
        byIndex[b - 2] += byRRe * reflect[part - 2] - byRIm * reflect[part - 1];
        byIndex[b - 1] += byRRe * reflect[part - 1] + byRIm * reflect[part - 2];
      }
      const wayRe = thicknessNm[j] * phase[t];
      const wayIm = thicknessNm[j] * phase[t + 1];
      byIndex[b] = byPhiRe * wayRe - byPhiIm * wayIm + byRRe * reflect[part] - byRIm * reflect[part + 1];
      byIndex[b + 1] = byPhiRe * wayIm + byPhiIm * wayRe + byRRe * reflect[part + 1] + byRIm * reflect[part];
      const nextYRe = xRe * rRe - xIm * rIm + yRe;
      yIm += xRe * rIm + xIm * rRe;
      yRe = nextYRe;
      xRe = byBRe * e[b] - byBIm * e[b + 1];
      xIm = byBRe * e[b + 1] + byBIm * e[b];
    }
    // The last interface: X_m = r_m.
    if (direct) {
      const rRe = r[at + 2 * m];
      const rIm = r[at + 2 * m + 1];
      const size = (1 + rRe) * (1 + rRe) + rIm * rIm;
      xRe += (1 + rRe) / size;
      xIm -= rIm / size;
    }
    const last = 4 * (i * m + m - 1) + 2;
    byIndex[2 * m - 2] += xRe * reflect[last] - xIm * reflect[last + 1];
    byIndex[2 * m - 1] += xRe * reflect[last + 1] + xIm * reflect[last];
    for (let j = 0; j < m; j++) {
      // dN = dn - i dk
      slopes[(m + j) * count + i] += factor * byIndex[2 * j];
      slopes[(2 * m + j) * count + i] += factor * byIndex[2 * j + 1];
    }
  }
}
