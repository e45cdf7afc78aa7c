/**
 * The ways light bounces off upright pyramids, as geometry: which facet is met at which angle. The fractions of light that
 * take each way are data and live in `pyramids.ts`.
 *
 * Four facets per pyramid, tilted by the facet angle b from the wafer plane, facing +x, -x, +y, -y. Light comes straight down
 * and is mirrored at each facet it meets; a way is the list of facets, the first always "+x" by symmetry. The angle at each
 * bounce follows from the facet normals, for any b: b, then 180 - 3b on the opposite facet, and so on; so does the direction
 * in which the light leaves, which thick layers in front ask for.
 */
import { radians } from "../constants.ts";
import { finite, refuse } from "../errors.ts";

export type Facet = "+x" | "-x" | "+y" | "-y";
type Vector = readonly [number, number, number];

/** One way of bouncing as the optics need it. */
export interface BouncePath {
  /** Angle of incidence on each facet met, radians, in order. */
  anglesRad: readonly number[];
  fraction: number;
  /** Polar angle, radians from the wafer's normal, in which the light leaves after the last bounce; straight up when left out. */
  exitRad?: number;
}

/** Outward normal of a facet tilted by `facetAngleRad` from the wafer plane. */
export function facetNormal(facet: Facet, facetAngleRad: number): Vector {
  const across = Math.sin(facetAngleRad) * (facet[0] === "+" ? 1 : -1);
  const up = Math.cos(facetAngleRad);
  return facet[1] === "x" ? [across, 0, up] : [0, across, up];
}

/** Direction of travel after a mirror reflection on a plane with this normal. */
export function mirrored(direction: Vector, normal: Vector): Vector {
  const along = 2 * dot(direction, normal);
  return [direction[0] - along * normal[0], direction[1] - along * normal[1], direction[2] - along * normal[2]];
}

export function dot(a: Vector, b: Vector): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

/** A way on pyramids of one facet angle: the angles met and the direction left in, radians. */
export interface WayGeometry {
  anglesRad: number[];
  /** From the wafer's normal; over pi/2 the light still travels down. */
  exitRad: number;
}

/**
 * A way followed facet by facet, for light that comes straight down on pyramids of the given facet angle (degrees). A facet the
 * light cannot meet at this angle, because it travels away from its face, ends the way there: below 54 deg light that bounced
 * on two opposite facets no longer meets the first one again.
 * Refuses a facet angle outside 45 to 60 deg ("facet-angle"), far outside where such ways describe pyramids.
 */
export function wayGeometry(facets: readonly Facet[], facetAngleDeg: number): WayGeometry {
  finite(facetAngleDeg, "facet angle");
  if (!(facetAngleDeg > 45 && facetAngleDeg < 60)) {
    refuse("facet-angle", `facet angle ${facetAngleDeg} deg; between 45 and 60 deg is needed`);
  }
  const angleRad = radians(facetAngleDeg);
  const anglesRad: number[] = [];
  let direction: Vector = [0, 0, -1];
  for (const facet of facets) {
    const normal = facetNormal(facet, angleRad);
    const cosine = -dot(direction, normal);
    if (cosine <= 0) break;
    anglesRad.push(Math.acos(Math.min(1, cosine)));
    direction = mirrored(direction, normal);
  }
  return { anglesRad, exitRad: Math.acos(Math.max(-1, Math.min(1, direction[2]))) };
}

/** The angles of incidence of `wayGeometry` alone, radians. Refuses as it does. */
export function bounceAngles(facets: readonly Facet[], facetAngleDeg: number): number[] {
  return wayGeometry(facets, facetAngleDeg).anglesRad;
}
