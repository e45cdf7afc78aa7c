/**
 * Coherent stacks: any number of layers with complex indices on a half-infinite substrate, any angle of incidence, s, p or
 * both. Gives reflectance, transmittance into the substrate and the absorptance of each layer.
 *
 * Method: the recursive form of the transfer matrix (Heavens, Optical Properties of Thin Solid Films; Byrnes,
 * arXiv:1603.02720). From the substrate outwards, the reflection coefficient looking down at each interface:
 *
 *   G_j = (r_j + P_(j+1)) / (1 + r_j P_(j+1)),    P_j = G_j exp(-2 i delta_j),    delta_j = 2 pi q_j d_j / lambda
 *
 * then from the light inwards the forward wave, A_(j+1) = A_j exp(-i delta_j) (1 + r_j) / (1 + r_j P_(j+1)), and the power
 * through each interface, Re(y_j (1 - G_j) conj(1 + G_j)) |A_j exp(-i delta_j)|^2 in units of the incident power, y being
 * the admittance. Only dying exponentials occur, so a layer of any thickness and absorption is safe where the product of
 * matrices overflows. A layer's absorptance is the difference of the powers at its two sides.
 */
import { finite, refuse } from "../errors.ts";
import { type Polarisation, writeNormalIndex, writeReflection } from "./fresnel.ts";

export interface StackLayer {
  n: number;
  k: number;
  thicknessNm: number;
}

/** Fractions of the incident power; reflectance + transmittance + sum(absorptance) = 1 to rounding. */
export interface StackLight {
  reflectance: number;
  /** Into the substrate. */
  transmittance: number;
  /** One number a layer, from the light inwards. */
  absorptance: number[];
}

export interface StackQuestion {
  wavelengthNm: number;
  /** In the incidence medium, from the normal, 0 <= angle < pi/2. */
  angleRad: number;
  /** Real index of the medium the light comes from. */
  incidenceIndex: number;
  /** From the light inwards. */
  layers: readonly StackLayer[];
  substrate: { n: number; k: number };
  polarisation: Polarisation | "both";
}

/**
 * Light in a coherent stack at one wavelength; "both" is the mean of s and p (unpolarised light).
 * Refuses values that are not finite ("not-a-number"), a wavelength or incidence index that is not positive, a negative
 * thickness or k, an angle outside [0, pi/2) ("stack-value").
 */
export function stackLight(question: StackQuestion): StackLight {
  checkQuestion(question);
  if (question.polarisation !== "both") return onePolarisation(question, question.polarisation);
  const s = onePolarisation(question, "s");
  // At normal incidence s and p are the same light.
  if (question.angleRad === 0) return s;
  const p = onePolarisation(question, "p");
  return {
    reflectance: (s.reflectance + p.reflectance) / 2,
    transmittance: (s.transmittance + p.transmittance) / 2,
    absorptance: s.absorptance.map((value, j) => (value + p.absorptance[j]) / 2),
  };
}

function onePolarisation(question: StackQuestion, polarisation: Polarisation): StackLight {
  const { layers, wavelengthNm } = question;
  const count = layers.length;
  const n = [question.incidenceIndex, ...layers.map((layer) => layer.n), question.substrate.n];
  const k = [0, ...layers.map((layer) => layer.k), question.substrate.k];
  const along = (question.incidenceIndex * Math.sin(question.angleRad)) ** 2;
  const q = new Float64Array(2 * (count + 2));
  for (let j = 0; j < count + 2; j++) writeNormalIndex(n[j], k[j], along, q, 2 * j);

  // r: interface coefficients; down: G_j at interface j; through: exp(-i delta_j) of layer j (1-based, as the media are).
  const r = new Float64Array(2 * (count + 1));
  const down = new Float64Array(2 * (count + 1));
  const through = new Float64Array(2 * (count + 1));
  /** P_(j+1) of interface j: what comes back from below, at the top of the layer under the interface. */
  const back = new Float64Array(2 * (count + 1));
  for (let j = count; j >= 0; j--) {
    const a = 2 * j;
    const b = a + 2;
    writeReflection(polarisation, n[j], k[j], q[a], q[a + 1], n[j + 1], k[j + 1], q[b], q[b + 1], r, a);
    if (j < count) {
      const turn = (2 * Math.PI * layers[j].thicknessNm) / wavelengthNm;
      const size = Math.exp(turn * q[b + 1]);
      const eRe = size * Math.cos(turn * q[b]);
      const eIm = -size * Math.sin(turn * q[b]);
      through[b] = eRe;
      through[b + 1] = eIm;
      const e2Re = eRe * eRe - eIm * eIm;
      const e2Im = 2 * eRe * eIm;
      back[a] = down[b] * e2Re - down[b + 1] * e2Im;
      back[a + 1] = down[b] * e2Im + down[b + 1] * e2Re;
    }
    const [gRe, gIm] = divide(
      r[a] + back[a],
      r[a + 1] + back[a + 1],
      1 + r[a] * back[a] - r[a + 1] * back[a + 1],
      r[a] * back[a + 1] + r[a + 1] * back[a],
    );
    down[a] = gRe;
    down[a + 1] = gIm;
  }

  const reflectance = down[0] * down[0] + down[1] * down[1];
  const [y0Re] = admittance(polarisation, n[0], k[0], q[0], q[1]);
  const absorptance: number[] = [];
  let above = 1 - reflectance;
  let waveRe = 1;
  let waveIm = 0;
  for (let j = 0; j <= count; j++) {
    // The forward wave just under interface j, in the medium j + 1.
    const a = 2 * j;
    const [tRe, tIm] = divide(
      1 + r[a],
      r[a + 1],
      1 + r[a] * back[a] - r[a + 1] * back[a + 1],
      r[a] * back[a + 1] + r[a + 1] * back[a],
    );
    const nextRe = waveRe * tRe - waveIm * tIm;
    const nextIm = waveRe * tIm + waveIm * tRe;
    const b = a + 2;
    const [yRe, yIm] = admittance(polarisation, n[j + 1], k[j + 1], q[b], q[b + 1]);
    if (j === count) {
      const transmittance = (yRe * (nextRe * nextRe + nextIm * nextIm)) / y0Re;
      return { reflectance, transmittance, absorptance };
    }
    // The same wave at the bottom of that layer, and the power that leaves there.
    waveRe = nextRe * through[b] - nextIm * through[b + 1];
    waveIm = nextRe * through[b + 1] + nextIm * through[b];
    const gRe = down[b];
    const gIm = down[b + 1];
    const netRe = 1 - gRe * gRe - gIm * gIm;
    const netIm = -2 * gIm;
    const below = ((yRe * netRe - yIm * netIm) * (waveRe * waveRe + waveIm * waveIm)) / y0Re;
    // A layer without extinction absorbs nothing, exactly; the difference would leave rounding noise.
    absorptance.push(layers[j].k === 0 ? 0 : above - below);
    above = below;
  }
  return { reflectance, transmittance: above, absorptance };
}

/** a / b for complex a, b; a node of a loss-free guided wave (b = 0) has no finite answer and is given as 0. */
function divide(aRe: number, aIm: number, bRe: number, bIm: number): [number, number] {
  const size = bRe * bRe + bIm * bIm;
  if (size === 0) return [0, 0];
  return [(aRe * bRe + aIm * bIm) / size, (aIm * bRe - aRe * bIm) / size];
}

/** Admittance for tangential fields, in units of that of vacuum: q for s, N^2 / q for p. */
function admittance(polarisation: Polarisation, n: number, k: number, qRe: number, qIm: number): [number, number] {
  return polarisation === "s" ? [qRe, qIm] : divide(n * n - k * k, -2 * n * k, qRe, qIm);
}

function checkQuestion({ wavelengthNm, angleRad, incidenceIndex, layers, substrate }: StackQuestion): void {
  if (!(finite(wavelengthNm, "wavelength") > 0)) refuse("stack-value", `wavelength ${wavelengthNm} nm is not positive`);
  if (!(finite(incidenceIndex, "incidence index") > 0)) {
    refuse("stack-value", `incidence index ${incidenceIndex} is not positive`);
  }
  if (!(finite(angleRad, "angle") >= 0 && angleRad < Math.PI / 2)) {
    refuse("stack-value", `angle ${angleRad} rad is outside 0 <= angle < pi/2`);
  }
  layers.forEach((layer, j) => {
    const place = `layer ${j + 1}`;
    if (!(finite(layer.thicknessNm, `${place} thickness`) >= 0)) {
      refuse("stack-value", `${place} has thickness ${layer.thicknessNm} nm, 0 or more is needed`);
    }
    checkIndex(layer, place);
  });
  checkIndex(substrate, "substrate");
}

function checkIndex({ n, k }: { n: number; k: number }, place: string): void {
  finite(n, `${place} n`);
  finite(k, `${place} k`);
  if (n <= 0 || k < 0) refuse("stack-value", `${place} has n ${n}, k ${k}; needs n > 0 and k >= 0`);
}
