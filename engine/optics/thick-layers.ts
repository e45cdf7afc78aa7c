/**
 * Layers far thicker than the coherence of sunlight, in front of a surface: module glass and encapsulant, or any others.
 * Intensities are added, not amplitudes, with the absorption of each pass; the coherent optics stay inside the thin film below.
 *
 * Layer j has the interface r_j above it and lets a_j through on one pass. With D_j the light going down at its top and U_j the
 * light going up at its bottom, all passes added,
 *
 *   D_j = (1 - r_j) a_(j-1) D_(j-1) + r_j a_j U_j,      U_(j-1) = (1 - r_j) a_j U_j + r_j a_(j-1) D_(j-1),
 *
 * solved from the side where one of the two is known (the sum of the geometric series of passes). What lies below the last
 * layer takes all that arrives there: the caller joins it on.
 *
 * Interfaces between thick layers use their real indices: k of glass and encapsulant stays under 4e-3, which changes an
 * interface reflectance by less than 1e-5. Up to the k accepted here it is below 5e-4, and such a layer is all but black.
 */
import { refuse } from "../errors.ts";
import { type Material, type OpticalConstantsOnGrid, onGrid } from "../materials/material.ts";
import type { Polarisation } from "./fresnel.ts";

export interface ThickLayer {
  material: Material;
  thicknessMm: number;
}

/** Light through all layers in one direction, fractions of what was sent in. `through + back + sum(absorbed) = 1`. */
export interface ThickLight {
  /** Leaves at the far side. */
  through: number;
  /** Comes back out at the side it was sent in. */
  back: number;
  /** One number a layer, outermost first. */
  absorbed: number[];
}

/** Most extinction a thick layer may have, see above. */
const mostExtinction = 0.05;

/** Thick layers on a wavelength grid (nm), outermost first, at least one; outside is a medium of index 1. */
export class ThickLayers {
  /** Real index of the innermost layer, one number a wavelength: the medium the coherent film sees. */
  readonly innerIndex: Float64Array;
  private readonly constants: OpticalConstantsOnGrid[];
  /** Working space: interface reflectances and pass transmittances of the layers. */
  private readonly r: Float64Array;
  private readonly a: Float64Array;
  /** Working space: the ratio of the two directions in each layer. */
  private readonly ratio: Float64Array;

  /**
   * Refuses an empty list ("no-layers"), a thickness that is not >= 0, an index under 1 and an extinction over 0.05
   * ("stack-value"), and wavelengths a material is not known at ("outside-table").
   */
  constructor(
    private readonly wavelengthNm: Float64Array,
    private readonly layers: readonly ThickLayer[],
  ) {
    if (layers.length === 0) refuse("no-layers", "a cover needs at least one layer");
    this.constants = layers.map(({ material, thicknessMm }) => {
      if (!(thicknessMm >= 0 && Number.isFinite(thicknessMm))) {
        refuse("stack-value", `${material.name} has thickness ${thicknessMm} mm, 0 or more is needed`);
      }
      const on = onGrid(material, wavelengthNm);
      checkClear(material.name, wavelengthNm, on);
      return on;
    });
    this.innerIndex = this.constants[layers.length - 1].n;
    this.r = new Float64Array(layers.length);
    this.a = new Float64Array(layers.length);
    this.ratio = new Float64Array(layers.length);
  }

  /**
   * Light sent in from outside at grid place i. `along` is the sine of its angle there, under 1: n sin(angle) is the same in
   * every layer. `back` is the reflection of the layers over something black; `through` arrives below.
   */
  down(i: number, along: number, polarisation: Polarisation): ThickLight {
    const { r, a, ratio } = this;
    this.aim(i, along, polarisation);
    const last = r.length - 1;
    // U_j = ratio_j D_j; black below.
    ratio[last] = 0;
    for (let j = last; j > 0; j--) ratio[j - 1] = a[j - 1] * beyond(r[j], a[j] * ratio[j]);
    const absorbed: number[] = [];
    let arriving = 1;
    for (let j = 0; j <= last; j++) {
      const going = (arriving * (1 - r[j])) / (1 - r[j] * a[j] * ratio[j]);
      absorbed.push((1 - a[j]) * going * (1 + ratio[j]));
      arriving = a[j] * going;
    }
    return { through: arriving, back: beyond(r[0], a[0] * ratio[0]), absorbed };
  }

  /**
   * Light sent up from the bottom of the innermost layer at grid place i; `along` = n sin(angle), less than the index there.
   * Where a layer's index, or 1 outside, is less than `along`, the light is reflected totally.
   */
  up(i: number, along: number, polarisation: Polarisation): ThickLight {
    const { r, a, ratio } = this;
    this.aim(i, along, polarisation);
    const last = r.length - 1;
    // D_j = ratio_j U_j; nothing comes in from outside.
    ratio[0] = a[0] * r[0];
    for (let j = 1; j <= last; j++) ratio[j] = a[j] * beyond(r[j], a[j - 1] * ratio[j - 1]);
    const absorbed = new Array<number>(r.length).fill(0);
    let going = 1;
    for (let j = last; j >= 0; j--) {
      absorbed[j] = (1 - a[j]) * going * (1 + ratio[j]);
      const arriving = a[j] * going;
      if (r[j] === 1) going = 0;
      else going = (arriving * (1 - r[j])) / (1 - r[j] * (j > 0 ? a[j - 1] * ratio[j - 1] : 0));
    }
    return { through: going, back: a[last] * ratio[last], absorbed };
  }

  private aim(i: number, along: number, polarisation: Polarisation): void {
    let above = 1;
    for (let j = 0; j < this.layers.length; j++) {
      const n = this.constants[j].n[i];
      this.r[j] = interfaceReflectance(above, n, along, polarisation);
      // A layer that this light cannot travel in is never reached: both its interfaces reflect all.
      const pathNm = (this.layers[j].thicknessMm * 1e6) / Math.sqrt(1 - (along / n) ** 2);
      this.a[j] = along < n ? Math.exp((-4 * Math.PI * this.constants[j].k[i] * pathNm) / this.wavelengthNm[i]) : 0;
      above = n;
    }
  }
}

/** Reflectance of an interface with something behind it that sends back a part `back`, all passes added. */
function beyond(interfaceReflects: number, back: number): number {
  // Total reflection, where the quotient may be 0/0.
  if (interfaceReflects === 1) return 1;
  return interfaceReflects + ((1 - interfaceReflects) ** 2 * back) / (1 - interfaceReflects * back);
}

/** Power reflectance between two transparent media for `along` = n sin(angle), the same in both; 1 for total reflection. */
function interfaceReflectance(na: number, nb: number, along: number, polarisation: Polarisation): number {
  if (along >= na || along >= nb) return 1;
  const qa = Math.sqrt(na * na - along * along);
  const qb = Math.sqrt(nb * nb - along * along);
  const [a, b] = polarisation === "s" ? [qa, qb] : [na * na * qb, nb * nb * qa];
  return ((a - b) / (a + b)) ** 2;
}

/** A thick layer is a window: light from outside must get into it, and through it. */
function checkClear(name: string, wavelengthNm: Float64Array, { n, k }: OpticalConstantsOnGrid): void {
  for (let i = 0; i < wavelengthNm.length; i++) {
    if (n[i] >= 1 && k[i] >= 0 && k[i] <= mostExtinction) continue;
    refuse(
      "stack-value",
      `thick layer ${name} has n ${n[i]}, k ${k[i]} at ${wavelengthNm[i]} nm; needs n of 1 or more and k of 0 to ${mostExtinction}`,
      { hint: "a thick layer is a clear one, as glass; thin absorbing layers belong into the film" },
    );
  }
}
