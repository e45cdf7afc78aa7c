/**
 * Where to start looking: a scan of the whole box at evenly spread points, of which those are kept that lie lower than all
 * their neighbours, so that every valley wider than the spacing is entered once (the idea of topographical search:
 * A. Torn and S. Viitanen, 1992; from memory). Points by J. H. Halton's sequence (1960, from memory), shifted by a seeded
 * random vector: the same question always gets the same points.
 */
import { random } from "../numerics/random.ts";

/** A point of the scan. */
export interface Scanned {
  values: Float64Array;
  /** Sum of squared misses, then loss, decide which of two points is lower. */
  missed: number;
  lossMaCm2: number;
}

const primes = [2, 3, 5, 7, 11, 13, 17, 19];

/** Points of the unit box; an even row, ends included, in one dimension. */
export function spread(count: number, dimensions: number): Float64Array[] {
  if (dimensions === 1) return Array.from({ length: count }, (_, i) => Float64Array.of(i / (count - 1)));
  const stream = random("spread");
  const shift = primes.slice(0, dimensions).map(() => stream.uniform());
  return Array.from({ length: count }, (_, i) =>
    Float64Array.from(shift, (by, j) => (radicalInverse(i + 1, primes[j]) + by) % 1),
  );
}

/** The digits of i in a base, mirrored at the point. */
function radicalInverse(i: number, base: number): number {
  let left = i;
  let share = 1 / base;
  let sum = 0;
  while (left > 0) {
    sum += (left % base) * share;
    left = Math.floor(left / base);
    share /= base;
  }
  return sum;
}

/** Of scanned points, those no higher than their nearest neighbours, lowest first, at most `most`. `width` scales distances. */
export function valleysOf(
  points: readonly Scanned[],
  width: readonly number[],
  lower: (one: Scanned, other: Scanned) => boolean,
  most: number,
): Scanned[] {
  const neighbours = 2 * width.length + (width.length > 1 ? 2 : 0);
  const kept = points.filter((point) =>
    nearest(points, point, width, neighbours).every((other) => !lower(other, point)),
  );
  return kept.sort((a, b) => (lower(a, b) ? -1 : lower(b, a) ? 1 : 0)).slice(0, most);
}

function nearest(points: readonly Scanned[], point: Scanned, width: readonly number[], count: number): Scanned[] {
  const found: { other: Scanned; far: number }[] = [];
  for (const other of points) {
    if (other === point) continue;
    let far = 0;
    for (let j = 0; j < width.length; j++) far += ((other.values[j] - point.values[j]) / width[j]) ** 2;
    if (found.length === count && far >= found[count - 1].far) continue;
    if (found.length === count) found.pop();
    let at = found.length;
    while (at > 0 && found[at - 1].far > far) at--;
    found.splice(at, 0, { other, far });
  }
  return found.map(({ other }) => other);
}
