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

const scratch = { f: new Float64Array(0), gain: new Float64Array(0), second: new Float64Array(0) };

/** Update with one scalar y = h'z + noise of variance r. Returns the log density of the innovation. */
export function updateScalar(state: State, h: Float64Array, y: number, r: number): number {
  if (scratch.f.length !== state.n) scratch.f = new Float64Array(state.n);
  project(state, h, scratch.f);
  return updateProjected(state, scratch.f, y - dot(h, state.mean), r);
}

/** The same where f = L'h and the innovation y - h'z are known already. */
export function updateProjected(state: State, f: Float64Array, innovation: number, r: number): number {
  const { n, mean, factor } = state;
  if (scratch.gain.length !== n) scratch.gain = new Float64Array(n);
  const { gain } = scratch;
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

/**
 * Two updates in one sweep over the factor: outputs of independent noise r0 and r1, c0 = L'h0 and c1 = L'h1,
 * innovations e before either. The first update's factor is L M with M known in closed form, so the second's column is
 * M'c1 = d c1 - o (sum over k > j of c0 c1), without the rows being projected again.
 */
export function updatePair(
  state: State,
  c0: Float64Array,
  c1: Float64Array,
  e: Float64Array,
  r0: number,
  r1: number,
): void {
  const { n, mean, factor } = state;
  if (scratch.gain.length !== n) scratch.gain = new Float64Array(n);
  if (scratch.second.length !== n) scratch.second = new Float64Array(n);
  const { gain: gain0, second: gain1 } = scratch;
  gain0.fill(0);
  gain1.fill(0);
  let after0 = r0;
  let after1 = r1;
  let crossed = 0;
  for (let j = n - 1; j >= 0; j--) {
    const f0 = c0[j];
    const before0 = after0 + f0 * f0;
    const d0 = Math.sqrt(after0 / before0);
    const o0 = f0 / Math.sqrt(after0 * before0);
    const f1 = d0 * c1[j] - o0 * crossed;
    crossed += f0 * c1[j];
    const before1 = after1 + f1 * f1;
    const d1 = Math.sqrt(after1 / before1);
    const o1 = f1 / Math.sqrt(after1 * before1);
    for (let i = j, at = j * n + j; i < n; i++, at += n) {
      const l = factor[at];
      const g0 = gain0[i];
      const g1 = gain1[i];
      const between = l * d0 - g0 * o0;
      gain0[i] = g0 + f0 * l;
      factor[at] = between * d1 - g1 * o1;
      gain1[i] = g1 + f1 * between;
    }
    after0 = before0;
    after1 = before1;
  }
  const step0 = e[0] / after0;
  const step1 = (e[1] - crossed * step0) / after1;
  for (let i = 0; i < n; i++) mean[i] += gain0[i] * step0 + gain1[i] * step1;
}

/** Adds independent noise of standard deviation sd to state i, which must be among the last rows for this to be cheap. */
export function addNoise(state: State, i: number, sd: number): void {
  const { n, factor } = state;
  if (i === n - 1) {
    const l = factor[n * n - 1];
    factor[n * n - 1] = Math.sqrt(l * l + sd * sd);
    return;
  }
  if (i === n - 2) {
    // One rotation, written out: this runs twice a deposition.
    const at = n * n - n - 2;
    const l = factor[at];
    const below = factor[n * n - 2];
    // Square roots, not Math.hypot: these are standard deviations far from overflow, and it is several times slower.
    const r = Math.sqrt(l * l + sd * sd);
    const turned = (sd * below) / r;
    const corner = factor[n * n - 1];
    factor[at] = r;
    factor[n * n - 2] = (l * below) / r;
    factor[n * n - 1] = Math.sqrt(corner * corner + turned * turned);
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
