/**
 * Rank-one changes of a lower Cholesky factor in place, in O(n^2): A + v v^T and A - v v^T without factoring again.
 * Role: square-root covariances in the filter, and leaving one run out. Row-major n x n with positive diagonal.
 * Sources (from memory): P. E. Gill, G. H. Golub, W. Murray, M. A. Saunders, Math. Comp. 28 (1974) 505-535 for the
 * update; G. W. Stewart, J. Inst. Maths Applics 23 (1979) 203-213 for the downdate by rotations, which is the stable one.
 */
import { solveLower } from "./triangular.ts";

/** Turns L of A into L of A + v v^T, in place. `v` is kept; `work` (length n) spares an allocation. */
export function choleskyUpdate(
  L: Float64Array,
  n: number,
  v: Float64Array,
  work: Float64Array = new Float64Array(n),
): void {
  for (let i = 0; i < n; i++) work[i] = v[i];
  for (let k = 0; k < n; k++) {
    const diagonal = L[k * n + k];
    const pivot = Math.hypot(diagonal, work[k]);
    const cosine = diagonal / pivot;
    const sine = work[k] / pivot;
    L[k * n + k] = pivot;
    for (let i = k + 1; i < n; i++) {
      const entry = L[i * n + k];
      L[i * n + k] = cosine * entry + sine * work[i];
      work[i] = cosine * work[i] - sine * entry;
    }
  }
}

/**
 * Turns L of A into L of A - v v^T, in place, and returns true; returns false and leaves L untouched when the result
 * would not be positive definite, that is when 1 - v^T A^-1 v is not above n x 2.2e-16. `v` is kept.
 */
export function choleskyDowndate(L: Float64Array, n: number, v: Float64Array): boolean {
  const p = solveLower(L, n, v);
  let lengthSquared = 0;
  for (let i = 0; i < n; i++) lengthSquared += p[i] * p[i];
  const rest = 1 - lengthSquared;
  if (!(rest > n * Number.EPSILON)) return false;
  // Rotations that turn (p, sqrt(rest)) into (0, 1), from the last component up; applied to (L^T, 0) they leave
  // (new L^T, v^T), because rotations keep L L^T = newL newL^T + v v^T.
  const carried = new Float64Array(n);
  let alpha = Math.sqrt(rest);
  for (let k = n - 1; k >= 0; k--) {
    const length = Math.hypot(alpha, p[k]);
    const cosine = alpha / length;
    const sine = p[k] / length;
    alpha = length;
    for (let i = k; i < n; i++) {
      const entry = L[i * n + k];
      L[i * n + k] = cosine * entry - sine * carried[i];
      carried[i] = cosine * carried[i] + sine * entry;
    }
  }
  return true;
}
