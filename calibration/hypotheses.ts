/**
 * One run enters the filter under three readings at once: ordinary, bad measurement (it teaches nothing), unlogged step
 * (the chamber moved, as at a clean nobody wrote down). Each is weighed by how well it predicted the reading; the three
 * posteriors are merged into one Gaussian with the same mean and covariance. The spread between them stays in the
 * covariance, so that the next run can decide between outlier and step.
 *
 * The merge is done on the square root: all three covariances are P + U M U' with U = [P H', E] of 3 or 4 columns, so the
 * merged factor is L chol(I + V M V') with V = L^-1 U = [L'H', L^-1 E].
 */
import { hypothesisWeights, type Pair, scatter } from "./priors.ts";
import { addNoise, dot, factorInPlace, project, type State, updatePair, updateProjected } from "./square-root.ts";

/** What was seen: one or two outputs, their rows, noise and which step states they touch. */
export interface Observation {
  rows: readonly Float64Array[];
  values: readonly number[];
  /** m x m, row-major; without the process scatter when that is handed to `observe` apart. */
  noise: readonly number[];
  /** 0 for index, 1 for ln thickness, for each output. */
  outputs: readonly (0 | 1)[];
}

export interface Verdict {
  /** ln of the mixture's density at the reading. */
  logDensity: number;
  /** Posterior weights of ordinary, bad measurement, unlogged step. */
  weights: [number, number, number];
}

/**
 * Below this weight of "ordinary" the three posteriors are merged in full. Above it the merge is shortened: the step's share
 * of variance goes in as walk noise before an ordinary update, and a bad measurement of a few per cent is left aside.
 */
const mergeBelow = 0.96;
const log2pi = Math.log(2 * Math.PI);

/** S^-1 (m x m), ln det S, and for a reading's miss e: S^-1 e and ln N(e; 0, S). One a hypothesis. */
interface Weighed {
  inverse: Float64Array;
  u: Float64Array;
  logN: number;
}

function weigh(s: Float64Array, m: number, extra0: number, extra1: number, e: Float64Array, out: Weighed): void {
  const { inverse, u } = out;
  let det: number;
  if (m === 1) {
    det = s[0] + extra0;
    inverse[0] = 1 / det;
    u[0] = e[0] / det;
    out.logN = -0.5 * (log2pi + Math.log(det) + e[0] * u[0]);
    return;
  }
  const a = s[0] + extra0;
  const d = s[3] + extra1;
  det = a * d - s[1] * s[2];
  inverse[0] = d / det;
  inverse[1] = -s[1] / det;
  inverse[2] = -s[2] / det;
  inverse[3] = a / det;
  u[0] = inverse[0] * e[0] + inverse[1] * e[1];
  u[1] = inverse[2] * e[0] + inverse[3] * e[1];
  out.logN = -0.5 * (2 * log2pi + Math.log(det) + e[0] * u[0] + e[1] * u[1]);
}

/** Working arrays for states of one length: this is the innermost loop of the program, so nothing is allocated in it. */
interface Scratch {
  n: number;
  columns: Float64Array[];
  e: Float64Array;
  s: Float64Array;
  weighed: Weighed[];
  shift: Float64Array[];
  centre: Float64Array;
  middle: Float64Array;
  inner: Float64Array;
  second: Float64Array;
  noise: Float64Array;
  verdict: Verdict;
}

const freshWeighed = (): Weighed => ({ inverse: new Float64Array(4), u: new Float64Array(2), logN: 0 });
let scratch: Scratch | null = null;

function scratchFor(n: number): Scratch {
  if (scratch?.n === n) return scratch;
  scratch = {
    n,
    columns: [0, 1, 2, 3].map(() => new Float64Array(n)),
    e: new Float64Array(2),
    s: new Float64Array(4),
    weighed: [freshWeighed(), freshWeighed(), freshWeighed()],
    shift: [0, 1, 2].map(() => new Float64Array(4)),
    centre: new Float64Array(4),
    middle: new Float64Array(16),
    inner: new Float64Array(n * n),
    second: new Float64Array(n),
    noise: new Float64Array(4),
    verdict: { logDensity: 0, weights: [1, 0, 0] },
  };
  return scratch;
}

const nothing: readonly [number, number] = [0, 0];

/**
 * Updates the state in place with an observation under the three hypotheses. `stepVariance` is that of an unlogged step:
 * [index, ln rate]; `process` is added to the noise of each output. The verdict holds until the next call. Source of the
 * idea: multiple-hypothesis merging (Gaussian-sum filter with one component kept).
 */
export function observe(
  state: State,
  seen: Observation,
  stepVariance: readonly [number, number],
  process: readonly [number, number] = nothing,
  badMeasurement: Pair = scatter.badMeasurement,
): Verdict {
  const { n } = state;
  const x = scratchFor(n);
  const { outputs } = seen;
  const m = outputs.length;
  const { e, s, weighed } = x;
  const o0 = outputs[0];
  const o1 = m === 2 ? outputs[1] : o0;
  miss(state, seen, process, x);
  weigh(s, m, 0, 0, e, weighed[0]);
  weigh(s, m, badMeasurement[o0] ** 2, badMeasurement[o1] ** 2, e, weighed[1]);
  teachNothing(weighed[1], m, e);
  weigh(s, m, stepVariance[o0], stepVariance[o1], e, weighed[2]);
  const l0 = logPrior[0] + weighed[0].logN;
  const l1 = logPrior[1] + weighed[1].logN;
  const l2 = logPrior[2] + weighed[2].logN;
  const top = Math.max(l0, l1, l2);
  const w0 = Math.exp(l0 - top);
  const w1 = Math.exp(l1 - top);
  const w2 = Math.exp(l2 - top);
  const total = w0 + w1 + w2;
  const { verdict } = x;
  const { weights } = verdict;
  weights[0] = w0 / total;
  weights[1] = w1 / total;
  weights[2] = w2 / total;
  verdict.logDensity = top + Math.log(total);
  if (weights[0] > mergeBelow) {
    const share = Math.sqrt(weights[2]);
    addNoise(state, n - 2, share * Math.sqrt(stepVariance[0]));
    addNoise(state, n - 1, share * Math.sqrt(stepVariance[1]));
    ordinary(state, seen, x);
  } else merge(state, seen, x, weights, stepVariance);
  return verdict;
}

/** Degrees of freedom of a bad reading's tails, and the logarithms of its density's constant for one and two outputs. */
const tails = 4;
const tailConstant = [0, Math.log(1.329340388179137 / Math.sqrt(tails * Math.PI)), Math.log(2 / (tails * Math.PI))];

/**
 * A bad measurement says nothing about the film, so its posterior is the prior: no gain, whatever was read. Its density is
 * Student's t with the same scale, so that a slip of units (1000 nm for 88) neither drags the estimate nor tells the
 * hyper-parameter nodes apart. Gamma(5/2) and Gamma(3) over Gamma(2) give the constants.
 */
function teachNothing(bad: Weighed, m: number, e: Float64Array): void {
  const { inverse, u } = bad;
  const q = m === 1 ? e[0] * u[0] : e[0] * u[0] + e[1] * u[1];
  // weigh gave -(m ln 2 pi + ln det + q)/2.
  const halfLogDet = -bad.logN - 0.5 * (m * log2pi + q);
  bad.logN = tailConstant[m] - halfLogDet - 0.5 * (tails + m) * Math.log1p(q / tails);
  inverse.fill(0);
  u.fill(0);
}

/** Fills what one reading is weighed by: columns L'h, misses e, noise and S = H P H' + noise. */
function miss(state: State, seen: Observation, process: readonly [number, number], x: Scratch): void {
  const { rows, values, outputs } = seen;
  const { columns, e, s, noise } = x;
  const c0 = columns[0];
  project(state, rows[0], c0);
  e[0] = values[0] - dot(rows[0], state.mean);
  noise[0] = seen.noise[0] + process[outputs[0]];
  s[0] = noise[0] + dot(c0, c0);
  if (rows.length === 1) return;
  const c1 = columns[1];
  project(state, rows[1], c1);
  e[1] = values[1] - dot(rows[1], state.mean);
  noise[1] = seen.noise[1];
  noise[3] = seen.noise[3] + process[outputs[1]];
  s[1] = noise[1] + dot(c0, c1);
  s[2] = s[1];
  s[3] = noise[3] + dot(c1, c1);
}

const logPrior = hypothesisWeights.map(Math.log);

/** The ordinary posterior. The columns L'h are those from before the step's noise was added. */
function ordinary(state: State, seen: Observation, x: Scratch): void {
  const { n } = state;
  const { noise, columns, e } = x;
  const c0 = columns[0];
  const c1 = columns[1];
  refreshLast(state, seen.rows[0], c0);
  if (seen.rows.length === 1) {
    updateProjected(state, c0, e[0], noise[0]);
    return;
  }
  refreshLast(state, seen.rows[1], c1);
  const g = noise[1] / noise[0];
  // Decorrelated by hand: the second output less g times the first has noise of its own.
  if (g !== 0) {
    for (let i = 0; i < n; i++) c1[i] -= g * c0[i];
    e[1] -= g * e[0];
  }
  updatePair(state, c0, c1, e, noise[0], noise[3] - g * noise[1]);
}

/** Noise has moved the last two rows of the factor only, and with them the last two of L'h. */
function refreshLast({ n, factor }: State, h: Float64Array, f: Float64Array): void {
  const last = n * n - 1;
  f[n - 2] = factor[last - n - 1] * h[n - 2] + factor[last - 1] * h[n - 1];
  f[n - 1] = factor[last] * h[n - 1];
}

/**
 * The three posteriors merged. In steps of a few lines each: a program that is asked one thing ends before a long function
 * has been worth compiling, and list patterns cost more than indices.
 */
function merge(
  state: State,
  seen: Observation,
  x: Scratch,
  weights: Verdict["weights"],
  step: readonly [number, number],
): void {
  const { n } = state;
  const m = seen.rows.length;
  stepColumns(state, x.columns[m], x.columns[m + 1]);
  // With one output the fourth column counts nothing: its row and column of the middle matrix are zero.
  if (m === 1) x.columns[3].fill(0);
  shifts(seen, x, weights, step);
  middleMatrix(seen, x, weights, step);
  spreadFactor(x, n, m + 2);
  moveMean(state, x, m + 2);
  // Positive definite by construction (a mixture of covariances); if rounding says otherwise keep the prior factor, the wider answer.
  if (factorInPlace(x.inner, n)) timesLower(state.factor, x.inner, n);
}

/** L^-1 E of the last two unit vectors E: entries in the last two rows only. */
function stepColumns({ n, factor }: State, g1: Float64Array, g2: Float64Array): void {
  const last = n * n - 1;
  g1.fill(0);
  g2.fill(0);
  g1[n - 2] = 1 / factor[last - n - 1];
  g1[n - 1] = (-factor[last - 1] * g1[n - 2]) / factor[last];
  g2[n - 1] = 1 / factor[last];
}

/** Coordinates of each mean's shift in U, and their mean: [u; 0] but for the step, which adds [0; Sigma Q' u]. */
function shifts(seen: Observation, x: Scratch, weights: Verdict["weights"], step: readonly [number, number]): void {
  const { weighed, shift, centre } = x;
  const { outputs } = seen;
  const m = outputs.length;
  centre.fill(0);
  for (let h = 0; h < 3; h++) {
    const to = shift[h];
    const u = weighed[h].u;
    to.fill(0);
    for (let i = 0; i < m; i++) {
      to[i] = u[i];
      if (h === 2) to[m + outputs[i]] += step[outputs[i]] * u[i];
    }
    for (let a = 0; a < 4; a++) centre[a] += weights[h] * to[a];
  }
}

/** Middle matrix (4 x 4): minus the information gained under each hypothesis, plus the spread of the means, plus the step itself. */
function middleMatrix(
  seen: Observation,
  x: Scratch,
  weights: Verdict["weights"],
  step: readonly [number, number],
): void {
  const { weighed, shift, centre, middle } = x;
  const { outputs } = seen;
  const m = outputs.length;
  middle.fill(0);
  for (let h = 0; h < 3; h++) {
    addSpread(middle, weights[h], shift[h], centre);
    for (let p = 0; p < m; p++)
      for (let q = 0; q < m; q++) {
        const gain = weights[h] * weighed[h].inverse[p * m + q];
        middle[p * 4 + q] -= gain;
        if (h !== 2) continue;
        const ofP = step[outputs[p]];
        const ofQ = step[outputs[q]];
        const sp = m + outputs[p];
        const sq = m + outputs[q];
        middle[sp * 4 + q] -= ofP * gain;
        middle[p * 4 + sq] -= gain * ofQ;
        middle[sp * 4 + sq] -= ofP * gain * ofQ;
      }
  }
  middle[m * 5] += weights[2] * step[0];
  middle[(m + 1) * 5] += weights[2] * step[1];
}

function addSpread(middle: Float64Array, weight: number, shift: Float64Array, centre: Float64Array): void {
  for (let a = 0; a < 4; a++)
    for (let b = 0; b < 4; b++) middle[a * 4 + b] += weight * (shift[a] - centre[a]) * (shift[b] - centre[b]);
}

/** I + V M V', lower half, into `inner`. */
function spreadFactor({ columns, middle, inner }: Scratch, n: number, c: number): void {
  const v0 = columns[0];
  const v1 = columns[1];
  const v2 = columns[2];
  const v3 = columns[3];
  for (let i = 0, at = 0; i < n; i++, at += n) {
    const a0 = v0[i];
    const a1 = v1[i];
    const a2 = v2[i];
    const a3 = c === 4 ? v3[i] : 0;
    const m0 = a0 * middle[0] + a1 * middle[4] + a2 * middle[8] + a3 * middle[12];
    const m1 = a0 * middle[1] + a1 * middle[5] + a2 * middle[9] + a3 * middle[13];
    const m2 = a0 * middle[2] + a1 * middle[6] + a2 * middle[10] + a3 * middle[14];
    const m3 = a0 * middle[3] + a1 * middle[7] + a2 * middle[11] + a3 * middle[15];
    for (let k = 0; k <= i; k++) inner[at + k] = m0 * v0[k] + m1 * v1[k] + m2 * v2[k] + m3 * v3[k];
    inner[at + i] += 1;
  }
}

/** Moves the mean by L V centre. */
function moveMean({ n, mean, factor }: State, { columns, centre, second }: Scratch, c: number): void {
  second.fill(0);
  for (let a = 0; a < c; a++) {
    const column = columns[a];
    for (let i = 0; i < n; i++) second[i] += column[i] * centre[a];
  }
  for (let i = 0, at = 0; i < n; i++, at += n) {
    let sum = 0;
    for (let k = 0; k <= i; k++) sum += factor[at + k] * second[k];
    mean[i] += sum;
  }
}

/** factor := factor times inner, both lower triangular. */
function timesLower(factor: Float64Array, inner: Float64Array, n: number): void {
  for (let i = 0, at = 0; i < n; i++, at += n)
    for (let k = 0; k <= i; k++) {
      let sum = 0;
      for (let t = k, below = k * n + k; t <= i; t++, below += n) sum += factor[at + t] * inner[below];
      // Place k is not read again in this row: the sums to come start further right.
      factor[at + k] = sum;
    }
}
