/**
 * Where the scatter of repeated readings comes from: nested analysis of variance. Role: the gauge's own scatter, reloading
 * apart from repeating, which the filter takes as known; and furnace studies of runs, zones and wafers.
 * Textbook: NIST/SEMATECH e-Handbook of Statistical Methods, sections 2.4 and 3.5.1.
 */
import { finite, refuse } from "../errors.ts";
import { fUpper } from "./f-ratio.ts";

/** One level of a nested study, the outermost first. */
export interface NestedLevel {
  readonly degrees: number;
  readonly sumOfSquares: number;
  readonly meanSquare: number;
  /** Mean square over that of the level inside, and the chance of one this large by luck; null for the innermost. */
  readonly f: number | null;
  readonly p: number | null;
  /** Component of variance of this level, in the unit of the values squared; below zero it is given as zero. */
  readonly variance: number;
}

/**
 * Variance components of a balanced nested study. `sizes` from outside inwards: [21, 4, 2] is 21 runs of 4 zones of 2
 * wafers; the values come in that order, the last index changing fastest. The component of a level is its mean square less
 * that of the level inside, over the number of values in one of its groups (method of moments). Refuses `bad-shape` unless
 * there is one value a place and every size is a whole number of at least two, and `not-a-number`.
 */
export function nestedVariance(values: ArrayLike<number>, sizes: readonly number[]): NestedLevel[] {
  const count = sizes.reduce((product, size) => product * size, 1);
  if (sizes.length === 0 || !sizes.every((size) => Number.isInteger(size) && size >= 2)) {
    refuse("bad-shape", `every level needs two or more, got ${sizes.join(" x ")}`);
  }
  if (values.length !== count) {
    refuse("bad-shape", `${sizes.join(" x ")} is ${count} values, got ${values.length}; every place needs one`);
  }
  // Means are taken as a correction to the first value, so that leading digits common to all of them cost nothing.
  const origin = finite(values[0], "value 1");
  let means = Float64Array.from({ length: count }, (_, i) => finite(values[i], `value ${i + 1}`) - origin);
  const levels: Omit<NestedLevel, "f" | "p" | "variance">[] = [];
  let inGroup = 1;
  for (let level = sizes.length - 1; level >= 0; level--) {
    const size = sizes[level];
    const outer = new Float64Array(means.length / size);
    for (let i = 0; i < means.length; i++) outer[Math.floor(i / size)] += means[i] / size;
    let sumOfSquares = 0;
    for (let i = 0; i < means.length; i++) sumOfSquares += inGroup * (means[i] - outer[Math.floor(i / size)]) ** 2;
    const degrees = outer.length * (size - 1);
    levels.unshift({ degrees, sumOfSquares, meanSquare: sumOfSquares / degrees });
    means = outer;
    inGroup *= size;
  }
  return levels.map((level, i): NestedLevel => {
    const inside = levels.at(i + 1);
    inGroup /= sizes[i];
    if (!inside) return { ...level, f: null, p: null, variance: level.meanSquare };
    const f = level.meanSquare / inside.meanSquare;
    return {
      ...level,
      f,
      p: fUpper(f, level.degrees, inside.degrees),
      variance: Math.max(0, (level.meanSquare - inside.meanSquare) / inGroup),
    };
  });
}

/** Pooled standard deviation of groups with their own means: sqrt(sum of squares/sum of degrees of freedom). */
export function pooledSd(groups: readonly { readonly sumOfSquares: number; readonly degrees: number }[]): number {
  let sum = 0;
  let degrees = 0;
  for (const group of groups) {
    if (!(group.sumOfSquares >= 0) || !(group.degrees >= 1)) {
      refuse(
        "out-of-domain",
        `a group with sum of squares ${group.sumOfSquares} on ${group.degrees} degrees of freedom`,
      );
    }
    sum += group.sumOfSquares;
    degrees += group.degrees;
  }
  if (degrees === 0) refuse("too-few-rows", "no group to pool");
  return Math.sqrt(sum / degrees);
}
