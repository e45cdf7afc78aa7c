/**
 * How a goal compares with the scatter of what was laid, and what may be promised about it. Role: one number for a report,
 * given only with its lower bound and never on fewer than twenty runs. It is Ppk, made with the standard deviation of all
 * runs: the moving range reads too little scatter on runs that were adjusted. Normal, independent values are assumed.
 */
import { finite, refuse } from "../errors.ts";
import { chiSquarePdf, chiSquareQuantile } from "./chi-square.ts";
import { checkProbability, normalCdf } from "./normal.ts";
import { integrate } from "./quadrature.ts";
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

/** Runs below which no capability is given: at twenty the lower bound is still a quarter below the estimate. */
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
    const hint = "with fewer the true value may be anything from half to twice the estimate";
    refuse("too-few-runs", `capability needs ${LEAST_RUNS} runs, got ${n}`, { hint });
  }
  let mean = 0;
  for (let i = 0; i < n; i++) mean += finite(values[i], `value ${i + 1}`) / n;
  let square = 0;
  for (let i = 0; i < n; i++) square += (values[i] - mean) ** 2;
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
  const t = 3 * Math.sqrt(n) * finite(ppk, "Ppk");
  const excess = (delta: number) => noncentralTCdf(t, n - 1, delta) - confidence;
  // The bound lies below the estimate by about z sqrt(1 + t^2/2n); walk down until it is enclosed.
  let reach = 2 + Math.abs(t) / Math.sqrt(n);
  while (excess(t - reach) < 0 && reach < 1e6) reach *= 2;
  return findRoot(excess, t - reach, t, { tolerance: 1e-10 }) / (3 * Math.sqrt(n));
}

/**
 * Probability that (Z + delta)/sqrt(chi-square/degrees) <= t: the mean of F(t sqrt(c/degrees) - delta) over the chi-square
 * law, integrated where that law has all but 1e-15 of its weight. Degrees are at least 1.
 */
export function noncentralTCdf(t: number, degrees: number, delta: number): number {
  finite(t, "t");
  finite(delta, "delta");
  // In s = sqrt(c): its density is smooth at zero for all degrees, and about 1/sqrt(2) wide for all.
  const low = Math.sqrt(chiSquareQuantile(1e-16, degrees));
  const high = Math.sqrt(chiSquareQuantile(1 - 2 ** -52, degrees));
  const scale = t / Math.sqrt(degrees);
  const pieces = Math.ceil((high - low) * (1 + Math.abs(scale)));
  let sum = 0;
  for (let i = 0; i < pieces; i++) {
    const from = low + ((high - low) * i) / pieces;
    const to = low + ((high - low) * (i + 1)) / pieces;
    sum += integrate((s) => normalCdf(scale * s - delta) * chiSquarePdf(s * s, degrees) * 2 * s, from, to, 20);
  }
  return Math.min(1, sum);
}
