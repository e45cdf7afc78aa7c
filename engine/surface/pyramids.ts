/**
 * Upright pyramids as alkaline etching leaves them: how much light bounces which way, as data, and the sum over the ways.
 *
 * R = sum over ways f_i * product over bounces of R(angle_ij), with the unpolarised mean taken at each bounce: the planes of
 * incidence of successive bounces differ, and carrying s and p through separately as if they coincided is too much by 1.7 %
 * absolute on bare random pyramids of 54.74 deg. Light not reflected at a bounce is absorbed in the film or enters the silicon.
 *
 * What the mean costs, measured against the field carried from facet to facet (test/engine/surface/polarisation.test.ts);
 * weighted reflectance too low by, % absolute (photons, 300-1100 nm, in air):
 *
 *   facet angle, deg                        50     52     54.74   56
 *   random, bare silicon                    0.62   0.27   0.03    0.28
 *   random, 73 nm of index 2.05             0.15   0.09   0.03    0.03
 *   regular, bare silicon                   0.81   0.55   0.49    1.05
 *   regular, 73 nm of index 2.05            0.16   0.11   0.06    0.10
 *
 * Ways whose bounces share one plane of incidence are taken too low; at 54.74 deg the others, taken too high, cancel most of it.
 * At 52 deg it runs from 0.06 to 0.13 over films of index 1.95 to 2.15 and 60 to 85 nm, so it moves a comparison of two films
 * by less than 0.1.
 *
 * The fractions depend on the facet angle: flatter facets send more light out after two bounces, and below 54 deg light from
 * two opposite facets no longer meets the first one again. Those of random pyramids were ray traced for this project
 * (test/support/pyramid-rays.ts regenerates them): apexes at random places, heights spread over 0.7 of their mean distance, 240
 * patches of 26 x 26 pyramids with 2000 rays each an angle; standard error 0.0009 in the largest. From such a patch to the next
 * a fraction f varies by about 0.027 sqrt(f (1 - f)). Equal heights or twice the spread change no fraction by more than 0.004
 * (60 patches). The literature differs (nearer one half for the double bounce, from memory), so treat the fractions as one
 * model's answer.
 */
import { crystalFacetAngleDeg, radians } from "../constants.ts";
import { finite, refuse } from "../errors.ts";
import { piecewiseLinear } from "../numerics/interpolate.ts";
import { type BouncePath, type Facet, wayGeometry } from "./bounce-paths.ts";

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
  { facets: ["+x", "-x"], fractions: [0.7946, 0.7734, 0.7546, 0.738, 0.7242, 0.6581, 0.6329, 0.5314] },
  { facets: ["+x", "-x", "+x"], fractions: [0, 0, 0, 0, 0, 0.0571, 0.0791, 0.1699] },
  { facets: ["+x", "+y", "-x"], fractions: [0.1717, 0.1832, 0.192, 0.1989, 0.2034, 0.2057, 0.2064, 0.2081] },
  { facets: ["+x", "+y", "-y", "-x"], fractions: [0.0259, 0.0328, 0.0403, 0.047, 0.0538, 0.0549, 0.0552, 0.056] },
  { facets: ["+x", "+y", "-y"], fractions: [0.0071, 0.0102, 0.013, 0.016, 0.0185, 0.018, 0.0178, 0.017] },
  { facets: ["+x", "+y", "-y", "+y", "-x"], fractions: [0, 0, 0, 0, 0, 0.0041, 0.0056, 0.0112] },
  { facets: ["+x", "+y", "-y", "+y"], fractions: [0, 0, 0, 0, 0, 0.002, 0.0028, 0.0064] },
];

/**
 * Equal pyramids side by side, in closed form. Across a valley at any height the cut is a V-groove, and all V-grooves are alike.
 * Light that falls on one flank at a distance s from the valley's line (1 at its edge) is mirrored to the other flank at
 * s / (4 sin^2 b - 1), and back to the first at s cos b / cos 5b, where it misses when that is beyond 1: so cos 5b / cos b of the
 * light bounces a third time above 54 deg (1/9 at the crystal's 54.74 deg, as is common knowledge of the trade), none below,
 * none a fourth time in the range carried here.
 */
function regularWaysAt(facetAngleDeg: number): { facets: readonly Facet[]; fraction: number }[] {
  const b = radians(facetAngleDeg);
  const thrice = Math.max(0, Math.cos(5 * b) / Math.cos(b));
  return [
    { facets: ["+x", "-x"], fraction: 1 - thrice },
    { facets: ["+x", "-x", "+x"], fraction: thrice },
  ];
}

/** Facet angles, degrees, for which there are bounce paths. */
export const facetAngleRange: readonly [number, number] = [50, 56];

/**
 * Bounce paths of an arrangement at a facet angle (degrees from the wafer plane); the fractions sum to 1 exactly.
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
  const ways = (arrangement === "regular" ? regularWaysAt(facetAngleDeg) : randomWaysAt(facetAngleDeg)).filter(
    (way) => way.fraction > 0,
  );
  const total = ways.reduce((sum, way) => sum + way.fraction, 0);
  let given = 0;
  return ways.map((way, i) => {
    // The last way takes what is left, so that the fractions sum to 1 without rounding.
    const fraction = i === ways.length - 1 ? 1 - given : way.fraction / total;
    given += fraction;
    return { ...wayGeometry(way.facets, facetAngleDeg), fraction };
  });
}

function randomWaysAt(facetAngleDeg: number): { facets: readonly Facet[]; fraction: number }[] {
  return randomWays.map(({ facets, fractions }) => ({
    facets,
    fraction: piecewiseLinear(tracedFacetAnglesDeg, fractions)(facetAngleDeg),
  }));
}
