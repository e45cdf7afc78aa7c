/**
 * Nonlinear least squares inside bounds. Role: reading a film from a spectrum, calibrating an optical constant.
 * Levenberg-Marquardt on scaled parameters, each step a QR solution of the augmented Jacobian (never the normal
 * equations); parameters at a bound whose gradient points outwards are held, steps that leave the box are projected
 * onto it. Damping as H. B. Nielsen (1999, IMM-REP-1999-05), scaling and the cosine test as J. J. More (1978); both
 * from memory.
 */
import { refuse } from "../errors.ts";
import { centralDifferences } from "./differences.ts";
import { columnLength, inverseOfGram, qrSolve } from "./householder.ts";

/** A problem: residuals r(p), model minus data or data minus model, divided by the noise if that differs by row. */
export interface ResidualProblem {
  /** Writes the m residuals for parameters p. Not finite values mark a forbidden place: the step is shortened. */
  residuals(p: Float64Array, out: Float64Array): void;
  /** Number of residuals, m. */
  count: number;
  start: ArrayLike<number>;
  /** Writes dr_i/dp_j at [i * n + j]; without it, central differences. */
  jacobian?(p: Float64Array, out: Float64Array): void;
  lower?: ArrayLike<number>;
  upper?: ArrayLike<number>;
  /** Typical size of each parameter, for the difference step; default |start|, or 1 where that is 0. */
  typical?: ArrayLike<number>;
  /** Most steps tried, refused ones included; default 500. */
  maxSteps?: number;
}

/** Why it stopped. All but `limit` and `stuck` count as converged. */
export type FitStop = "gradient" | "flat" | "step" | "exact" | "stuck" | "limit";

/** A nonlinear fit of n parameters to m residuals. */
export interface NonlinearFit {
  readonly parameters: Float64Array;
  /** False: the numbers are where it stood, not a fit. */
  readonly converged: boolean;
  readonly stop: FitStop;
  readonly steps: number;
  readonly residuals: Float64Array;
  readonly residualSumOfSquares: number;
  /** m minus the number of parameters not held at a bound. */
  readonly degreesOfFreedom: number;
  /** Null when no degree of freedom is left. */
  readonly residualSd: number | null;
  /** s^2 (J^T J)^-1, n x n, zero for held parameters; null without degrees of freedom or for a rank-deficient J. */
  readonly covariance: Float64Array | null;
  /** Roots of its diagonal, or null with it. */
  readonly standardErrors: Float64Array | null;
  /** True for each parameter held at a bound: its error is not given by `covariance`. */
  readonly atBound: readonly boolean[];
}

/** Cosine between residuals and each Jacobian column below which the gradient is zero for all purposes. */
const GRADIENT_COSINE = 1e-13;
/** Predicted relative gain below which the sum of squares, which carries 1e-16 rounding per term, cannot judge a step. */
const FLAT = 1e-14;
/** Steps taken on flat ground: three raise Hahn1 of NIST from 8.4 to 10 right digits. */
const FLAT_STEPS = 3;
/** Relative parameter change that is rounding. */
const STEP = 1e-15;

/**
 * Minimises the sum of squared residuals from `start` (projected into the bounds). Deterministic; local: another start
 * may lead elsewhere. Refuses `bad-bounds` (lower > upper), `not-a-number` (start or residuals there not finite) and
 * `too-few-rows` (m < n).
 */
export function nonlinearLeastSquares(problem: ResidualProblem): NonlinearFit {
  const m = problem.count;
  const n = problem.start.length;
  const lower = bound(problem.lower, n, -Infinity);
  const upper = bound(problem.upper, n, Infinity);
  for (let j = 0; j < n; j++) {
    if (!(lower[j] <= upper[j])) refuse("bad-bounds", `parameter ${j + 1} runs from ${lower[j]} to ${upper[j]}`);
    if (!Number.isFinite(problem.start[j])) refuse("not-a-number", `parameter ${j + 1} starts at ${problem.start[j]}`);
  }
  if (m < n || n < 1) refuse("too-few-rows", `${n} parameters and ${m} residuals`);
  const clip = (value: number, j: number) => Math.min(upper[j], Math.max(lower[j], value));

  let p = Float64Array.from({ length: n }, (_, j) => clip(problem.start[j], j));
  let r = new Float64Array(m);
  problem.residuals(p, r);
  let cost = sumOfSquares(r);
  if (!Number.isFinite(cost)) refuse("not-a-number", `the residuals at the start sum to ${cost}`);
  const J = new Float64Array(m * n);
  const writeJacobian = () => {
    if (problem.jacobian) problem.jacobian(p, J);
    else centralDifferences({ ...problem, lower, upper }, p, J);
  };
  writeJacobian();
  const scale = new Float64Array(n);
  let damping = 1e-3;
  let growth = 2;
  let flatSteps = 0;
  let stop: FitStop = "limit";
  let steps = 0;
  const maxSteps = problem.maxSteps ?? 500;
  for (; steps < maxSteps; steps++) {
    if (cost === 0) {
      stop = "exact";
      break;
    }
    growScale(scale, J, m, n);
    const free = freeParameters(p, r, J, lower, upper);
    if (largestCosine(r, J, m, n, free, cost) <= GRADIENT_COSINE) {
      stop = "gradient";
      break;
    }
    const step = dampedStep(r, J, m, n, free, scale, damping);
    const trial = p.map((value, j) => clip(value + step[j], j));
    const moved = trial.map((value, j) => value - p[j]);
    const gain = predictedGain(r, J, m, n, moved, cost);
    const trialResiduals = new Float64Array(m);
    problem.residuals(trial, trialResiduals);
    const trialCost = sumOfSquares(trialResiduals);
    const small = moved.every((change, j) => Math.abs(change) <= STEP * Math.abs(p[j]));
    const flat = gain >= 0 && gain <= FLAT * cost && trialCost <= cost * (1 + FLAT);
    const quality = gain > 0 ? (cost - trialCost) / gain : -1;
    if (flat || quality > 1e-4) {
      // On flat ground the cost, rounding by now, cannot judge: take a few nearly undamped steps, then stop.
      p = trial;
      r = trialResiduals;
      cost = trialCost;
      writeJacobian();
      damping *= flat ? 0.01 : Math.max(1 / 3, 1 - (2 * Math.min(quality, 1) - 1) ** 3);
      growth = 2;
      flatSteps += flat ? 1 : 0;
      if (small || flatSteps === FLAT_STEPS) {
        stop = small ? "step" : "flat";
        break;
      }
    } else {
      damping *= growth;
      growth *= 2;
      if (small || !Number.isFinite(damping)) {
        // Not even the smallest step helps: rounding if the last full steps were small too, else a wrong Jacobian.
        stop = largestCosine(r, J, m, n, free, cost) <= 1e-6 ? "step" : "stuck";
        break;
      }
    }
  }
  return summarise(p, r, J, cost, stop, steps, freeParameters(p, r, J, lower, upper));
}

function bound(given: ArrayLike<number> | undefined, n: number, otherwise: number): Float64Array {
  if (given && given.length !== n) refuse("bad-bounds", `${n} parameters but ${given.length} bounds`);
  return given ? Float64Array.from(given) : new Float64Array(n).fill(otherwise);
}

function sumOfSquares(r: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < r.length; i++) sum += r[i] * r[i];
  return sum;
}

/** Largest column lengths seen so far: the scaling that keeps the method independent of units. */
function growScale(scale: Float64Array, J: Float64Array, m: number, n: number): void {
  for (let j = 0; j < n; j++) {
    const length = columnLength(J, j, m, n);
    if (length > scale[j]) scale[j] = length;
  }
}

/** Half the gradient of the sum of squares with respect to parameter j. */
function slope(r: Float64Array, J: Float64Array, n: number, j: number): number {
  let sum = 0;
  for (let i = 0; i < r.length; i++) sum += J[i * n + j] * r[i];
  return sum;
}

/** Indices of the parameters that may move: not at a bound with the descent direction pointing out of the box. */
function freeParameters(p: Float64Array, r: Float64Array, J: Float64Array, lower: Float64Array, upper: Float64Array) {
  const free: number[] = [];
  for (let j = 0; j < p.length; j++) {
    const gradient = slope(r, J, p.length, j);
    const held = lower[j] === upper[j] || (p[j] <= lower[j] && gradient >= 0) || (p[j] >= upper[j] && gradient <= 0);
    if (!held) free.push(j);
  }
  return free;
}

function largestCosine(r: Float64Array, J: Float64Array, m: number, n: number, free: number[], cost: number): number {
  let largest = 0;
  for (const j of free) {
    const length = columnLength(J, j, m, n);
    if (length > 0) largest = Math.max(largest, Math.abs(slope(r, J, n, j)) / (length * Math.sqrt(cost)));
  }
  return largest;
}

/** Solves min |J s + r|^2 + damping |D s|^2 over the free parameters; zero for the held ones. */
function dampedStep(
  r: Float64Array,
  J: Float64Array,
  m: number,
  n: number,
  free: number[],
  scale: Float64Array,
  damping: number,
): Float64Array {
  const step = new Float64Array(n);
  const f = free.length;
  if (f === 0) return step;
  const A = new Float64Array((m + f) * f);
  const b = new Float64Array(m + f);
  for (let i = 0; i < m; i++) {
    b[i] = -r[i];
    for (let k = 0; k < f; k++) A[i * f + k] = J[i * n + free[k]] / (scale[free[k]] || 1);
  }
  // The floor keeps a flat direction solvable without moving any other digit.
  const root = Math.sqrt(Math.max(damping, 1e-24));
  for (let k = 0; k < f; k++) A[(m + k) * f + k] = root;
  const { x } = qrSolve(A, m + f, f, b, 0);
  for (let k = 0; k < f; k++) step[free[k]] = x[k] / (scale[free[k]] || 1);
  return step;
}

function predictedGain(r: Float64Array, J: Float64Array, m: number, n: number, moved: Float64Array, cost: number) {
  let after = 0;
  for (let i = 0; i < m; i++) {
    let value = r[i];
    for (let j = 0; j < n; j++) value += J[i * n + j] * moved[j];
    after += value * value;
  }
  return cost - after;
}

function summarise(
  parameters: Float64Array,
  residuals: Float64Array,
  J: Float64Array,
  cost: number,
  stop: FitStop,
  steps: number,
  free: number[],
): NonlinearFit {
  const m = residuals.length;
  const n = parameters.length;
  const degreesOfFreedom = m - free.length;
  const variance = degreesOfFreedom > 0 ? cost / degreesOfFreedom : null;
  const unit = unitCovariance(J, m, n, free);
  const covariance = variance === null || unit === null ? null : unit.map((v) => v * variance);
  return {
    parameters,
    converged: stop !== "limit" && stop !== "stuck",
    stop,
    steps,
    residuals,
    residualSumOfSquares: cost,
    degreesOfFreedom,
    residualSd: variance === null ? null : Math.sqrt(variance),
    covariance,
    standardErrors: covariance && parameters.map((_, j) => Math.sqrt(covariance[j * n + j])),
    atBound: Array.from(parameters, (_, j) => !free.includes(j)),
  };
}

/** (J^T J)^-1 over the free parameters, spread into n x n; null when they cannot be told apart. */
function unitCovariance(J: Float64Array, m: number, n: number, free: number[]): Float64Array | null {
  const f = free.length;
  const full = new Float64Array(n * n);
  if (f === 0) return full;
  const columns = new Float64Array(m * f);
  const lengths = Float64Array.from(free, (j) => columnLength(J, j, m, n));
  if (lengths.some((length) => !(length > 0) || !Number.isFinite(length))) return null;
  for (let i = 0; i < m; i++) for (let k = 0; k < f; k++) columns[i * f + k] = J[i * n + free[k]] / lengths[k];
  const { R } = qrSolve(columns, m, f, new Float64Array(m), 0);
  for (let k = 0; k < f; k++) if (!(Math.abs(R[k * f + k]) > 1e-13)) return null;
  const unit = inverseOfGram(R, f);
  for (let a = 0; a < f; a++) {
    for (let b = 0; b < f; b++) full[free[a] * n + free[b]] = unit[a * f + b] / (lengths[a] * lengths[b]);
  }
  return full;
}
