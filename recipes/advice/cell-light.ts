/**
 * From film on a polished witness to the light of the coated cell: the optics of the declared wafer joined with the facet
 * factor and what is known of it. Also says whether a reflectance goal can be judged at all: on pyramids it cannot until a
 * reflectance minimum on a textured cell has pinned the factor.
 */
import type { FacetFactor } from "../../calibration/index.ts";
import type { CoatedWafer } from "../../engine/index.ts";
import type { Line } from "../line/line.ts";

export interface CellLight {
  wafer: CoatedWafer;
  surface: "polished" | "pyramids";
  facet: FacetFactor;
  /** Null when reflectance can be judged; else why not, with the measurement that would settle it. */
  unjudged: string | null;
  /** Percent, of film of this index and thickness on the surface named. Null where the optics have no answer. */
  weighted(index: number, facetNm: number): number | null;
  minimum(index: number, facetNm: number): number | null;
}

/** Indices the measured silicon-nitride family can speak for, with a margin inside engine's refusal. */
const familyRange: readonly [number, number] = [1.81, 2.29];

/** What light on the cell would be, for calibration; each null outside what the optics know. */
export interface FilmOptics {
  minimumOf(index: number, facetNm: number): number | null;
  weightedOf(index: number, facetNm: number): number | null;
}

/** The optics as calibration asks them: tens of thousands of times where many runs have only their light read. */
export function filmOptics(wafer: CoatedWafer): FilmOptics {
  const table = wafer.table();
  return {
    minimumOf: (index, facetNm) => (known(index, facetNm) ? table.reflectanceMinimumNm(index, facetNm) : null),
    weightedOf: (index, facetNm) => (known(index, facetNm) ? table.weightedReflectancePercent(index, facetNm) : null),
  };
}

const known = (index: number, facetNm: number) =>
  index > familyRange[0] && index < familyRange[1] && facetNm > 10 && facetNm < 200;

/** A facet factor this well known (relative) judges a reflectance goal: 2 % is about 10 nm of the minimum. */
const pinned = 0.02;

export function cellLight(line: Line, wafer: CoatedWafer, facet: FacetFactor): CellLight {
  const { minimumOf, weightedOf } = filmOptics(wafer);
  const surface = line.wafer.surface;
  const judged = surface === "polished" || facet.runs > 0 || facet.sd / facet.mean < pinned;
  return {
    wafer,
    surface,
    facet,
    unjudged: judged
      ? null
      : `Film on a facet over film on a witness is only declared (${facet.mean.toFixed(2)} sd ${facet.sd.toFixed(2)}), never measured: reflectance on textured cells cannot be judged yet. A reflectance minimum read on a textured cell of a run whose witness is also measured would settle it.`,
    weighted: weightedOf,
    minimum: minimumOf,
  };
}
