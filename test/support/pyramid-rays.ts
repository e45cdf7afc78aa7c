/**
 * A small ray tracer for upright pyramids, which regenerates the fractions of light that bounce each way. The surface is the
 * union of endless square pyramids; their apexes lie at random places and heights, or on a square lattice at one height. Light
 * comes straight down, or aslant, and is mirrored until it leaves. The facets it meets are named after the first one ("+x") and
 * the first turn aside ("+y"), which folds the symmetric ways into one.
 */
import { type Random, random as seeded } from "../../engine/index.ts";

export type Direction = [number, number, number];

export interface TextureOptions {
  facetAngleDeg: number;
  /** Left out: random places. */
  arrangement?: "random" | "regular";
  /** Apex heights of random pyramids are uniform over this, in units of the mean distance between apexes. */
  heightSpread?: number;
  seed: number;
}

export interface TraceOptions extends TextureOptions {
  rays: number;
}

/** What one ray met: numbers of the facets (0 to 3: +x, -x, +y, -y), the angles of incidence there, and how it left. */
export interface Traced {
  facets: number[];
  anglesRad: number[];
  direction: Direction;
}

const names = ["+x", "-x", "+y", "-y"] as const;
/** A random patch is this many mean distances wide; rays start in its middle three fifths. */
const randomSide = 26;
/** A regular one is wide enough for light that leaves its middle cell: it bounces between next neighbours only. */
const regularSide = 7;
const mostBounces = 12;

/** A patch of texture to send rays at. */
export class Texture {
  private readonly apexes: Direction[];
  private readonly normals: Direction[];
  private readonly top: number;
  private readonly from: number;
  private readonly to: number;

  constructor(
    { facetAngleDeg, arrangement = "random", heightSpread = 0, seed }: TextureOptions,
    private readonly random: Random = seeded(seed),
  ) {
    const side = arrangement === "random" ? randomSide : regularSide;
    this.apexes = Array.from(
      { length: side * side },
      (_, i): Direction =>
        arrangement === "random"
          ? [random.uniform(0, side), random.uniform(0, side), random.uniform(0, heightSpread || Number.MIN_VALUE)]
          : [i % side, Math.floor(i / side), 0],
    );
    this.top = heightSpread;
    // Whole cells of the lattice, so that each place of a cell is as likely.
    this.from = arrangement === "random" ? 0.2 * side : Math.floor(side / 2) - 0.5;
    this.to = arrangement === "random" ? 0.8 * side : Math.floor(side / 2) + 0.5;
    const tilt = (facetAngleDeg * Math.PI) / 180;
    const across = Math.sin(tilt);
    const up = Math.cos(tilt);
    this.normals = [
      [across, 0, up],
      [-across, 0, up],
      [0, across, up],
      [0, -across, up],
    ];
  }

  /** A ray of this direction, falling at a place where every part of the wafer's plane is as likely. */
  trace(direction: Direction): Traced {
    const { from, to, top } = this;
    const place: Direction = [this.random.uniform(from, to), this.random.uniform(from, to), top];
    // Above all apexes, backwards along the ray. The place itself is drawn at the height of the highest apex.
    for (let axis = 0; axis < 3; axis++) place[axis] += (direction[axis] * 1e-3) / direction[2];
    return this.follow(place, [...direction]);
  }

  private follow(place: Direction, start: Direction): Traced {
    const { apexes, normals } = this;
    let direction = start;
    const facets: number[] = [];
    const anglesRad: number[] = [];
    let leaving = -1;
    while (facets.length < mostBounces) {
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
      direction = [
        direction[0] - twice * normal[0],
        direction[1] - twice * normal[1],
        direction[2] - twice * normal[2],
      ];
      leaving = pyramid;
      facets.push(facet);
      anglesRad.push(Math.acos(Math.min(1, -closing[facet])));
    }
    return { facets, anglesRad, direction };
  }
}

/** Fraction of the light by way, for instance "+x -x" -> 0.65, for light straight down. */
export function traceWays({ rays, ...texture }: TraceOptions): Map<string, number> {
  const patch = new Texture(texture);
  const ways = new Map<string, number>();
  for (let ray = 0; ray < rays; ray++) {
    const way = folded(patch.trace([0, 0, -1]).facets);
    ways.set(way, (ways.get(way) ?? 0) + 1 / rays);
  }
  return ways;
}

/** Where a ray enters a pyramid (the part of space below all four of its planes), if it does so before `limit`. */
function entry(
  place: Direction,
  apex: Direction,
  normals: readonly Direction[],
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

function dot(a: Direction, b: Direction): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}
