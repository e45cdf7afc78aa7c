/**
 * Layers far thicker than the coherence of sunlight, in front of a surface: module glass and encapsulant. Intensities are
 * added, not amplitudes, with the absorption of each pass; the coherent optics stay inside the thin film below.
 *
 * Looking down through one interface (reflectance r) into a layer of one-pass transmittance a above something that reflects
 * R: the light that comes back is r + (1 - r)^2 a^2 R / (1 - r a^2 R), and the layer's far side receives (1 - r) a / (1 - r a^2 R)
 * (sum of the geometric series of passes). Applied layer by layer from the inside out.
 *
 * Interfaces between thick layers use their real indices: k of glass and encapsulant stays under 4e-3, which changes an
 * interface reflectance by less than 1e-5.
 */
import { refuse } from "../errors.ts";
import { type Material, onGrid } from "../materials/material.ts";
import type { Polarisation } from "./fresnel.ts";

export interface ThickLayer {
  material: Material;
  thicknessMm: number;
}

/** What a cover makes of a surface that reflects some of what reaches it. */
export interface CoveredLight {
  /** Fraction of the incident light that comes back out of the cover. */
  reflectance: number;
  /** Light that reaches the surface under the cover, all passes added, as a fraction of the incident light. */
  reach: number;
}

/** Thick layers on a wavelength grid, for light from outside (a real index) at one angle and polarisation. */
export class ThickLayers {
  /** Real index of the innermost layer, one number a wavelength: the medium the coherent film sees. */
  readonly innerIndex: Float64Array;
  /** Angle in that layer, radians, one number a wavelength. */
  readonly innerAngleRad: Float64Array;
  private readonly interfaces: Float64Array[] = [];
  private readonly passes: Float64Array[] = [];

  /** `layers` from outside inwards, at least one. Refuses none ("no-layers") and a thickness that is not >= 0 ("stack-value"). */
  constructor(
    wavelengthNm: Float64Array,
    layers: readonly ThickLayer[],
    outsideIndex = 1,
    angleRad = 0,
    polarisation: Polarisation = "s",
  ) {
    if (layers.length === 0) refuse("no-layers", "a cover needs at least one layer");
    const along = outsideIndex * Math.sin(angleRad);
    let above: Float64Array = new Float64Array(wavelengthNm.length).fill(outsideIndex);
    for (const { material, thicknessMm } of layers) {
      if (!(thicknessMm >= 0 && Number.isFinite(thicknessMm))) {
        refuse("stack-value", `${material.name} has thickness ${thicknessMm} mm, 0 or more is needed`);
      }
      const { n, k } = onGrid(material, wavelengthNm);
      this.interfaces.push(n.map((below, i) => interfaceReflectance(above[i], below, along, polarisation)));
      this.passes.push(
        n.map((index, i) => {
          const pathNm = (thicknessMm * 1e6) / Math.sqrt(1 - (along / index) ** 2);
          return Math.exp((-4 * Math.PI * k[i] * pathNm) / wavelengthNm[i]);
        }),
      );
      above = n;
    }
    this.innerIndex = above;
    this.innerAngleRad = above.map((index) => Math.asin(along / index));
  }

  /** The cover at grid point i over a surface of reflectance `below`, seen from inside the innermost layer. */
  over(i: number, below: number): CoveredLight {
    let reflectance = below;
    let reach = 1;
    for (let j = this.interfaces.length - 1; j >= 0; j--) {
      const r = this.interfaces[j][i];
      const a = this.passes[j][i];
      const back = a * a * reflectance;
      const series = 1 / (1 - r * back);
      reach *= (1 - r) * a * series;
      reflectance = r + (1 - r) * (1 - r) * back * series;
    }
    return { reflectance, reach };
  }
}

/** Power reflectance between two transparent media for `along` = n sin(angle), the same in both. */
function interfaceReflectance(na: number, nb: number, along: number, polarisation: Polarisation): number {
  const qa = Math.sqrt(na * na - along * along);
  const qb = Math.sqrt(nb * nb - along * along);
  const [a, b] = polarisation === "s" ? [qa, qb] : [na * na * qb, nb * nb * qa];
  return ((a - b) / (a + b)) ** 2;
}
