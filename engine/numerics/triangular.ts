/**
 * Solves with triangular matrices. Role: the last step of every factorisation here (Cholesky, QR).
 * Matrices are row-major Float64Array, n x n; entries on the other side of the diagonal are never read.
 * `out` may be `b` itself.
 */

/** x with L x = b for lower L (forward substitution). A zero on the diagonal gives infinities: factor functions refuse earlier. */
export function solveLower(
  L: Float64Array,
  n: number,
  b: Float64Array,
  out: Float64Array = new Float64Array(n),
): Float64Array {
  for (let i = 0; i < n; i++) {
    let sum = b[i];
    for (let j = 0; j < i; j++) sum -= L[i * n + j] * out[j];
    out[i] = sum / L[i * n + i];
  }
  return out;
}

/** x with L^T x = b for lower L (back substitution on the transpose, without forming it). */
export function solveLowerTransposed(
  L: Float64Array,
  n: number,
  b: Float64Array,
  out: Float64Array = new Float64Array(n),
): Float64Array {
  if (out !== b) out.set(b.subarray(0, n));
  for (let i = n - 1; i >= 0; i--) {
    const value = out[i] / L[i * n + i];
    out[i] = value;
    for (let j = 0; j < i; j++) out[j] -= L[i * n + j] * value;
  }
  return out;
}

/** x with U x = b for upper U (back substitution). */
export function solveUpper(
  U: Float64Array,
  n: number,
  b: Float64Array,
  out: Float64Array = new Float64Array(n),
): Float64Array {
  for (let i = n - 1; i >= 0; i--) {
    let sum = b[i];
    for (let j = i + 1; j < n; j++) sum -= U[i * n + j] * out[j];
    out[i] = sum / U[i * n + i];
  }
  return out;
}

/** The inverse of a lower triangular matrix, itself lower, n x n row-major. */
export function invertLower(L: Float64Array, n: number): Float64Array {
  const inverse = new Float64Array(n * n);
  for (let column = 0; column < n; column++) {
    inverse[column * n + column] = 1 / L[column * n + column];
    for (let i = column + 1; i < n; i++) {
      let sum = 0;
      for (let j = column; j < i; j++) sum -= L[i * n + j] * inverse[j * n + column];
      inverse[i * n + column] = sum / L[i * n + i];
    }
  }
  return inverse;
}
