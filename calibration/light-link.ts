/**
 * How calibration sees light without knowing optics: one function from film to the reflectance minimum of the coated cell,
 * with its slopes. Built from engine's coated wafer and the facet factor.
 */
import type { FacetFactor } from "./facet.ts";

export interface LightLink {
  /** At an index and ln(witness thickness / nm): the minimum, its slopes, and its sd from the facet factor alone (nm). */
  minimum(
    index: number,
    lnThickness: number,
  ): { valueNm: number; dIndex: number; dLnThickness: number; facetSd: number } | null;
}

/** Position of the minimum, nm, of a film of an index and a thickness on the facet, nm; null where there is none. */
export type MinimumOf = (index: number, facetThicknessNm: number) => number | null;

/** Slopes by central differences: the curve is smooth over 1 nm and 0.005, and far from its rounding. */
export function lightLink(minimumOf: MinimumOf, facet: FacetFactor): LightLink {
  return {
    minimum(index, lnThickness) {
      const d = Math.exp(lnThickness) * facet.mean;
      const value = minimumOf(index, d);
      const up = minimumOf(index, d + 0.5);
      const down = minimumOf(index, d - 0.5);
      const more = minimumOf(index + 0.005, d);
      const less = minimumOf(index - 0.005, d);
      if (value === null || up === null || down === null || more === null || less === null) return null;
      const dLnThickness = (up - down) * d;
      return {
        valueNm: value,
        dIndex: (more - less) / 0.01,
        dLnThickness,
        facetSd: Math.abs(dLnThickness) * (facet.sd / facet.mean),
      };
    },
  };
}
