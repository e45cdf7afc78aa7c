/**
 * One run enters the filter under three readings at once: ordinary, bad measurement (its noise is larger), unlogged step
 * (the chamber moved, as at a clean nobody wrote down). Each is weighed by how well it predicted the reading; the three
 * posteriors are merged into one Gaussian with the same mean and covariance. The spread between them stays in the
 * covariance, so that the next run can decide between outlier and step.
 *
 * The merge is done on the square root: all three covariances are P + U M U' with U = [P H', E] of 3 or 4 columns, so the
 * merged factor is L chol(I + V M V') with V = L^-1 U = [L'H', L^-1 E].
 */
import { hypothesisWeights, scatter } from "./priors.ts";
import { addNoise, dot, factorInPlace, project, type State, updateScalar } from "./square-root.ts";

/** What was seen: one or two outputs, their rows, residual noise (gauge + process) and which step states they touch. */
export interface Observation {
  rows: readonly Float64Array[];
  values: readonly number[];
  /** m x m, row-major. */
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
  row: Float64Array;
  second: Float64Array;
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
    row: new Float64Array(n),
    second: new Float64Array(n),
  };
  return scratch;
}

/**
 * Updates the state in place with an observation under the three hypotheses. `stepVariance` is that of an unlogged step:
 * [index, ln rate]. Source of the idea: multiple-hypothesis merging (Gaussian-sum filter with one component kept).
 */
export function observe(state: State, seen: Observation, stepVariance: readonly [number, number]): Verdict {
  const { n, mean } = state;
  const x = scratchFor(n);
  const m = seen.rows.length;
  const { columns, e, s, weighed } = x;
  for (let i = 0; i < m; i++) {
    project(state, seen.rows[i], columns[i]);
    e[i] = seen.values[i] - dot(seen.rows[i], mean);
  }
  for (let i = 0; i < m; i++)
    for (let j = 0; j < m; j++) s[i * m + j] = seen.noise[i * m + j] + dot(columns[i], columns[j]);
  const o0 = seen.outputs[0];
  const o1 = m === 2 ? seen.outputs[1] : o0;
  weigh(s, m, 0, 0, e, weighed[0]);
  weigh(s, m, scatter.badMeasurement[o0] ** 2, scatter.badMeasurement[o1] ** 2, e, weighed[1]);
  weigh(s, m, stepVariance[o0], stepVariance[o1], e, weighed[2]);
  const l0 = logPrior[0] + weighed[0].logN;
  const l1 = logPrior[1] + weighed[1].logN;
  const l2 = logPrior[2] + weighed[2].logN;
  const top = Math.max(l0, l1, l2);
  const w0 = Math.exp(l0 - top);
  const w1 = Math.exp(l1 - top);
  const w2 = Math.exp(l2 - top);
  const total = w0 + w1 + w2;
  const weights: Verdict["weights"] = [w0 / total, w1 / total, w2 / total];
  if (weights[0] > mergeBelow) {
    const share = Math.sqrt(weights[2]);
    addNoise(state, n - 2, share * Math.sqrt(stepVariance[0]));
    addNoise(state, n - 1, share * Math.sqrt(stepVariance[1]));
    ordinary(state, seen, x);
  } else merge(state, seen, x, weights, stepVariance);
  return { logDensity: top + Math.log(total), weights };
}

const logPrior = hypothesisWeights.map(Math.log);

/** The ordinary posterior: outputs decorrelated by hand, then one at a time. */
function ordinary(state: State, seen: Observation, x: Scratch): void {
  const [r11, r12, , r22] = seen.noise;
  updateScalar(state, seen.rows[0], seen.values[0], r11);
  if (seen.rows.length === 1) return;
  const g = r12 / r11;
  for (let i = 0; i < state.n; i++) x.second[i] = seen.rows[1][i] - g * seen.rows[0][i];
  updateScalar(state, x.second, seen.values[1] - g * seen.values[0], r22 - g * r12);
}

function merge(
  state: State,
  seen: Observation,
  x: Scratch,
  weights: Verdict["weights"],
  step: readonly [number, number],
): void {
  const { n, mean, factor } = state;
  const m = seen.rows.length;
  const c = m + 2;
  const { weighed, shift, centre, middle, inner, row, second } = x;
  // V = [L'H', L^-1 E]; E are the last two unit vectors, so L^-1 E has entries in the last two rows only.
  const [g1, g2] = [x.columns[m], m === 2 ? x.columns[3] : x.columns[2]];
  g1.fill(0);
  g2.fill(0);
  const last = (n - 1) * n + n - 1;
  g1[n - 2] = 1 / factor[last - n - 1];
  g1[n - 1] = (-factor[last - 1] * g1[n - 2]) / factor[last];
  g2[n - 1] = 1 / factor[last];
  const v = x.columns;

  // Coordinates of each mean shift in U: [u; 0] but for the step, which adds [0; Sigma Q' u].
  centre.fill(0);
  for (let h = 0; h < 3; h++) {
    const to = shift[h];
    to.fill(0);
    for (let i = 0; i < m; i++) {
      to[i] = weighed[h].u[i];
      if (h === 2) to[m + seen.outputs[i]] += step[seen.outputs[i]] * weighed[h].u[i];
    }
    for (let a = 0; a < c; a++) centre[a] += weights[h] * to[a];
  }
  // Middle matrix: minus the information gained under each hypothesis, plus the spread of the means, plus the step itself.
  middle.fill(0);
  for (let h = 0; h < 3; h++) {
    const w = weights[h];
    for (let a = 0; a < c; a++)
      for (let b = 0; b < c; b++) middle[a * c + b] += w * (shift[h][a] - centre[a]) * (shift[h][b] - centre[b]);
    for (let p = 0; p < m; p++)
      for (let q = 0; q < m; q++) {
        const gain = w * weighed[h].inverse[p * m + q];
        middle[p * c + q] -= gain;
        if (h !== 2) continue;
        const sp = m + seen.outputs[p];
        const sq = m + seen.outputs[q];
        middle[sp * c + q] -= step[sp - m] * gain;
        middle[p * c + sq] -= gain * step[sq - m];
        middle[sp * c + sq] -= step[sp - m] * gain * step[sq - m];
      }
  }
  middle[m * c + m] += weights[2] * step[0];
  middle[(m + 1) * c + m + 1] += weights[2] * step[1];

  // I + V M V', lower half.
  const vm = row;
  for (let i = 0; i < n; i++) {
    for (let b = 0; b < c; b++) {
      let sum = 0;
      for (let a = 0; a < c; a++) sum += v[a][i] * middle[a * c + b];
      vm[b] = sum;
    }
    for (let k = 0; k <= i; k++) {
      let sum = i === k ? 1 : 0;
      for (let b = 0; b < c; b++) sum += vm[b] * v[b][k];
      inner[i * n + k] = sum;
    }
  }
  second.fill(0);
  for (let a = 0; a < c; a++) for (let i = 0; i < n; i++) second[i] += v[a][i] * centre[a];
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let k = 0; k <= i; k++) sum += factor[i * n + k] * second[k];
    mean[i] += sum;
  }
  // Positive definite by construction (a mixture of covariances); if rounding says otherwise keep the prior factor, the wider answer.
  if (!factorInPlace(inner, n)) return;
  for (let i = 0; i < n; i++) {
    for (let k = 0; k <= i; k++) {
      let sum = 0;
      for (let t = k; t <= i; t++) sum += factor[i * n + t] * inner[t * n + k];
      row[k] = sum;
    }
    for (let k = 0; k <= i; k++) factor[i * n + k] = row[k];
  }
}
