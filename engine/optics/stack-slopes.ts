/**
 * Derivatives of a stack's reflectance and transmittance with respect to every thickness, index and extinction, exact, in one
 * pass: forward through the recursion of `stack-spectrum.ts`, then backwards by the chain rule.
 *
 * With a = d|G_0|^2 / (2 dG_0) = conj(G_0), going down the layers j = 1 to m (everything complex, R real, dR = 2 Re(a dG)):
 *
 *   dG_(j-1) = ((1 - r^2) dP_j + (1 - P_j^2) dr) / (1 + r P_j)^2,      r = r_(j-1)
 *   dP_j     = exp(-i phi_j) dG_j - i P_j dphi_j
 *   dr       = (1 - r^2) / 2 (dln y_(j-1) - dln y_j),                   y the admittance, q for s and N^2 / q for p
 *   dln y    = N / q^2 dN for s, (2 / N - N / q^2) dN for p;            dq = N / q dN, as q^2 = N^2 - (n0 sin theta0)^2
 *
 * T = power |A|^2 with ln A = sum over layers of ln(1 + r_(j-1)) - ln(1 + r_(j-1) P_j) - i phi_j / 2, plus ln(1 + r_m): the
 * same chain once more. N = n - ik, so d/dn is dN = 1 and d/dk is dN = -i.
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
  /** A layer and wavelength: dln y / dN of s and of p, re and im each, at [4 (i layers + layer)]. */
  private readonly perIndex: Float64Array;
  /** Working space, a layer: exp(-i phi), P, 1 / (1 + r P), and d/dN; then G_0 and the product of |1 + r P|^-2. */
  private readonly e: Float64Array;
  private readonly back: Float64Array;
  private readonly inverse: Float64Array;
  private readonly byIndex: Float64Array;
  private readonly top = new Float64Array(3);

  constructor(private readonly stack: StackParts) {
    const m = stack.layers;
    this.perIndex = new Float64Array(4 * stack.wavelengths * m);
    this.e = new Float64Array(2 * m);
    this.back = new Float64Array(2 * m);
    this.inverse = new Float64Array(2 * m);
    this.byIndex = new Float64Array(2 * m);
    for (let layer = 0; layer < m; layer++) this.refresh(layer);
  }

  /** To be called when a layer of the stack got new optical constants. */
  refresh(layer: number): void {
    const { stack, perIndex } = this;
    const n = stack.n[layer + 1];
    const k = stack.k[layer + 1];
    for (let i = 0; i < stack.wavelengths; i++) {
      const q = 2 * (i * (stack.layers + 2) + layer + 1);
      const qRe = stack.q[q];
      const qIm = stack.q[q + 1];
      const at = 4 * (i * stack.layers + layer);
      const size = qRe * qRe + qIm * qIm;
      // N / q, then N / q^2, then 2 / N - N / q^2.
      const overRe = (n[i] * qRe - k[i] * qIm) / size;
      const overIm = (-k[i] * qRe - n[i] * qIm) / size;
      const sRe = (overRe * qRe + overIm * qIm) / size;
      const sIm = (overIm * qRe - overRe * qIm) / size;
      const square = n[i] * n[i] + k[i] * k[i];
      perIndex[at] = sRe;
      perIndex[at + 1] = sIm;
      perIndex[at + 2] = (2 * n[i]) / square - sRe;
      perIndex[at + 3] = (2 * k[i]) / square - sIm;
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
        this.forward(i, p);
        const gRe = top[0];
        const gIm = top[1];
        reflectance[i] += share * (gRe * gRe + gIm * gIm);
        this.backwards(i, p, gRe, -gIm, false, 2 * share, thicknessNm, reflectanceSlopes);
        if (!powers || !transmittance || !transmittanceSlopes) continue;
        const t = share * powers[p][i] * passed * top[2];
        transmittance[i] += t;
        this.backwards(i, p, 0, 0, true, 2 * t, thicknessNm, transmittanceSlopes);
      }
    }
  }

  /** The recursion from the substrate up, keeping P and 1 / (1 + r P); leaves G_0 and the product of |1 + r P|^-2 in `top`. */
  private forward(i: number, p: number): void {
    const { stack, e, back, inverse, top } = this;
    const m = stack.layers;
    const r = stack.r[p];
    const at = 2 * i * (m + 1);
    let gRe = r[at + 2 * m];
    let gIm = r[at + 2 * m + 1];
    let downs = 1;
    for (let j = 2 * m - 2; j >= 0; j -= 2) {
      const pRe = gRe * e[j] - gIm * e[j + 1];
      const pIm = gRe * e[j + 1] + gIm * e[j];
      const rRe = r[at + j];
      const rIm = r[at + j + 1];
      const downRe = 1 + rRe * pRe - rIm * pIm;
      const downIm = rRe * pIm + rIm * pRe;
      const down = downRe * downRe + downIm * downIm;
      const share = down === 0 ? 0 : 1 / down;
      const vRe = downRe * share;
      const vIm = -downIm * share;
      back[j] = pRe;
      back[j + 1] = pIm;
      inverse[j] = vRe;
      inverse[j + 1] = vIm;
      gRe = (rRe + pRe) * vRe - (rIm + pIm) * vIm;
      gIm = (rRe + pRe) * vIm + (rIm + pIm) * vRe;
      downs *= share;
    }
    top[0] = gRe;
    top[1] = gIm;
    top[2] = downs;
  }

  /**
   * Down again from the derivative `a` with respect to G_0. `direct` adds what ln A of the transmittance takes from each layer
   * itself. Slopes get `factor` Re(d).
   */
  private backwards(
    i: number,
    p: number,
    aRe: number,
    aIm: number,
    direct: boolean,
    factor: number,
    thicknessNm: ArrayLike<number>,
    slopes: Float64Array,
  ): void {
    const { stack, e, back, inverse, byIndex, perIndex } = this;
    const { layers: m, wavelengths: count, turn } = stack;
    const r = stack.r[p];
    const at = 2 * i * (m + 1);
    // dln y / dN of this polarisation.
    const law = stack.polarisations[p] === "s" ? 0 : 2;
    let part = 4 * i * m;
    for (let j = 0; j < m; j++, part += 4) {
      const b = 2 * j;
      const rRe = r[at + b];
      const rIm = r[at + b + 1];
      const pRe = back[b];
      const pIm = back[b + 1];
      const vRe = inverse[b];
      const vIm = inverse[b + 1];
      // u = a / (1 + r P)^2
      const v2Re = vRe * vRe - vIm * vIm;
      const v2Im = 2 * vRe * vIm;
      const uRe = aRe * v2Re - aIm * v2Im;
      const uIm = aRe * v2Im + aIm * v2Re;
      const keepRe = 1 - rRe * rRe + rIm * rIm;
      const keepIm = -2 * rRe * rIm;
      const openRe = 1 - pRe * pRe + pIm * pIm;
      const openIm = -2 * pRe * pIm;
      let byRRe = uRe * openRe - uIm * openIm;
      let byRIm = uRe * openIm + uIm * openRe;
      let byPRe = uRe * keepRe - uIm * keepIm;
      let byPIm = uRe * keepIm + uIm * keepRe;
      if (direct) {
        const size = (1 + rRe) * (1 + rRe) + rIm * rIm;
        byRRe += (1 + rRe) / size - (pRe * vRe - pIm * vIm);
        byRIm += -rIm / size - (pRe * vIm + pIm * vRe);
        byPRe -= rRe * vRe - rIm * vIm;
        byPIm -= rRe * vIm + rIm * vRe;
      }
      // byPhi = -i byP P (and -i / 2 of the wave itself)
      const byPhiRe = byPRe * pIm + byPIm * pRe;
      const byPhiIm = -(byPRe * pRe - byPIm * pIm) - (direct ? 0.5 : 0);
      const t = 2 * (i * m + j);
      const turnRe = turn[t];
      const turnIm = turn[t + 1];
      slopes[j * count + i] += factor * (byPhiRe * turnRe - byPhiIm * turnIm);
      // dr = (1 - r^2) / 2 (dln y above - dln y below)
      const hRe = (byRRe * keepRe - byRIm * keepIm) / 2;
      const hIm = (byRRe * keepIm + byRIm * keepRe) / 2;
      const lawRe = perIndex[part + law];
      const lawIm = perIndex[part + law + 1];
      if (j > 0) {
        const aboveRe = perIndex[part - 4 + law];
        const aboveIm = perIndex[part - 4 + law + 1];
        byIndex[b - 2] += hRe * aboveRe - hIm * aboveIm;
        byIndex[b - 1] += hRe * aboveIm + hIm * aboveRe;
      }
      // dphi = 4 pi d / lambda (N / q) dN, and turn = 4 pi q / lambda, so dphi / dN = d turn N / q^2.
      const wayRe = thicknessNm[j] * (turnRe * perIndex[part] - turnIm * perIndex[part + 1]);
      const wayIm = thicknessNm[j] * (turnRe * perIndex[part + 1] + turnIm * perIndex[part]);
      byIndex[b] = byPhiRe * wayRe - byPhiIm * wayIm - (hRe * lawRe - hIm * lawIm);
      byIndex[b + 1] = byPhiRe * wayIm + byPhiIm * wayRe - (hRe * lawIm + hIm * lawRe);
      aRe = byPRe * e[b] - byPIm * e[b + 1];
      aIm = byPRe * e[b + 1] + byPIm * e[b];
    }
    if (m === 0) return;
    const rRe = r[at + 2 * m];
    const rIm = r[at + 2 * m + 1];
    if (direct) {
      const size = (1 + rRe) * (1 + rRe) + rIm * rIm;
      aRe += (1 + rRe) / size;
      aIm -= rIm / size;
    }
    const keepRe = 1 - rRe * rRe + rIm * rIm;
    const keepIm = -2 * rRe * rIm;
    const hRe = (aRe * keepRe - aIm * keepIm) / 2;
    const hIm = (aRe * keepIm + aIm * keepRe) / 2;
    const lastRe = perIndex[part - 4 + law];
    const lastIm = perIndex[part - 4 + law + 1];
    byIndex[2 * m - 2] += hRe * lastRe - hIm * lastIm;
    byIndex[2 * m - 1] += hRe * lastIm + hIm * lastRe;
    for (let j = 0; j < m; j++) {
      // dN = dn - i dk
      slopes[(m + j) * count + i] += factor * byIndex[2 * j];
      slopes[(2 * m + j) * count + i] += factor * byIndex[2 * j + 1];
    }
  }
}
