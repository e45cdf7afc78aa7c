/**
 * The square-root Kalman filter: state mean z and lower-triangular L with covariance P = L L'. Small, dense, in place.
 *
 * Measurement update in Carlson's triangular form (N. A. Carlson, "Fast triangular formulation of the square root filter",
 * AIAA J. 11 (1973), from memory): with f = L'h, alpha = r + f'f the new factor is L M, M the lower factor of
 * I - f f'/alpha, known in closed form. It keeps P positive definite whatever the rounding.
 *
 * The states that steps and walks act on are the last ones, so that adding noise to them or resetting them at a clean
 * touches the last rows only.
 */

export interface State {
  n: number;
  mean: Float64Array;
  /** n x n, row-major, lower triangular. */
  factor: Float64Array;
}

export function copyState(state: State): State {
  return { n: state.n, mean: state.mean.slice(), factor: state.factor.slice() };
}

/** State with independent components. */
export function diagonalState(means: ArrayLike<number>, sds: ArrayLike<number>): State {
  const n = means.length;
  const factor = new Float64Array(n * n);
  for (let i = 0; i < n; i++) factor[i * n + i] = sds[i];
  return { n, mean: Float64Array.from(means), factor };
}

/** L'h into f (length n). */
export function project(state: State, h: Float64Array, f: Float64Array): void {
  const { n, factor } = state;
  f.fill(0);
  for (let i = 0; i < n; i++) {
    const hi = h[i];
    if (hi === 0) continue;
    const row = i * n;
    for (let j = 0; j <= i; j++) f[j] += factor[row + j] * hi;
  }
}

export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
  return sum;
}

const scratch = { f: new Float64Array(64), gain: new Float64Array(64) };

/** Update with one scalar y = h'z + noise of variance r. Returns the log density of the innovation. */
export function updateScalar(state: State, h: Float64Array, y: number, r: number): number {
  const { n, mean, factor } = state;
  if (scratch.f.length !== n) {
    scratch.f = new Float64Array(n);
    scratch.gain = new Float64Array(n);
  }
  const { f, gain } = scratch;
  project(state, h, f);
  const innovation = y - dot(h, mean);
  const alpha = r + dot(f, f);
  gain.fill(0);
  // Backwards: after is r + sum over i > j of f_i^2, before adds f_j^2; gain accumulates sum over k > j of f_k L[:,k].
  let after = r;
  for (let j = n - 1; j >= 0; j--) {
    const fj = f[j];
    const before = after + fj * fj;
    if (fj !== 0) {
      const diagonal = Math.sqrt(after / before);
      const off = fj / Math.sqrt(after * before);
      for (let i = j, at = j * n + j; i < n; i++, at += n) {
        const lij = factor[at];
        factor[at] = lij * diagonal - gain[i] * off;
        gain[i] += fj * lij;
      }
    }
    after = before;
  }
  const step = innovation / alpha;
  for (let i = 0; i < n; i++) mean[i] += gain[i] * step;
  return -0.5 * (Math.log(2 * Math.PI * alpha) + innovation * step);
}

/** Adds independent noise of standard deviation sd to state i, which must be among the last rows for this to be cheap. */
export function addNoise(state: State, i: number, sd: number): void {
  const { n, factor } = state;
  if (i === n - 1) {
    factor[n * n - 1] = Math.hypot(factor[n * n - 1], sd);
    return;
  }
  if (i === n - 2) {
    // One rotation, written out: this runs twice a deposition.
    const at = n * n - n - 2;
    const l = factor[at];
    const below = factor[n * n - 2];
    const r = Math.hypot(l, sd);
    factor[at] = r;
    factor[n * n - 2] = (l * below) / r;
    factor[n * n - 1] = Math.hypot(factor[n * n - 1], (sd * below) / r);
    return;
  }
  // Rank-one update of the factor by v = sd e_i; v has entries from row i on only.
  const v = new Float64Array(n);
  v[i] = sd;
  for (let j = i; j < n; j++) {
    if (v[j] === 0) continue;
    const ljj = factor[j * n + j];
    if (ljj === 0) {
      // A state known exactly so far: its column starts from the noise alone.
      for (let k = j; k < n; k++) factor[k * n + j] = v[k];
      return;
    }
    const r = Math.hypot(ljj, v[j]);
    const c = r / ljj;
    const s = v[j] / ljj;
    factor[j * n + j] = r;
    for (let k = j + 1; k < n; k++) {
      const lkj = (factor[k * n + j] + s * v[k]) / c;
      factor[k * n + j] = lkj;
      v[k] = c * v[k] - s * lkj;
    }
  }
}

/** Forgets state i and gives it a fresh N(mean, sd): exact only when no later row depends on it, so reset from the last back. */
export function resetLast(state: State, fresh: readonly { mean: number; sd: number }[]): void {
  const { n, mean, factor } = state;
  const first = n - fresh.length;
  for (let i = first; i < n; i++) {
    mean[i] = fresh[i - first].mean;
    for (let j = 0; j < n; j++) factor[i * n + j] = 0;
    factor[i * n + i] = fresh[i - first].sd;
  }
}

/** h' P h without touching the state. */
export function varianceAlong(state: State, h: Float64Array): number {
  const f = new Float64Array(state.n);
  project(state, h, f);
  return dot(f, f);
}

/** P, dense n x n. */
export function covariance(state: State): Float64Array {
  const { n, factor } = state;
  const p = new Float64Array(n * n);
  for (let i = 0; i < n; i++)
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let k = 0; k <= j; k++) sum += factor[i * n + k] * factor[j * n + k];
      p[i * n + j] = sum;
      p[j * n + i] = sum;
    }
  return p;
}

/** Lower factor of a symmetric positive definite a (n x n, in place, upper part ignored and zeroed); false when it is not. */
export function factorInPlace(a: Float64Array, n: number): boolean {
  for (let j = 0; j < n; j++) {
    const rowJ = j * n;
    let d = a[rowJ + j];
    for (let k = 0; k < j; k++) d -= a[rowJ + k] * a[rowJ + k];
    if (!(d > 0)) return false;
    const root = Math.sqrt(d);
    a[rowJ + j] = root;
    for (let i = j + 1; i < n; i++) {
      const rowI = i * n;
      let sum = a[rowI + j];
      for (let k = 0; k < j; k++) sum -= a[rowI + k] * a[rowJ + k];
      a[rowI + j] = sum / root;
    }
    for (let i = 0; i < j; i++) a[i * n + j] = 0;
  }
  return true;
}
