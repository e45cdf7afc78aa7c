/**
 * Upright pyramids as alkaline etching leaves them: how much light bounces which way, as data, and the sum over the ways.
 *
 * R = sum over ways f_i * product over bounces of R(angle_ij), with the unpolarised mean taken at each bounce: the planes of
 * incidence of successive bounces differ, and carrying s and p through separately as if they coincided is wrong by almost
 * 2 % absolute on bare random pyramids. Light not reflected at a bounce is absorbed in the film or enters the silicon there.
 *
 * The fractions depend on the facet angle: flatter facets send more light out after two bounces, and below 54 deg light from
 * two opposite facets no longer meets the first one again. They were ray traced for this project (test/support/pyramid-rays.ts
 * regenerates them): apexes at random places, heights spread over 0.7 of their mean distance, 150 000 rays an angle, sampling
 * error about 0.002 in the largest. Equal heights or twice the spread change no fraction by more than 0.01. The literature differs
 * (nearer one half for the double bounce, from memory), so treat the fractions as one model's answer.
 */
import { crystalFacetAngleDeg } from "../constants.ts";
import { finite, refuse } from "../errors.ts";
import { piecewiseLinear } from "../numerics/interpolate.ts";
import { type BouncePath, bounceAngles, type Facet } from "./bounce-paths.ts";

export type Arrangement = "random" | "regular";

/** Facet angles, degrees, at which the fractions of random pyramids were traced; straight lines in between. */
export const tracedFacetAnglesDeg: readonly number[] = [50, 51, 52, 53, 54, crystalFacetAngleDeg, 55, 56];

/** A way of bouncing, and the fraction of light that takes it at each traced facet angle (ways under 0.001 left out). */
export interface TracedWay {
  facets: readonly Facet[];
  fractions: readonly number[];
}

/** Ways on random upright pyramids. Source: ray tracing made for this project, see above. */
export const randomWays: readonly TracedWay[] = [
  { facets: ["+x", "-x"], fractions: [0.796, 0.7718, 0.752, 0.7351, 0.7213, 0.6554, 0.6303, 0.5304] },
  { facets: ["+x", "-x", "+x"], fractions: [0, 0, 0, 0, 0, 0.0556, 0.0773, 0.166] },
  { facets: ["+x", "+y", "-x"], fractions: [0.1716, 0.1863, 0.1973, 0.2043, 0.2091, 0.2118, 0.213, 0.2154] },
  { facets: ["+x", "+y", "-y", "-x"], fractions: [0.0244, 0.0314, 0.0375, 0.045, 0.0515, 0.0533, 0.0534, 0.0548] },
  { facets: ["+x", "+y", "-y"], fractions: [0.0074, 0.0102, 0.0131, 0.0154, 0.0181, 0.0184, 0.018, 0.0171] },
  { facets: ["+x", "+y", "-y", "+y", "-x"], fractions: [0, 0, 0, 0, 0, 0.0037, 0.0052, 0.01] },
  { facets: ["+x", "+y", "-y", "+y"], fractions: [0, 0, 0, 0, 0, 0.0018, 0.0028, 0.0063] },
];

/**
 * Equal pyramids side by side: at 54.74 deg 8/9 of the light bounces twice and 1/9 three times (closed form of the facet's
 * geometry; common practice). Kept at every facet angle; below 54 deg the third bounce does not happen.
 */
const regularWays: readonly { facets: readonly Facet[]; fraction: number }[] = [
  { facets: ["+x", "-x"], fraction: 8 / 9 },
  { facets: ["+x", "-x", "+x"], fraction: 1 / 9 },
];

/** Facet angles, degrees, for which there are bounce paths. */
export const facetAngleRange: readonly [number, number] = [50, 56];

/**
 * Bounce paths of an arrangement at a facet angle (degrees from the wafer plane); the fractions sum to 1.
 * Refuses an angle outside `facetAngleRange` ("facet-angle").
 */
export function pyramidPaths(arrangement: Arrangement, facetAngleDeg: number = crystalFacetAngleDeg): BouncePath[] {
  finite(facetAngleDeg, "facet angle");
  if (facetAngleDeg < facetAngleRange[0] || facetAngleDeg > facetAngleRange[1]) {
    refuse(
      "facet-angle",
      `facet angle ${facetAngleDeg} deg; bounce paths are known from ${facetAngleRange[0]} to ${facetAngleRange[1]} deg`,
      { hint: "alkaline texture measures 50 to 55 deg; the crystal's own angle is 54.74 deg" },
    );
  }
  const ways = arrangement === "regular" ? regularWays : randomWaysAt(facetAngleDeg);
  const total = ways.reduce((sum, way) => sum + way.fraction, 0);
  return ways
    .filter((way) => way.fraction > 0)
    .map((way) => ({ anglesRad: bounceAngles(way.facets, facetAngleDeg), fraction: way.fraction / total }));
}

function randomWaysAt(facetAngleDeg: number): { facets: readonly Facet[]; fraction: number }[] {
  return randomWays.map(({ facets, fractions }) => ({
    facets,
    fraction: piecewiseLinear(tracedFacetAnglesDeg, fractions)(facetAngleDeg),
  }));
}
