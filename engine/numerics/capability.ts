/**
 * How a goal compares with the scatter of what was laid, and what may be promised about it. Role: one number for a report,
 * given only with its lower bound and never on fewer than twenty runs. It is Ppk, made with the standard deviation of all
 * runs: the moving range reads too little scatter on runs that were adjusted. Normal, independent values are assumed.
 */
import { finite, refuse } from "../errors.ts";
import { chiSquarePdf, chiSquareQuantile } from "./chi-square.ts";
import { checkProbability, normalCdf } from "./normal.ts";
import { gaussLegendre } from "./quadrature.ts";
import { findRoot } from "./root.ts";

/** The goal: at least one side, in the unit of the values. The target, when there is one, gives ppm. */
export interface CapabilityGoal {
  readonly lower?: number;
  readonly upper?: number;
  readonly target?: number;
}

/** Indices of a goal against a mean and a standard deviation; null where the goal lacks what they need. */
export interface CapabilityIndices {
  /** (upper - lower)/6 s. */
  readonly pp: number | null;
  /** Distance from the mean to the lower, to the upper and to the nearer side, in 3 s. */
  readonly ppl: number | null;
  readonly ppu: number | null;
  readonly ppk: number;
  /** (upper - lower)/6 sqrt(s^2 + (mean - target)^2). */
  readonly ppm: number | null;
}

/** Runs below which no capability is given: an estimate of 1.33 from twenty runs promises 0.95, from ten 0.78. */
export const LEAST_RUNS = 20;

/**
 * The indices (NIST/SEMATECH e-Handbook, section 6.1.6). Refuses `out-of-domain`: a standard deviation that is not
 * positive, a goal without sides or with its lower side not below its upper.
 */
export function capabilityIndices(mean: number, sd: number, goal: CapabilityGoal): CapabilityIndices {
  finite(mean, "the mean");
  if (!(sd > 0) || !Number.isFinite(sd)) refuse("out-of-domain", `the standard deviation is ${sd}`);
  const { lower, upper, target } = goal;
  for (const [name, value] of Object.entries({ lower, upper, target })) {
    if (value !== undefined) finite(value, `the goal's ${name}`);
  }
  const ppl = lower === undefined ? null : (mean - lower) / (3 * sd);
  const ppu = upper === undefined ? null : (upper - mean) / (3 * sd);
  const sides = [ppl, ppu].filter((side) => side !== null);
  if (sides.length === 0) refuse("out-of-domain", "the goal has neither a lower nor an upper side");
  const width = lower === undefined || upper === undefined ? null : upper - lower;
  if (width !== null && !(width > 0)) refuse("out-of-domain", `the goal runs from ${lower} to ${upper}`);
  return {
    pp: width === null ? null : width / (6 * sd),
    ppl,
    ppu,
    ppk: Math.min(...sides),
    ppm: width === null || target === undefined ? null : width / (6 * Math.hypot(sd, mean - target)),
  };
}

/** What twenty or more runs say. */
export interface Capability extends CapabilityIndices {
  readonly runs: number;
  readonly mean: number;
  /** Of all runs, with n - 1. */
  readonly sd: number;
  /** One-sided: the true Ppk is above it with the confidence asked for. */
  readonly ppkAtLeast: number;
}

/**
 * Capability of the values for the goal, its lower bound at `confidence` (one-sided). Refuses `too-few-runs` below twenty,
 * and what `capabilityIndices` refuses.
 */
export function capability(values: ArrayLike<number>, goal: CapabilityGoal, confidence = 0.95): Capability {
  const n = values.length;
  if (n < LEAST_RUNS) {
    const hint = "an estimate of 1.33 from ten runs promises no more than 0.78";
    refuse("too-few-runs", `capability needs ${LEAST_RUNS} runs, got ${n}`, { hint });
  }
  // About the first value: runs that are all the same scatter by exactly nothing, and are refused.
  const first = finite(values[0], "value 1");
  let off = 0;
  for (let i = 0; i < n; i++) off += (finite(values[i], `value ${i + 1}`) - first) / n;
  const mean = first + off;
  let square = 0;
  for (let i = 0; i < n; i++) square += (values[i] - first - off) ** 2;
  const sd = Math.sqrt(square / (n - 1));
  const indices = capabilityIndices(mean, sd, goal);
  return { ...indices, runs: n, mean, sd, ppkAtLeast: ppkLowerBound(indices.ppk, n, confidence) };
}

/** Two-sided limits of Pp from n values: pp sqrt(chi-square quantile/(n - 1)). Exact for normal values. */
export function ppLimits(pp: number, n: number, confidence = 0.95): { lower: number; upper: number } {
  checkProbability(confidence);
  if (!(pp >= 0) || !(n >= 2)) refuse("out-of-domain", `Pp ${pp} of ${n} values`);
  const at = (p: number) => pp * Math.sqrt(chiSquareQuantile(p, n - 1) / (n - 1));
  return { lower: at((1 - confidence) / 2), upper: at((1 + confidence) / 2) };
}

/**
 * One-sided lower bound of Ppk from n values: the c at which an estimate this large or larger has probability
 * 1 - confidence. Exact for a goal with one side (3 sqrt(n) Ppk follows a noncentral t law). With two sides it can only be
 * too low: the estimate is at most that of the side which is truly nearer, whose bound holds. Refuses `out-of-domain`.
 */
export function ppkLowerBound(ppk: number, n: number, confidence = 0.95): number {
  if (!(n >= 2) || !Number.isFinite(n)) refuse("out-of-domain", `Ppk of ${n} values`);
  if (!(confidence > 0.5 && confidence < 1)) refuse("bad-probability", `a confidence of ${confidence}`);
  // Beyond 100 only the scatter is in doubt, no longer the mean (in 1e-5): the bound is in proportion.
  if (Math.abs(finite(ppk, "Ppk")) > 100)
    return (Math.abs(ppk) / 100) * ppkLowerBound(100 * Math.sign(ppk), n, confidence);
  const t = 3 * Math.sqrt(n) * ppk;
  const cdf = noncentralT(t, n - 1);
  const excess = (delta: number) => cdf(delta) - confidence;
  // The bound lies below the estimate by about z sqrt(1 + t^2/2n); walk down until it is enclosed.
  let reach = 2 + Math.abs(t) / Math.sqrt(n);
  while (excess(t - reach) < 0 && reach < 1e6) reach *= 2;
  return findRoot(excess, t - reach, t, { tolerance: 1e-10 }) / (3 * Math.sqrt(n));
}

/**
 * Probability that (Z + delta)/sqrt(chi-square/degrees) <= t: the mean of F(t sqrt(c/degrees) - delta) over the chi-square
 * law, by quadrature. About 1e-13 absolute. Degrees are at least 1.
 */
export function noncentralTCdf(t: number, degrees: number, delta: number): number {
  return noncentralT(finite(t, "t"), degrees)(finite(delta, "delta"));
}

/** The same as a function of delta: the chi-square law is worked out once. */
function noncentralT(t: number, degrees: number): (delta: number) => number {
  // In s = sqrt(c), the length of a normal vector, which is further than x from its mean with a chance below
  // 2 exp(-x^2/2) for all degrees; the mean is within 0.3 of sqrt(degrees). 9 leaves 1e-16.
  const low = Math.max(0, Math.sqrt(degrees) - 9);
  const high = Math.sqrt(degrees) + 9;
  const scale = t / Math.sqrt(degrees);
  // Pieces on which both factors, about 1 and 1/scale wide, are smooth for twenty nodes.
  const pieces = Math.ceil(((high - low) * (1 + Math.abs(scale))) / 3);
  const half = (high - low) / (2 * pieces);
  const { nodes, weights } = gaussLegendre(20);
  const place = (i: number) => low + half * (1 + 2 * Math.floor(i / 20) + nodes[i % 20]);
  const at = Float64Array.from({ length: 20 * pieces }, (_, i) => scale * place(i));
  const weight = at.map((_, i) => {
    const s = place(i);
    return half * weights[i % 20] * chiSquarePdf(s * s, degrees) * 2 * s;
  });
  return (delta) => {
    let sum = 0;
    for (let i = 0; i < at.length; i++) sum += weight[i] * normalCdf(at[i] - delta);
    return Math.min(1, sum);
  };
}
