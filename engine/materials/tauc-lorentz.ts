/**
 * The Tauc-Lorentz model of amorphous films: Lorentz oscillators cut off at the optical gap by Tauc's law. Its eps1 is the
 * exact Kramers-Kronig integral of its eps2, in closed form.
 *
 * eps2(E) = sum A E0 C (E - Eg)^2 / (E ((E^2 - E0^2)^2 + C^2 E^2)) above the gap Eg, 0 below.
 * Source: G. E. Jellison and F. A. Modine, Appl. Phys. Lett. 69, 371 (1996), erratum 69, 2137 (1996).
 *
 * Instead of their eps1, whose printed form needs an erratum and 4 E0^2 > C^2, the integral
 * (2 A E0 C / pi) P int (x - Eg)^2 / ((x^2 - q1)(x^2 - q2)(x^2 - E^2)) dx from Eg is taken by partial fractions in x^2, q1 and q2
 * being the roots of the oscillator's denominator. With w the residue at a root q and r = sqrt(q), each root gives
 * w ((q + Eg^2) ln((r + Eg)/(Eg - r)) / (2 r) + Eg ln(Eg^2 - q)). It equals theirs and holds for overdamped oscillators too.
 */
import { finite, refuse } from "../errors.ts";
import { logarithm, product, quotient, scaled, squareRoot, sum } from "./complex.ts";
import { type Dielectric, indexFrom } from "./complex-index.ts";
import { formulaMaterial } from "./dispersion.ts";
import type { Material } from "./material.ts";
import { photonEnergyEv } from "./photon-energy.ts";

/** One oscillator, all in eV: amplitude A > 0, centre E0 > 0, width C > 0. */
export interface TaucLorentzOscillator {
  amplitudeEv: number;
  centreEv: number;
  widthEv: number;
}

export interface TaucLorentz {
  /** Optical gap, eV, of all oscillators; 0 or more. */
  gapEv: number;
  /** eps1 at infinite energy, dimensionless, above 0; 1 where the oscillators carry everything. */
  epsilonInfinity: number;
  /** At least one. */
  oscillators: readonly TaucLorentzOscillator[];
}

/** Two roots this close (relative, in C) are drawn apart: the partial fractions lose their digits where they meet. */
const critical = 1e-6;

/** What one oscillator adds to eps1 at a photon energy E > 0. */
function dispersionOf({ amplitudeEv, centreEv, widthEv }: TaucLorentzOscillator, gap: number, energy: number): number {
  const at = (width: number): number => {
    const shift = width * width * (width * width - 4 * centreEv * centreEv);
    const q = centreEv * centreEv - (width * width) / 2;
    const integral = shift > 0 ? overdamped(q, Math.sqrt(shift) / 2) : underdamped(q, Math.sqrt(-shift) / 2);
    return ((2 * amplitudeEv * centreEv * width) / Math.PI) * integral;
  };

  /** Roots q +- d, both negative. */
  function overdamped(q: number, d: number): number {
    // The product of the roots is E0^4, so the small one needs no difference of large ones.
    const far = q - d;
    const near = centreEv ** 4 / far;
    const root = (own: number, other: number): number => {
      const s = Math.sqrt(-own);
      const weight = 1 / ((own - other) * (own - energy * energy));
      const integral = (Math.PI / 2 - Math.atan(gap / s)) / s;
      return weight * ((own + gap * gap) * integral + gap * Math.log(gap * gap - own));
    };
    return root(far, near) + root(near, far) + photonRoot(q, d * d);
  }

  /** Roots q +- i d: twice the real part of the upper one. */
  function underdamped(q: number, d: number): number {
    const root = { re: q, im: d };
    const r = squareRoot(root);
    // weight = 1 / (2 i d (q + i d - E^2))
    const inverseWeight = { re: -2 * d * d, im: 2 * d * (q - energy * energy) };
    const log = logarithm(quotient({ re: gap + r.re, im: r.im }, { re: gap - r.re, im: -r.im }));
    const first = product(sum(root, { re: gap * gap, im: 0 }), quotient(log, scaled(r, 2)));
    const second = scaled(logarithm({ re: gap * gap - q, im: -d }), gap);
    const upper = quotient(sum(first, second), inverseWeight);
    return 2 * upper.re + photonRoot(q, -d * d);
  }

  /** The root E^2, with the principal value; finite at the gap. `d2` is the square of half the distance of the others. */
  function photonRoot(q: number, d2: number): number {
    const weight = 1 / ((energy * energy - q) ** 2 - d2);
    const above = (energy + gap) ** 2 * Math.log(energy + gap);
    const below = energy === gap ? 0 : (energy - gap) ** 2 * Math.log(Math.abs(energy - gap));
    return (weight * (above - below)) / (2 * energy);
  }

  const ratio = widthEv / (2 * centreEv);
  if (Math.abs(ratio - 1) >= critical) return at(widthEv);
  const apart = 4 * centreEv * critical;
  const low = at(2 * centreEv - apart);
  const high = at(2 * centreEv + apart);
  // eps1 is smooth in C, so the straight line between is good to the square of the step.
  return low + ((widthEv - 2 * centreEv + apart) / (2 * apart)) * (high - low);
}

/**
 * Dielectric function at a photon energy in eV. Refuses values that are not finite ("not-a-number"), an energy, amplitude,
 * centre, width or epsilon-infinity that is not above 0, a negative gap, no oscillator ("material-value").
 */
export function taucLorentz(model: TaucLorentz, energyEv: number): Dielectric {
  checkTaucLorentz(model);
  finite(energyEv, "photon energy");
  if (energyEv <= 0) refuse("material-value", `photon energy ${energyEv} eV is not above 0`);
  return dielectric(model, energyEv);
}

function dielectric({ gapEv, epsilonInfinity, oscillators }: TaucLorentz, energyEv: number): Dielectric {
  let eps1 = epsilonInfinity;
  let eps2 = 0;
  for (const oscillator of oscillators) {
    eps1 += dispersionOf(oscillator, gapEv, energyEv);
    if (energyEv <= gapEv) continue;
    const { amplitudeEv, centreEv, widthEv } = oscillator;
    const detuning = (energyEv - centreEv) * (energyEv + centreEv);
    const resonance = detuning * detuning + (widthEv * energyEv) ** 2;
    eps2 += (amplitudeEv * centreEv * widthEv * (energyEv - gapEv) ** 2) / (resonance * energyEv);
  }
  return { eps1, eps2 };
}

function checkTaucLorentz({ gapEv, epsilonInfinity, oscillators }: TaucLorentz): void {
  const positive = (value: number, what: string): void => {
    finite(value, what);
    if (value <= 0) refuse("material-value", `Tauc-Lorentz: ${what} ${value} is not above 0`);
  };
  finite(gapEv, "gap");
  if (gapEv < 0) refuse("material-value", `Tauc-Lorentz: gap ${gapEv} eV is negative`);
  positive(epsilonInfinity, "epsilon-infinity");
  if (oscillators.length === 0) refuse("material-value", "Tauc-Lorentz: at least one oscillator is needed");
  for (const { amplitudeEv, centreEv, widthEv } of oscillators) {
    positive(amplitudeEv, "amplitude");
    positive(centreEv, "centre");
    positive(widthEv, "width");
  }
}

/**
 * A material by the Tauc-Lorentz model, known in the range (nm) it was fitted on. Refuses as `taucLorentz`, a range that is none
 * ("material-range"), wavelengths outside it ("outside-table"), and those at which eps1 <= 0 without absorption
 * ("material-value").
 */
export function taucLorentzMaterial(
  given: TaucLorentz & { rangeNm: readonly [number, number]; name?: string; source?: string },
): Material {
  checkTaucLorentz(given);
  const { name = "Tauc-Lorentz film", source = "Tauc-Lorentz formula", rangeNm } = given;
  return formulaMaterial(name, source, rangeNm, (wavelengthNm) =>
    indexFrom(dielectric(given, photonEnergyEv(wavelengthNm)), name),
  );
}
