/**
 * Charts of single values and what they cost in false alarms. Role: the two alarms on standardised innovations ("the model
 * no longer fits"): a band of +-3 for one odd reading, a two-sided cumulative sum for a slow shift. Both promise a rate of
 * false alarms, so that a line's run rate turns into alarms a month. The promise holds for independent standard normal
 * values; a chart of two outputs has twice the rate.
 */
import { finite, refuse } from "../errors.ts";
import { qrSolve } from "./householder.ts";
import { normalCdf, normalPdf } from "./normal.ts";
import { gaussLegendre } from "./quadrature.ts";

/** The band on standardised innovations: half-width in standard deviations. */
export const SURPRISE_BAND = { width: 3 } as const;

/**
 * The slow-shift detector on standardised innovations: reference value k, half the shift it is tuned to (one standard
 * deviation), and the decision limit h that is published for the band's rate of false alarms (D. M. Hawkins, Quality
 * Engineering 5 (1993) 463-477; from memory). Worked out: one in 369 runs, the band's is one in 370.
 */
export const SLOW_SHIFT = { k: 0.5, h: 4.77 } as const;

/** Mean of the range of two normal values in standard deviations, 2/sqrt(pi). */
const RANGE_OF_TWO = 2 / Math.sqrt(Math.PI);

/** A chart of individual values, all in the unit of the values. */
export interface IndividualsLimits {
  readonly centre: number;
  /** Mean of the distances between neighbours. */
  readonly movingRange: number;
  readonly lower: number;
  readonly upper: number;
}

/**
 * Mean +- 3 x (mean moving range)/d2 of the values in the order they came (NIST/SEMATECH e-Handbook, section 6.3.2.2; d2 =
 * 2/sqrt(pi), which printed tables round to 1.128). The moving range reads the scatter from one run to the next, so a drift
 * does not widen the limits; on values that a controller adjusts it reads too little. Refuses `too-few-runs` below two.
 */
export function individualsLimits(values: ArrayLike<number>): IndividualsLimits {
  const n = values.length;
  if (n < 2) refuse("too-few-runs", `a moving range needs two values, got ${n}`);
  let centre = 0;
  let movingRange = 0;
  for (let i = 0; i < n; i++) {
    centre += finite(values[i], `value ${i + 1}`) / n;
    if (i > 0) movingRange += Math.abs(values[i] - values[i - 1]) / (n - 1);
  }
  const half = (3 * movingRange) / RANGE_OF_TWO;
  return { centre, movingRange, lower: centre - half, upper: centre + half };
}

/** A two-sided tabular cumulative sum; k and h in the unit of the values. */
export interface CusumOptions {
  /** What the values should be. */
  readonly target: number;
  /** Half the shift worth finding. */
  readonly k: number;
  /** Decision limit. */
  readonly h: number;
}

/** Sums after each value, and where they are above h. */
export interface Cusum {
  /** max(0, S + x - target - k), upwards. */
  readonly up: Float64Array;
  /** max(0, S + target - k - x), downwards. */
  readonly down: Float64Array;
  /** Positions (from 0) at which either sum is above h; the sums run on after an alarm. */
  readonly alarms: readonly number[];
}

function checkSum(k: number, h: number): void {
  if (!(k >= 0) || !(h > 0) || !Number.isFinite(k + h)) refuse("out-of-domain", `k is ${k} and h ${h}`);
}

/** Cumulative sums from zero (E. S. Page 1954; e-Handbook, section 6.3.2.3). Refuses k < 0, h <= 0 (`out-of-domain`). */
export function cusum(values: ArrayLike<number>, { target, k, h }: CusumOptions): Cusum {
  checkSum(k, h);
  finite(target, "the target");
  const up = new Float64Array(values.length);
  const down = new Float64Array(values.length);
  const alarms: number[] = [];
  let above = 0;
  let below = 0;
  for (let i = 0; i < values.length; i++) {
    const off = finite(values[i], `value ${i + 1}`) - target;
    above = Math.max(0, above + off - k);
    below = Math.max(0, below - off - k);
    up[i] = above;
    down[i] = below;
    if (above > h || below > h) alarms.push(i);
  }
  return { up, down, alarms };
}

/**
 * Mean number of standard normal values, shifted by `shift`, until the two-sided sum that starts at zero is above h. One
 * side by Page's integral equation on Gauss-Legendre nodes; the two sides join as 1/L = 1/L(up) + 1/L(down), which is exact
 * from zero (K. W. Kemp 1961; both from memory). Refuses `out-of-domain`: k < 0, h <= 0 or h > 10.6.
 */
export function cusumRunLength(k: number, h: number, shift = 0): number {
  checkSum(k, h);
  finite(shift, "the shift");
  return 1 / (1 / oneSided(k, h, shift) + 1 / oneSided(k, h, -shift));
}

/**
 * One side. A way from zero ends back at zero or above h: with c(s) the chance that it ends above from s, and a(s) the mean
 * number of values it takes, c = (chance of a jump above h) + K c and a = 1 + K a, K being the integral; the mean run length
 * is a(0)/c(0). No difference of large numbers is taken, however rare the alarm.
 */
function oneSided(k: number, h: number, shift: number): number {
  // The kernel is a normal density of width 1: six nodes a unit of h leave rounding only.
  const n = Math.max(16, Math.ceil(6 * h));
  if (n > 64) refuse("out-of-domain", `h is ${h}, run lengths are worked out up to 10.6`);
  const rule = gaussLegendre(n);
  const x = Float64Array.from(rule.nodes, (node) => (h / 2) * (1 + node));
  const kernel = (from: number, j: number) => (h / 2) * rule.weights[j] * normalPdf(x[j] + k - from - shift);
  const above = (from: number) => normalCdf(from + shift - h - k);
  const A = Float64Array.from({ length: n * n }, (_, at) => {
    const [i, j] = [Math.floor(at / n), at % n];
    return (i === j ? 1 : 0) - kernel(x[i], j);
  });
  const values = qrSolve(A, n, n, new Float64Array(n).fill(1)).x;
  const chances = qrSolve(A, n, n, Float64Array.from(x, above)).x;
  let length = 1;
  let chance = above(0);
  for (let j = 0; j < n; j++) {
    length += kernel(0, j) * values[j];
    chance += kernel(0, j) * chances[j];
  }
  return length / chance;
}

/**
 * False alarms a run, of values as they should be: of a band of +-width, the chance of one value outside; of a cumulative
 * sum, one over its mean run length. Times the runs a month it is what a person will be called for nothing.
 */
export function falseAlarmsPerRun(
  chart: { readonly width: number } | { readonly k: number; readonly h: number },
): number {
  if ("width" in chart) {
    if (!(chart.width > 0)) refuse("out-of-domain", `the width is ${chart.width}`);
    return 2 * normalCdf(-chart.width);
  }
  return 1 / cusumRunLength(chart.k, chart.h);
}
