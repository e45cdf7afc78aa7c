/**
 * A small ray tracer for random upright pyramids, which regenerates the fractions of light that bounce each way. The surface
 * is the union of endless square pyramids whose apexes lie at random places and heights; light comes straight down and is
 * mirrored until it leaves. The facets it meets are named after the first one ("+x") and the first turn aside ("+y"), which
 * folds the symmetric ways into one.
 */
import { random as seeded } from "../../engine/index.ts";

type Vector = [number, number, number];

export interface TraceOptions {
  facetAngleDeg: number;
  rays: number;
  /** Apex heights are uniform over this, in units of the mean distance between apexes. */
  heightSpread: number;
  seed: number;
}

const names = ["+x", "-x", "+y", "-y"] as const;
/** The patch is this many mean distances wide; rays start in its middle three fifths. */
const side = 26;
const mostBounces = 12;

/** Fraction of the light by way, for instance "+x -x" -> 0.65. */
export function traceWays({ facetAngleDeg, rays, heightSpread, seed }: TraceOptions): Map<string, number> {
  const random = seeded(seed);
  const apexes = Array.from(
    { length: side * side },
    (): Vector => [
      random.uniform(0, side),
      random.uniform(0, side),
      random.uniform(0, heightSpread || Number.MIN_VALUE),
    ],
  );
  const tilt = (facetAngleDeg * Math.PI) / 180;
  const across = Math.sin(tilt);
  const up = Math.cos(tilt);
  const normals: Vector[] = [
    [across, 0, up],
    [-across, 0, up],
    [0, across, up],
    [0, -across, up],
  ];
  const ways = new Map<string, number>();
  for (let ray = 0; ray < rays; ray++) {
    const from = 0.2 * side;
    const start: Vector = [random.uniform(from, side - from), random.uniform(from, side - from), heightSpread + 5];
    const way = folded(facetsMet(start, apexes, normals));
    ways.set(way, (ways.get(way) ?? 0) + 1 / rays);
  }
  return ways;
}

/** Numbers (0 to 3) of the facets met by light that starts straight down. */
function facetsMet(start: Vector, apexes: readonly Vector[], normals: readonly Vector[]): number[] {
  const place: Vector = [...start];
  let direction: Vector = [0, 0, -1];
  const met: number[] = [];
  let leaving = -1;
  while (met.length < mostBounces) {
    const closing = normals.map((normal) => dot(direction, normal));
    let nearest = Number.POSITIVE_INFINITY;
    let pyramid = -1;
    let facet = -1;
    for (let i = 0; i < apexes.length; i++) {
      // A pyramid is convex: light that leaves one of its facets does not meet it again.
      if (i === leaving) continue;
      const hit = entry(place, apexes[i], normals, closing, nearest);
      if (!hit) continue;
      nearest = hit.distance;
      pyramid = i;
      facet = hit.facet;
    }
    if (pyramid < 0) break;
    for (let axis = 0; axis < 3; axis++) place[axis] += direction[axis] * nearest;
    const normal = normals[facet];
    const twice = 2 * closing[facet];
    direction = [direction[0] - twice * normal[0], direction[1] - twice * normal[1], direction[2] - twice * normal[2]];
    leaving = pyramid;
    met.push(facet);
  }
  return met;
}

/** Where a ray enters a pyramid (the part of space below all four of its planes), if it does so before `limit`. */
function entry(
  place: Vector,
  apex: Vector,
  normals: readonly Vector[],
  closing: readonly number[],
  limit: number,
): { distance: number; facet: number } | null {
  let enters = 1e-9;
  let leaves = limit;
  let facet = -1;
  for (let f = 0; f < 4; f++) {
    const normal = normals[f];
    const height =
      (place[0] - apex[0]) * normal[0] + (place[1] - apex[1]) * normal[1] + (place[2] - apex[2]) * normal[2];
    if (closing[f] === 0) {
      if (height > 0) return null;
      continue;
    }
    const distance = -height / closing[f];
    if (closing[f] < 0 && distance > enters) {
      enters = distance;
      facet = f;
    } else if (closing[f] > 0 && distance < leaves) leaves = distance;
    if (enters >= leaves) return null;
  }
  return facet < 0 ? null : { distance: enters, facet };
}

/** Names a way after its first facet and its first turn aside. */
function folded(facets: readonly number[]): string {
  let list = facets[0] >= 2 ? facets.map((f) => f ^ 2) : [...facets];
  if (list[0] === 1) list = list.map((f) => (f < 2 ? f ^ 1 : f));
  if (list.find((f) => f >= 2) === 3) list = list.map((f) => (f >= 2 ? f ^ 1 : f));
  return list.map((f) => names[f]).join(" ");
}

function dot(a: Vector, b: Vector): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}
