/**
 * How calibration sees light without knowing optics: one function from film to what is read of the coated cell. Built from
 * engine's coated wafer and the facet factor.
 */
import type { FacetFactor } from "./facet.ts";
import type { LightReading } from "./run.ts";

export interface LightLink {
  /** What a reading of this kind would be for film of an index and ln(thickness on the facet / nm); null where there is none. */
  expected(kind: LightReading["kind"], index: number, lnFacet: number): number | null;
  /** ln of the facet factor, and its sd. */
  lnFacetFactor: number;
  lnFacetSd: number;
}

/** Position of the minimum, nm, of a film of an index and a thickness on the facet, nm; null where there is none. */
export type MinimumOf = (index: number, facetThicknessNm: number) => number | null;
/** Weighted reflectance, percent, of the same; null outside what the optics know. */
export type WeightedOf = MinimumOf;

export function lightLink(minimumOf: MinimumOf, weightedOf: WeightedOf | null, facet: FacetFactor): LightLink {
  return {
    lnFacetFactor: Math.log(facet.mean),
    lnFacetSd: facet.sd / facet.mean,
    expected(kind, index, lnFacet) {
      if (kind === "reflectance_minimum_nm") return minimumOf(index, Math.exp(lnFacet));
      return weightedOf ? weightedOf(index, Math.exp(lnFacet)) : null;
    },
  };
}
