/**
 * Eigenvalues and eigenvectors of small symmetric matrices. Role: which combinations of settings the runs have taught
 * (and which they have not), principal directions of a covariance. Cyclic Jacobi rotations: slower than other methods
 * for large matrices, simplest and most accurate for ours (n <= 30). G. H. Golub and C. F. Van Loan, Matrix
 * Computations, 4th ed. 2013, section 8.5 (from memory).
 */
import { refuse } from "../errors.ts";

/** Eigenvalues in decreasing order; column j of `vectors` (n x n row-major) belongs to values[j] and has length 1. */
export interface SymmetricEigen {
  readonly values: Float64Array;
  /** The largest component of each column is positive (the first of equals), so that results repeat exactly. */
  readonly vectors: Float64Array;
}

/** A = V diag(values) V^T. Refuses `bad-shape`, `not-a-number`, `not-symmetric` (entries differ by over 1e-10 of the largest). */
export function symmetricEigen(A: Float64Array, n: number): SymmetricEigen {
  if (A.length !== n * n) refuse("bad-shape", `a ${n} x ${n} matrix needs ${n * n} numbers, got ${A.length}`);
  const M = symmetricCopy(A, n);
  const V = new Float64Array(n * n);
  for (let i = 0; i < n; i++) V[i * n + i] = 1;
  // Quadratic convergence: 6 to 10 sweeps are usual; 60 is a bound that never matters.
  for (let sweep = 0; sweep < 60; sweep++) {
    let rotated = false;
    for (let p = 0; p < n - 1; p++) {
      for (let q = p + 1; q < n; q++) {
        // An entry this small against both diagonals changes neither.
        const small = Number.EPSILON * 1e-2 * Math.sqrt(Math.abs(M[p * n + p]) * Math.abs(M[q * n + q]));
        if (Math.abs(M[p * n + q]) <= small) continue;
        rotate(M, V, n, p, q);
        rotated = true;
      }
    }
    if (!rotated) break;
  }
  return sorted(M, V, n);
}

function symmetricCopy(A: Float64Array, n: number): Float64Array {
  let largest = 0;
  for (let k = 0; k < A.length; k++) {
    if (!Number.isFinite(A[k])) {
      refuse("not-a-number", `entry is ${A[k]}`, { row: Math.floor(k / n) + 1, column: (k % n) + 1 });
    }
    largest = Math.max(largest, Math.abs(A[k]));
  }
  const M = Float64Array.from(A);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      const a = A[i * n + j];
      const b = A[j * n + i];
      if (Math.abs(a - b) > 1e-10 * largest) {
        refuse("not-symmetric", `the entries mirrored at row ${i + 1}, column ${j + 1} are ${a} and ${b}`);
      }
      M[i * n + j] = (a + b) / 2;
      M[j * n + i] = (a + b) / 2;
    }
  }
  return M;
}

/** One Jacobi rotation that makes M[p][q] zero; accumulated in V. */
function rotate(M: Float64Array, V: Float64Array, n: number, p: number, q: number): void {
  const off = M[p * n + q];
  const theta = (M[q * n + q] - M[p * n + p]) / (2 * off);
  // The smaller root, so that the angle stays within 45 degrees.
  const t = (theta < 0 ? -1 : 1) / (Math.abs(theta) + Math.hypot(theta, 1));
  const c = 1 / Math.hypot(t, 1);
  const s = t * c;
  M[p * n + p] -= t * off;
  M[q * n + q] += t * off;
  M[p * n + q] = 0;
  M[q * n + p] = 0;
  for (let k = 0; k < n; k++) {
    if (k !== p && k !== q) {
      const a = M[k * n + p];
      const b = M[k * n + q];
      M[k * n + p] = c * a - s * b;
      M[p * n + k] = M[k * n + p];
      M[k * n + q] = s * a + c * b;
      M[q * n + k] = M[k * n + q];
    }
    const a = V[k * n + p];
    const b = V[k * n + q];
    V[k * n + p] = c * a - s * b;
    V[k * n + q] = s * a + c * b;
  }
}

function sorted(M: Float64Array, V: Float64Array, n: number): SymmetricEigen {
  const order = Array.from({ length: n }, (_, j) => j).sort((a, b) => M[b * n + b] - M[a * n + a] || a - b);
  const values = new Float64Array(n);
  const vectors = new Float64Array(n * n);
  order.forEach((from, to) => {
    values[to] = M[from * n + from];
    let largest = 0;
    for (let k = 0; k < n; k++) {
      // The margin keeps components equal up to rounding from deciding the sign at random.
      if (Math.abs(V[k * n + from]) > Math.abs(largest) * (1 + 1e-9)) largest = V[k * n + from];
    }
    const sign = largest < 0 ? -1 : 1;
    for (let k = 0; k < n; k++) vectors[k * n + to] = sign * V[k * n + from] + 0;
  });
  return { values, vectors };
}
