/**
 * The fast stand-in for the wafer's weighted reflectance and reflectance minimum: exact values at nodes of a grid in index and
 * thickness, worked out when first needed and kept, and cubics (Lagrange, four nodes each way) between them.
 *
 * The nitride family is piecewise in index: its lines join at the measured members. A cubic across a join would be wrong by
 * the kink, so each piece between members has nodes of its own, ends included, and no stencil crosses a join.
 *
 * Measured at 4000 random films each, index 1.82 to 2.28, 55 to 130 nm, 300 to 1100 nm: weighted reflectance within 0.0025 %
 * absolute on polished and 0.0011 % on pyramids. Minimum above 510 nm in air within 0.15 nm, in 99 of 100 within 0.05 nm; in
 * the violet, where the exact one bends sharply, up to some nanometres. Under glass 99 of 100 within 0.3 nm, but below about
 * 530 nm the exact minimum jumps between dips, and the table smears the jump over a few nanometres of film.
 */
import { finite } from "./errors.ts";
import { nitrideIndexRange, nitrideMemberIndices } from "./materials/nitride-family.ts";

export interface WaferTable {
  weightedReflectancePercent(index: number, thicknessNm: number): number;
  reflectanceMinimumNm(index: number, thicknessNm: number): number | null;
}

type Property = (index: number, thicknessNm: number) => number | null;

/** Widest spacing of nodes in index. */
const indexStep = 0.03;
/** Spacing of nodes in thickness, nm. The minimum bends more, where it passes the violet. */
const reflectanceStepNm = 4;
const minimumStepNm = 2;

/** Nodes of each piece of the family, ends included, at least four. */
function pieceNodes(): Float64Array[] {
  const ends = [nitrideIndexRange[0], ...nitrideMemberIndices(), nitrideIndexRange[1]];
  return ends.slice(1).map((to, i) => {
    const from = ends[i];
    const steps = Math.max(3, Math.ceil((to - from) / indexStep));
    return Float64Array.from({ length: steps + 1 }, (_, j) => (j === steps ? to : from + ((to - from) * j) / steps));
  });
}

/**
 * A table over a wafer (or anything with these two properties of index and thickness in nm). Outside the family's index range
 * and below zero thickness the exact property is asked, which refuses; so it is where the minimum has no value nearby.
 */
export function waferTable(exact: WaferTable): WaferTable {
  const reflectance = interpolated(
    (index, thicknessNm) => exact.weightedReflectancePercent(index, thicknessNm),
    reflectanceStepNm,
  );
  const minimum = interpolated((index, thicknessNm) => exact.reflectanceMinimumNm(index, thicknessNm), minimumStepNm);
  return {
    weightedReflectancePercent: (index, thicknessNm) => reflectance(index, thicknessNm) as number,
    reflectanceMinimumNm: minimum,
  };
}

/** No value here: minima outside the light range. All values are finite otherwise; NaN stands for "not asked yet". */
const none = Number.POSITIVE_INFINITY;

/**
 * Values at the nodes in columns, one a node of index, along thickness. The cut through them at the index asked last is kept:
 * chances are integrated along thickness, many questions to one index.
 */
function interpolated(exact: Property, thicknessStepNm: number): Property {
  const pieces = pieceNodes();
  const columns = pieces.map((nodes) => Array.from(nodes, () => new Float64Array(0)));
  const weightOfIndex = new Float64Array(4);
  const weightOfThickness = new Float64Array(4);
  let indexNow = Number.NaN;
  let pieceNow = 0;
  let firstIndex = 0;
  /** The cut at `indexNow`; NaN where it has not been made yet. */
  let cut = new Float64Array(64).fill(Number.NaN);
  let cutFrom = 0;
  let cutTo = 0;

  function node(i: number, j: number): number {
    let column = columns[pieceNow][i];
    if (j >= column.length) {
      const longer = new Float64Array(Math.max(64, 2 * j)).fill(Number.NaN);
      longer.set(column);
      columns[pieceNow][i] = longer;
      column = longer;
    }
    const known = column[j];
    if (!Number.isNaN(known)) return known;
    const value = exact(pieces[pieceNow][i], j * thicknessStepNm) ?? none;
    column[j] = value;
    return value;
  }

  function cutAt(index: number): void {
    indexNow = index;
    pieceNow = 0;
    while (pieceNow < pieces.length - 1 && index > pieces[pieceNow + 1][0]) pieceNow++;
    const nodes = pieces[pieceNow];
    const step = nodes[1] - nodes[0];
    firstIndex = clamp(Math.floor((index - nodes[0]) / step) - 1, 0, nodes.length - 4);
    cubicWeights((index - nodes[firstIndex]) / step, weightOfIndex);
    cut.fill(Number.NaN, cutFrom, cutTo);
    cutFrom = cut.length;
    cutTo = 0;
  }

  /** Value on the cut at node j of thickness; `none` where one of its four nodes has none. */
  function along(j: number): number {
    if (j >= cut.length) {
      const longer = new Float64Array(2 * j).fill(Number.NaN);
      longer.set(cut);
      cut = longer;
    }
    const known = cut[j];
    if (!Number.isNaN(known)) return known;
    let sum = 0;
    for (let i = 0; i < 4; i++) {
      const value = node(firstIndex + i, j);
      sum = value === none ? none : sum + weightOfIndex[i] * value;
      if (sum === none) break;
    }
    cut[j] = sum;
    if (j < cutFrom) cutFrom = j;
    if (j >= cutTo) cutTo = j + 1;
    return sum;
  }

  return (index, thicknessNm) => {
    finite(index, "index");
    finite(thicknessNm, "thickness");
    if (index < nitrideIndexRange[0] || index > nitrideIndexRange[1] || thicknessNm < 0)
      return exact(index, thicknessNm);
    if (index !== indexNow) cutAt(index);
    const firstThickness = Math.max(0, Math.floor(thicknessNm / thicknessStepNm) - 1);
    cubicWeights(thicknessNm / thicknessStepNm - firstThickness, weightOfThickness);
    let sum = 0;
    for (let j = 0; j < 4; j++) {
      const value = along(firstThickness + j);
      if (value === none) return exact(index, thicknessNm);
      sum += weightOfThickness[j] * value;
    }
    return sum;
  };
}

/** Lagrange weights of the nodes 0, 1, 2, 3 at position t. */
function cubicWeights(t: number, out: Float64Array): void {
  const a = t - 1;
  const b = t - 2;
  const c = t - 3;
  out[0] = -(a * b * c) / 6;
  out[1] = (t * b * c) / 2;
  out[2] = -(t * a * c) / 2;
  out[3] = (t * a * b) / 6;
}

function clamp(value: number, low: number, high: number): number {
  return Math.min(high, Math.max(low, value));
}
