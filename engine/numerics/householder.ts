/**
 * Householder reflections: QR factorisation and the two things made from it. Role: `qrSolve` under every least-squares
 * fit, `triangularise` under every square-root covariance (a factor with extra columns becomes lower triangular again).
 * Textbook algorithm: G. H. Golub and C. F. Van Loan, Matrix Computations, 4th ed. 2013, section 5.2 (from memory).
 */
import { refuse } from "../errors.ts";
import { solveUpper } from "./triangular.ts";

/**
 * Euclidean length of column j of A (m x n, row-major) from row `first` down, safe from over- and underflow: the sum of
 * squares is formed relative to the largest entry. Not Math.hypot: that costs ten times as much in the inner loops.
 */
export function columnLength(A: Float64Array, j: number, m: number, n: number, first = 0): number {
  let largest = 0;
  for (let i = first; i < m; i++) {
    const size = Math.abs(A[i * n + j]);
    // Written so that NaN is kept.
    if (!(size <= largest)) largest = size;
  }
  if (largest === 0 || !Number.isFinite(largest)) return largest;
  let sum = 0;
  for (let i = first; i < m; i++) {
    const share = A[i * n + j] / largest;
    sum += share * share;
  }
  return largest * Math.sqrt(sum);
}

/** Reduces A (m x n, row-major, m >= n) in place to R in its upper triangle and applies Q^T to b (length m) as well. */
function reduce(A: Float64Array, m: number, n: number, b: Float64Array | null): void {
  for (let k = 0; k < n; k++) {
    const norm = columnLength(A, k, m, n, k);
    if (norm === 0) continue;
    // The sign that avoids cancellation in the first component of the reflection vector.
    const alpha = A[k * n + k] > 0 ? -norm : norm;
    // Scaling by the norm keeps v^T v away from under- and overflow: v = (x - alpha e1)/norm.
    for (let i = k; i < m; i++) A[i * n + k] /= norm;
    A[k * n + k] -= alpha / norm;
    // v^T v = 2 |v_1| because x/norm has unit length; so H = I - v v^T / |v_1|.
    const pivot = Math.abs(A[k * n + k]);
    for (let j = k + 1; j < n; j++) {
      let dot = 0;
      for (let i = k; i < m; i++) dot += A[i * n + k] * A[i * n + j];
      dot /= pivot;
      for (let i = k; i < m; i++) A[i * n + j] -= dot * A[i * n + k];
    }
    if (b) {
      let dot = 0;
      for (let i = k; i < m; i++) dot += A[i * n + k] * b[i];
      dot /= pivot;
      for (let i = k; i < m; i++) b[i] -= dot * A[i * n + k];
    }
    A[k * n + k] = alpha;
    for (let i = k + 1; i < m; i++) A[i * n + k] = 0;
  }
}

/** What `qrSolve` returns. */
export interface QrSolution {
  /** Length n. */
  readonly x: Float64Array;
  /** The n x n upper triangular factor, row-major; A^T A = R^T R. */
  readonly R: Float64Array;
}

/**
 * Least-squares solution of A x = b (A m x n row-major, m >= n, b of length m) by Householder QR. A and b are kept.
 * Refuses `too-few-rows` (m < n), `bad-shape`, and `rank-deficient` when the part of a column that is independent of
 * the columns before it is at most `rankTolerance` (default 1e-13) of its length: a test that does not depend on the
 * units of the columns. 1e-13 is some hundred roundings; a column that is a sum of others leaves about 1e-16.
 */
export function qrSolve(A: Float64Array, m: number, n: number, b: Float64Array, rankTolerance = 1e-13): QrSolution {
  if (n < 1 || A.length !== m * n || b.length !== m) {
    refuse("bad-shape", `${m} rows of ${n} columns need ${m * n} and ${m} numbers, got ${A.length} and ${b.length}`);
  }
  if (m < n) refuse("too-few-rows", `${n} unknowns need at least ${n} rows, got ${m}`);
  const work = Float64Array.from(A);
  const rhs = Float64Array.from(b);
  for (let i = 0; i < m; i++) {
    if (!Number.isFinite(rhs[i])) refuse("not-a-number", `the right-hand side is ${rhs[i]}`, { row: i + 1 });
    for (let j = 0; j < n; j++) {
      const entry = work[i * n + j];
      if (!Number.isFinite(entry)) refuse("not-a-number", `entry is ${entry}`, { row: i + 1, column: j + 1 });
    }
  }
  const lengths = Float64Array.from({ length: n }, (_, j) => columnLength(work, j, m, n));
  reduce(work, m, n, rhs);
  for (let j = 0; j < n; j++) {
    if (!(Math.abs(work[j * n + j]) > rankTolerance * lengths[j])) {
      refuse("rank-deficient", `column ${j + 1} of ${n} is a combination of the columns before it`, { column: j + 1 });
    }
  }
  const R = work.slice(0, n * n);
  return { x: solveUpper(R, n, rhs), R };
}

/**
 * The lower triangular L (n x n, non-negative diagonal) with L L^T = S S^T, for S n x m row-major and any m >= 1. The
 * square-root way of adding covariances: S holds the columns of both factors. Never squares a number, so it works for
 * covariances too ill-conditioned to be formed.
 */
export function triangularise(S: Float64Array, n: number, m: number): Float64Array {
  if (S.length !== n * m) refuse("bad-shape", `a ${n} x ${m} factor needs ${n * m} numbers, got ${S.length}`);
  const rows = Math.max(n, m);
  const transposed = new Float64Array(rows * n);
  for (let i = 0; i < n; i++) for (let j = 0; j < m; j++) transposed[j * n + i] = S[i * m + j];
  reduce(transposed, rows, n, null);
  const L = new Float64Array(n * n);
  for (let j = 0; j < n; j++) {
    const sign = transposed[j * n + j] < 0 ? -1 : 1;
    for (let i = j; i < n; i++) L[i * n + j] = sign * transposed[j * n + i];
  }
  return L;
}

/** (R^T R)^-1 for upper triangular R, n x n row-major: the unit covariance of a least-squares solution. */
export function inverseOfGram(R: Float64Array, n: number): Float64Array {
  // Columns of R^-1 by back substitution; then R^-1 R^-T.
  const inverse = new Float64Array(n * n);
  const column = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    column.fill(0);
    column[j] = 1;
    solveUpper(R, n, column, column);
    for (let i = 0; i <= j; i++) inverse[i * n + j] = column[i];
  }
  const gram = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let k = i; k < n; k++) sum += inverse[i * n + k] * inverse[j * n + k];
      gram[i * n + j] = sum;
      gram[j * n + i] = sum;
    }
  }
  return gram;
}
