/**
 * Weighted reflectance of one film over a whole plane of films at once: rows of materials (an index each), columns of evenly
 * spaced thicknesses. Along a row only the phase exp(-2 i delta) changes, and by the same factor from column to column, so a
 * column costs one complex product and one division a wavelength and angle; no sine, no exponential. With E that phase,
 *
 *   |r|^2 = (|r01|^2 + |r12 E|^2 + 2 Re(conj(r01) r12 E)) / (1 + |r01 r12 E|^2 + 2 Re(r01 r12 E))
 *
 * (Born and Wolf, section 1.6.4, squared out). Rounding grows by 1e-16 a column.
 */
import { refuse } from "../errors.ts";
import type { OpticalConstantsOnGrid } from "../materials/material.ts";
import type { CoverLight } from "../surface/cover.ts";
import type { PathSum } from "../surface/path-sum.ts";
import { writeNormalIndex, writeReflection } from "./fresnel.ts";

export interface WeightedMapInput {
  wavelengthNm: Float64Array;
  /** Weight of each wavelength, as `GridWeights.average`. */
  weight: Float64Array;
  paths: PathSum;
  cover: CoverLight;
  substrate: OpticalConstantsOnGrid;
  /** One film material a row. */
  films: readonly OpticalConstantsOnGrid[];
  /** Thicknesses on the surface: fromNm, fromNm + stepNm, ... `columns` of them, none negative. */
  fromNm: number;
  stepNm: number;
  columns: number;
}

/** r01 and r12 of the film at hand, re and im each, for s and then p; and q of the three media. */
const r = new Float64Array(8);
const q = new Float64Array(6);

/**
 * Widest spacing of the thicknesses worked out, nm, where finer ones are asked: the rest is read between them by a polynomial
 * through `stencil` of them. A fringe of the film is over 60 nm of thickness long (lambda / 2 n in the ultraviolet), so this is
 * thirty points a fringe and the polynomial is off by less than 1e-10 (measured 1e-11; test/engine/optics/weighted-map.test.ts).
 */
const coarseNm = 2;
const stencil = 16;

/**
 * Weighted reflectance (0 to 1) of film `row` at thickness `column`, at [row * columns + column]; light straight down.
 * Refuses thicknesses that are negative or not finite, and a count that is no positive integer ("film-thickness").
 */
export function weightedMap(input: WeightedMapInput): Float64Array {
  const { films, columns, fromNm, stepNm, paths } = input;
  const last = fromNm + stepNm * (columns - 1);
  if (!(Number.isInteger(columns) && columns > 0 && fromNm >= 0 && last >= 0 && Number.isFinite(last)))
    refuse(
      "film-thickness",
      `${columns} thicknesses from ${fromNm} nm by ${stepNm} nm; all must be finite and 0 or more`,
    );
  const map = new Float64Array(films.length * columns);
  const reading = coarseReading(columns, stepNm);
  const along: Along = reading
    ? { fromNm: fromNm - reading.before * stepNm, stepNm: stepNm * reading.stride, columns: reading.nodes }
    : { fromNm, stepNm, columns };
  const room: Room = {
    bounces: paths.anglesRad.map(() => new Float64Array(along.columns)),
    leaving: new Float64Array(along.columns),
    returning: new Float64Array(along.columns),
  };
  const nodes = new Float64Array(along.columns);
  for (const [row, film] of films.entries()) {
    const out = map.subarray(row * columns, (row + 1) * columns);
    nodes.fill(0);
    addRow(input, along, film, reading ? nodes : out, room);
    if (reading) read(nodes, reading, out);
  }
  return map;
}

/** Thicknesses worked out along a row. They may be negative (the closed form does not mind) where they only serve to read others. */
interface Along {
  fromNm: number;
  stepNm: number;
  columns: number;
}

/** How the columns asked are read from fewer that are worked out. */
interface Reading {
  /** Columns from one node to the next. */
  stride: number;
  /** Columns by which the first node lies before the first column. */
  before: number;
  nodes: number;
  /** Weights of the stencil's nodes, a row for each place between two nodes. */
  weights: Float64Array[];
}

/** Null when nothing would be saved. */
function coarseReading(columns: number, stepNm: number): Reading | null {
  const stride = Math.floor(coarseNm / Math.abs(stepNm));
  if (!Number.isFinite(stride) || stride < 2) return null;
  const half = stencil / 2;
  const nodes = Math.ceil((columns - 1) / stride) + stencil;
  if (nodes >= columns) return null;
  const weights = Array.from({ length: stride }, (_, place) => {
    // Lagrange's polynomials on the nodes 1 - half ... half, the place lying between nodes 0 and 1.
    const x = place / stride;
    return Float64Array.from({ length: stencil }, (__, j) => {
      let weight = 1;
      for (let other = 0; other < stencil; other++) {
        if (other !== j) weight *= (x - (other + 1 - half)) / (j - other);
      }
      return weight;
    });
  });
  return { stride, before: (half - 1) * stride, nodes, weights };
}

function read(nodes: Float64Array, { stride, weights }: Reading, out: Float64Array): void {
  for (let c = 0; c < out.length; c++) {
    const first = Math.floor(c / stride);
    const weight = weights[c - first * stride];
    let sum = 0;
    for (let j = 0; j < stencil; j++) sum += weight[j] * nodes[first + j];
    out[c] = sum;
  }
}

/** Working space along a row: reflectance at each angle, and the sums of the cover. */
interface Room {
  bounces: Float64Array[];
  leaving: Float64Array;
  returning: Float64Array;
}

function addRow(input: WeightedMapInput, at: Along, film: OpticalConstantsOnGrid, out: Float64Array, room: Room): void {
  const { wavelengthNm, weight, paths, cover, substrate } = input;
  const straight = paths.anglesRad.length === 1 && paths.anglesRad[0] === 0 && cover.layers === 0;
  for (let i = 0; i < wavelengthNm.length; i++) {
    const [n0, n1, k1, n2, k2] = [cover.innerIndex[i], film.n[i], film.k[i], substrate.n[i], substrate.k[i]];
    const turn = (4 * Math.PI) / wavelengthNm[i];
    for (let angle = 0; angle < paths.anglesRad.length; angle++) {
      const along = (n0 * Math.sin(paths.anglesRad[angle])) ** 2;
      writeNormalIndex(n0, 0, along, q, 0);
      writeNormalIndex(n1, k1, along, q, 2);
      writeNormalIndex(n2, k2, along, q, 4);
      writeReflection("s", n0, 0, q[0], q[1], n1, k1, q[2], q[3], r, 0);
      writeReflection("s", n1, k1, q[2], q[3], n2, k2, q[4], q[5], r, 2);
      if (along === 0) {
        addFringes(
          turn * q[2],
          turn * q[3],
          at,
          straight ? weight[i] : 1,
          straight ? out : room.bounces[angle].fill(0),
        );
        continue;
      }
      writeReflection("p", n0, 0, q[0], q[1], n1, k1, q[2], q[3], r, 4);
      writeReflection("p", n1, k1, q[2], q[3], n2, k2, q[4], q[5], r, 6);
      writeMeanFringes(turn * q[2], turn * q[3], at, room.bounces[angle]);
    }
    if (!straight) addWays(input, i, room, out);
  }
}

/** Adds `share` times |r|^2 of s light at all columns. `phase`, `fade`: re and im of 4 pi q / lambda, per nm. */
function addFringes(phase: number, fade: number, { fromNm, stepNm }: Along, share: number, out: Float64Array): void {
  const [a2, b2, zRe, zIm, wRe, wIm] = fringe(0);
  const ab2 = a2 * b2;
  const size = Math.exp(fade * fromNm);
  let eRe = size * Math.cos(phase * fromNm);
  let eIm = -size * Math.sin(phase * fromNm);
  const by = Math.exp(fade * stepNm);
  const byRe = by * Math.cos(phase * stepNm);
  const byIm = -by * Math.sin(phase * stepNm);
  const by2 = by * by;
  let e2 = size * size;
  for (let c = 0; c < out.length; c++) {
    out[c] += (share * (a2 + b2 * e2 + zRe * eRe - zIm * eIm)) / (1 + ab2 * e2 + wRe * eRe - wIm * eIm);
    const next = eRe * byRe - eIm * byIm;
    eIm = eRe * byIm + eIm * byRe;
    eRe = next;
    e2 *= by2;
  }
}

/** The mean of |r|^2 of s and p light at all columns; one division serves both. */
function writeMeanFringes(phase: number, fade: number, { fromNm, stepNm }: Along, out: Float64Array): void {
  const [sA2, sB2, sZRe, sZIm, sWRe, sWIm] = fringe(0);
  const [pA2, pB2, pZRe, pZIm, pWRe, pWIm] = fringe(4);
  const sAB2 = sA2 * sB2;
  const pAB2 = pA2 * pB2;
  const size = Math.exp(fade * fromNm);
  let eRe = size * Math.cos(phase * fromNm);
  let eIm = -size * Math.sin(phase * fromNm);
  const by = Math.exp(fade * stepNm);
  const byRe = by * Math.cos(phase * stepNm);
  const byIm = -by * Math.sin(phase * stepNm);
  const by2 = by * by;
  let e2 = size * size;
  for (let c = 0; c < out.length; c++) {
    const sUp = sA2 + sB2 * e2 + sZRe * eRe - sZIm * eIm;
    const sDown = 1 + sAB2 * e2 + sWRe * eRe - sWIm * eIm;
    const pUp = pA2 + pB2 * e2 + pZRe * eRe - pZIm * eIm;
    const pDown = 1 + pAB2 * e2 + pWRe * eRe - pWIm * eIm;
    out[c] = (0.5 * (sUp * pDown + pUp * sDown)) / (sDown * pDown);
    const next = eRe * byRe - eIm * byIm;
    eIm = eRe * byIm + eIm * byRe;
    eRe = next;
    e2 *= by2;
  }
}

/** |r01|^2, |r12|^2, 2 conj(r01) r12 and 2 r01 r12 (re, im) of the coefficients at `r[from]`. */
function fringe(from: number): [number, number, number, number, number, number] {
  const aRe = r[from];
  const aIm = r[from + 1];
  const bRe = r[from + 2];
  const bIm = r[from + 3];
  return [
    aRe * aRe + aIm * aIm,
    bRe * bRe + bIm * bIm,
    2 * (aRe * bRe + aIm * bIm),
    2 * (aRe * bIm - aIm * bRe),
    2 * (aRe * bRe - aIm * bIm),
    2 * (aRe * bIm + aIm * bRe),
  ];
}

/** The sum over ways of bouncing and the cover at one wavelength, weighted, from the reflectance at each angle. */
function addWays({ paths, cover, weight }: WeightedMapInput, i: number, room: Room, out: Float64Array): void {
  const { bounces, leaving, returning } = room;
  const columns = out.length;
  const covered = cover.layers > 0;
  leaving.fill(0);
  returning.fill(0);
  for (let way = 0; way < paths.paths.length; way++) {
    const path = paths.paths[way];
    const gone = path.fraction * cover.leaves[way][i];
    const back = path.fraction * cover.returns[way][i];
    const [first, second, third, fourth, fifth] = path.bounces.map((angle) => bounces[angle]);
    for (let c = 0; c < columns; c++) {
      let left = first[c];
      if (second) left *= second[c];
      if (third) left *= third[c];
      if (fourth) left *= fourth[c];
      if (fifth) left *= fifth[c];
      leaving[c] += gone * left;
      if (covered) returning[c] += back * left;
    }
  }
  const w = weight[i];
  const enters = cover.enters[i];
  const front = cover.front[i];
  for (let c = 0; c < columns; c++) out[c] += w * (front + (enters * leaving[c]) / (1 - returning[c]));
}
