/**
 * Cholesky factor of a symmetric positive definite matrix, A = L L^T, and what is read from it. Role: covariances of
 * gauges, predictions and states. Row-major Float64Array, n x n. Textbook algorithm (G. H. Golub and C. F. Van Loan,
 * Matrix Computations, 4th ed. 2013, section 4.2; from memory).
 */
import { refuse } from "../errors.ts";
import { invertLower, solveLower, solveLowerTransposed } from "./triangular.ts";

/**
 * Lower factor L of A (only A's lower triangle is read; L's upper triangle is zero). Refuses
 * (`not-positive-definite`) when a pivot is not above n x 2.2e-16 of its diagonal element: rounding could have made it.
 */
export function cholesky(A: Float64Array, n: number): Float64Array {
  if (A.length < n * n) refuse("bad-shape", `a ${n} x ${n} matrix needs ${n * n} numbers, got ${A.length}`);
  const L = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = A[i * n + j];
      for (let k = 0; k < j; k++) sum -= L[i * n + k] * L[j * n + k];
      if (i === j) {
        if (!(sum > n * Number.EPSILON * A[i * n + i])) {
          refuse("not-positive-definite", `the matrix is not positive definite: pivot ${i + 1} is ${sum}`);
        }
        L[i * n + i] = Math.sqrt(sum);
      } else {
        L[i * n + j] = sum / L[j * n + j];
      }
    }
  }
  return L;
}

/** x with A x = b, from A's lower factor. `out` may be `b`. */
export function choleskySolve(
  L: Float64Array,
  n: number,
  b: Float64Array,
  out: Float64Array = new Float64Array(n),
): Float64Array {
  solveLower(L, n, b, out);
  return solveLowerTransposed(L, n, out, out);
}

/** A^-1 (full, exactly symmetric), from A's lower factor. */
export function choleskyInverse(L: Float64Array, n: number): Float64Array {
  const inverseL = invertLower(L, n);
  const inverse = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = 0;
      for (let k = i; k < n; k++) sum += inverseL[k * n + i] * inverseL[k * n + j];
      inverse[i * n + j] = sum;
      inverse[j * n + i] = sum;
    }
  }
  return inverse;
}

/** ln det A, from A's lower factor: twice the sum of the logarithms of its diagonal. */
export function choleskyLogDeterminant(L: Float64Array, n: number): number {
  let sum = 0;
  for (let i = 0; i < n; i++) sum += Math.log(L[i * n + i]);
  return 2 * sum;
}

/** The squared Mahalanobis length b^T A^-1 b, from A's lower factor. `work` (length n) spares an allocation. */
export function choleskyQuadraticForm(
  L: Float64Array,
  n: number,
  b: Float64Array,
  work: Float64Array = new Float64Array(n),
): number {
  solveLower(L, n, b, work);
  let sum = 0;
  for (let i = 0; i < n; i++) sum += work[i] * work[i];
  return sum;
}
