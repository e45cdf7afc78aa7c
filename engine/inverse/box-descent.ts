/**
 * The lowest point near a start inside a box, for a smooth function that gives its slopes: projected quasi-Newton. Variables
 * at a wall with the slope pointing outwards are held, the others take the quasi-Newton step, cut at the walls. Curvature by
 * BFGS with M. J. D. Powell's damping (1978, from memory), which keeps it positive; steps by backtracking.
 *
 * The box may be made of pieces, joined where the function is continuous but bends (the nitride family at its measured
 * members): each piece is searched by itself, and a search that ends at a join goes on in the piece beyond where that leads
 * further down.
 */
import { Refusal } from "../errors.ts";
import { cholesky, choleskySolve } from "../numerics/cholesky.ts";
import type { Piece } from "./varied-stack.ts";

/** Value at x, slopes written to `gradient`, taken inside the given piece of each variable. */
export type SlopedFunction = (x: Float64Array, pieces: readonly Piece[], gradient: Float64Array) => number;

export interface Descent {
  x: Float64Array;
  value: number;
  /** The piece of each variable the search ended in. */
  pieces: Piece[];
  /** Largest slope that still leads down, per whole width of a variable's range; 0 at a perfect minimum. */
  slope: number;
}

export interface DescentOptions {
  /** Ends when the largest slope, per width of the whole range, is below this. */
  flat: number;
  /** Ends when the value is no higher than this. */
  enough?: number;
}

const mostSteps = 80;
const mostCrossings = 12;
/** A first step goes no further than this share of the range, and none further than the second. */
const firstStep = 0.05;
const longestStep = 0.4;

/** Descends from `start`; `pieces` are the pieces of each variable in order, together its range. */
export function descend(
  f: SlopedFunction,
  start: ArrayLike<number>,
  pieces: readonly (readonly Piece[])[],
  options: DescentOptions,
): Descent {
  let inside = pieces.map((list, j) => list.find(({ high }) => start[j] < high) ?? list[list.length - 1]);
  let found = inPiece(f, Float64Array.from(start), inside, pieces, options);
  for (let crossing = 0; crossing < mostCrossings; crossing++) {
    if (found.value <= (options.enough ?? Number.NEGATIVE_INFINITY)) break;
    const next = beyond(f, found, pieces, options);
    if (!next) break;
    inside = next;
    const further = inPiece(f, found.x, inside, pieces, options);
    if (!(further.value < found.value)) break;
    found = further;
  }
  return found;
}

/** The pieces to go on in: with one variable's piece exchanged for its neighbour, when the way beyond a join leads down. */
function beyond(
  f: SlopedFunction,
  found: Descent,
  pieces: readonly (readonly Piece[])[],
  options: DescentOptions,
): Piece[] | null {
  const gradient = new Float64Array(found.x.length);
  for (let j = 0; j < pieces.length; j++) {
    const at = pieces[j].indexOf(found.pieces[j]);
    const x = found.x[j];
    const side = x >= found.pieces[j].high ? 1 : x <= found.pieces[j].low ? -1 : 0;
    const neighbour = side === 0 ? undefined : pieces[j][at + side];
    if (!neighbour) continue;
    const exchanged = found.pieces.map((piece, i) => (i === j ? neighbour : piece));
    f(found.x, exchanged, gradient);
    if (-side * gradient[j] * widthOf(pieces[j]) > options.flat) return exchanged;
  }
  return null;
}

export const widthOf = (pieces: readonly Piece[]): number => pieces[pieces.length - 1].high - pieces[0].low;

function inPiece(
  f: SlopedFunction,
  start: Float64Array,
  inside: readonly Piece[],
  pieces: readonly (readonly Piece[])[],
  { flat, enough = Number.NEGATIVE_INFINITY }: DescentOptions,
): Descent {
  const n = start.length;
  const width = pieces.map(widthOf);
  const cut = (value: number, j: number): number => Math.min(inside[j].high, Math.max(inside[j].low, value));
  let x: Float64Array = start.map(cut);
  const slopes = new Float64Array(n);
  // Everything per width of the range, so that nm and index weigh alike.
  const at = (where: Float64Array): { value: number; g: Float64Array } => {
    const value = f(where, inside, slopes);
    return { value, g: slopes.map((slope, j) => slope * width[j]) };
  };
  let { value, g }: { value: number; g: Float64Array } = at(x);
  let curvature: Float64Array | null = null;
  for (let step = 0; ; step++) {
    const free = freeOf(x, g, inside);
    const slope = free.reduce((most, j) => Math.max(most, Math.abs(g[j])), 0);
    const done: Descent = { x, value, pieces: [...inside], slope };
    if (slope <= flat || value <= enough || step === mostSteps) return done;
    curvature ??= unit(n, slope / firstStep);
    const direction = directionOf(curvature, g, free);
    const moved = direction && search(x, value, g, direction, width, cut, at);
    if (!moved) {
      // A worn curvature is forgotten; after that the value is at its rounding.
      if (isUnit(curvature)) return done;
      curvature = null;
      continue;
    }
    const s = moved.x.map((to, j) => (to - x[j]) / width[j]);
    updateCurvature(
      curvature,
      s,
      moved.g.map((to, j) => to - g[j]),
    );
    ({ x, value, g } = moved);
  }
}

function freeOf(x: Float64Array, g: Float64Array, inside: readonly Piece[]): number[] {
  const free: number[] = [];
  for (let j = 0; j < x.length; j++) {
    if (!((x[j] <= inside[j].low && g[j] >= 0) || (x[j] >= inside[j].high && g[j] <= 0))) free.push(j);
  }
  return free;
}

function unit(n: number, size: number): Float64Array {
  const matrix = new Float64Array(n * n);
  for (let j = 0; j < n; j++) matrix[j * n + j] = size;
  return matrix;
}

function isUnit(matrix: Float64Array): boolean {
  const n = Math.round(Math.sqrt(matrix.length));
  return matrix.every((value, at) => value === (at % (n + 1) === 0 ? matrix[0] : 0));
}

/** The quasi-Newton step of the free variables, in widths of the range; zero for the others; null when rounding ate it. */
function directionOf(curvature: Float64Array, g: Float64Array, free: readonly number[]): Float64Array | null {
  const n = g.length;
  const m = free.length;
  const part = new Float64Array(m * m);
  for (let a = 0; a < m; a++) for (let b = 0; b < m; b++) part[a * m + b] = curvature[free[a] * n + free[b]];
  // Nothing known of a direction must not make the matrix singular.
  const floor = 1e-10 * part.reduce((most, value) => Math.max(most, value), 0);
  for (let a = 0; a < m; a++) part[a * m + a] += floor;
  const downhill = Float64Array.from(free, (j) => -g[j]);
  const factor = factorOf(part, m);
  if (!factor) return null;
  const solved = choleskySolve(factor, m, downhill);
  const direction = new Float64Array(n);
  free.forEach((j, a) => {
    direction[j] = solved[a];
  });
  const longest = direction.reduce((most, d) => Math.max(most, Math.abs(d)), 0);
  return longest > longestStep ? direction.map((d) => (d * longestStep) / longest) : direction;
}

/** Null where the matrix, positive by construction, is not so to rounding. */
function factorOf(matrix: Float64Array, m: number): Float64Array | null {
  try {
    return cholesky(matrix, m);
  } catch (error) {
    if (error instanceof Refusal) return null;
    throw error;
  }
}

/** A point along the step, cut at the walls, that is lower by a fair share of what the slope promised; null when none is. */
function search(
  x: Float64Array,
  value: number,
  g: Float64Array,
  direction: Float64Array,
  width: readonly number[],
  cut: (value: number, j: number) => number,
  at: (where: Float64Array) => { value: number; g: Float64Array },
): { x: Float64Array; value: number; g: Float64Array } | null {
  const fair = 1e-4;
  let share = 1;
  for (let tries = 0; tries < 25; tries++) {
    const to = x.map((from, j) => cut(from + share * direction[j] * width[j], j));
    let promised = 0;
    for (let j = 0; j < x.length; j++) promised += (g[j] * (to[j] - x[j])) / width[j];
    if (promised >= 0) return null;
    const there = at(to);
    const change = there.value - value;
    if (change <= fair * promised) return { x: to, ...there };
    // The lowest point of the parabola through value, slope and the value there.
    const lowest = (-0.5 * promised) / (change - promised);
    share *= Number.isFinite(lowest) ? Math.min(0.5, Math.max(0.1, lowest)) : 0.1;
  }
  return null;
}

/** BFGS in place, for a step `s` over which the slopes changed by `y`. */
function updateCurvature(B: Float64Array, s: Float64Array, y: Float64Array): void {
  const n = s.length;
  const Bs = new Float64Array(n);
  for (let a = 0; a < n; a++) for (let b = 0; b < n; b++) Bs[a] += B[a * n + b] * s[b];
  const sBs = Bs.reduce((sum, value, a) => sum + value * s[a], 0);
  const sy = y.reduce((sum, value, a) => sum + value * s[a], 0);
  if (!(sBs > 0)) return;
  const share = sy >= 0.2 * sBs ? 1 : (0.8 * sBs) / (sBs - sy);
  const r = y.map((value, a) => share * value + (1 - share) * Bs[a]);
  const sr = r.reduce((sum, value, a) => sum + value * s[a], 0);
  for (let a = 0; a < n; a++) for (let b = 0; b < n; b++) B[a * n + b] += (r[a] * r[b]) / sr - (Bs[a] * Bs[b]) / sBs;
}
