import { CholeskyDecomposition, inverse, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import {
  cholesky,
  choleskyDowndate,
  choleskyInverse,
  choleskyLogDeterminant,
  choleskyQuadraticForm,
  choleskySolve,
  choleskyUpdate,
  random,
  solveLower,
  solveLowerTransposed,
  solveUpper,
} from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

/** B B^T + 0.1 I with normal B: condition number in the hundreds. */
function positiveDefinite(n: number, seed: number): Float64Array {
  const draw = random(seed);
  const B = Float64Array.from({ length: n * n }, () => draw.normal());
  return Float64Array.from({ length: n * n }, (_, k) => {
    const [i, j] = [Math.floor(k / n), k % n];
    let sum = i === j ? 0.1 : 0;
    for (let m = 0; m < n; m++) sum += B[i * n + m] * B[j * n + m];
    return sum;
  });
}

const vector = (n: number, seed: number) => Float64Array.from({ length: n }, (_, i) => random(seed).fork(i).normal());
const asMatrix = (A: Float64Array, n: number) => Matrix.from1DArray(n, n, Array.from(A));
const because = "rounding times a condition number below 1e4";

describe("the Cholesky factor", () => {
  for (const n of [1, 2, 5, 12]) {
    it(`of a ${n} x ${n} matrix equals ml-matrix's, and its solution, inverse and determinant follow`, () => {
      const A = positiveDefinite(n, n);
      const L = cholesky(A, n);
      expectAllClose(L, new CholeskyDecomposition(asMatrix(A, n)).lowerTriangularMatrix.to1DArray(), {
        absolute: 1e-12,
        because,
      });
      expectAllClose(choleskyInverse(L, n), inverse(asMatrix(A, n)).to1DArray(), { absolute: 1e-10, because });
      const b = vector(n, 7);
      const x = choleskySolve(L, n, b);
      const back = asMatrix(A, n).mmul(Matrix.columnVector(Array.from(x)));
      expectAllClose(back.to1DArray(), b, { absolute: 1e-12, because });
      let quadratic = 0;
      for (let i = 0; i < n; i++) quadratic += b[i] * x[i];
      expectClose(choleskyQuadraticForm(L, n, b), quadratic, { relative: 1e-11, because });
    });
  }

  it("gives the determinant of the 3 x 3 Hilbert matrix, 1/2160", () => {
    const hilbert = Float64Array.of(1, 1 / 2, 1 / 3, 1 / 2, 1 / 3, 1 / 4, 1 / 3, 1 / 4, 1 / 5);
    const because = "rounding times the condition number 524 of this matrix";
    expectClose(choleskyLogDeterminant(cholesky(hilbert, 3), 3), -Math.log(2160), { absolute: 1e-12, because });
  });

  it("is refused for matrices that are not positive definite, singular ones included", () => {
    expect(refusalCode(() => cholesky(Float64Array.of(1, 2, 2, 1), 2))).toBe("not-positive-definite");
    expect(refusalCode(() => cholesky(Float64Array.of(1, 1, 1, 1), 2))).toBe("not-positive-definite");
    expect(refusalCode(() => cholesky(Float64Array.of(Number.NaN), 1))).toBe("not-positive-definite");
    expect(refusalCode(() => cholesky(Float64Array.of(1, 0, 0), 2))).toBe("bad-shape");
  });
});

describe("a rank-one change of the factor", () => {
  const n = 6;
  const A = positiveDefinite(n, 3);
  const v = vector(n, 11);
  const changed = (sign: number) => A.map((a, k) => a + sign * v[Math.floor(k / n)] * v[k % n]);

  it("added equals the factor of A + v v^T and keeps v", () => {
    const L = cholesky(A, n);
    const kept = Float64Array.from(v);
    choleskyUpdate(L, n, v);
    expectAllClose(L, cholesky(changed(1), n), { absolute: 1e-12, because });
    expect(v).toEqual(kept);
  });

  it("taken away again gives the factor of A back", () => {
    const L = cholesky(changed(1), n);
    expect(choleskyDowndate(L, n, v)).toBe(true);
    expectAllClose(L, cholesky(A, n), { absolute: 1e-11, because });
  });

  it("that would leave no positive definite matrix is declined and changes nothing", () => {
    const L = cholesky(A, n);
    const before = Float64Array.from(L);
    expect(
      choleskyDowndate(
        L,
        n,
        v.map((value) => 100 * value),
      ),
    ).toBe(false);
    expect(L).toEqual(before);
    // Exactly singular: the factor's own first column.
    const first = Float64Array.from({ length: n }, (_, i) => L[i * n]);
    expect(choleskyDowndate(L, n, first)).toBe(false);
    expect(L).toEqual(before);
  });
});

describe("triangular solves", () => {
  const L = Float64Array.of(2, 9, 9, 1, 3, 9, 4, 5, 6);
  it("ignore the other triangle and may work in place", () => {
    const b = Float64Array.of(2, 7, 32);
    expect(Array.from(solveLower(L, 3, b))).toEqual([1, 2, 3]);
    solveLower(L, 3, b, b);
    expect(Array.from(b)).toEqual([1, 2, 3]);
    const c = Float64Array.of(2 + 2 + 12, 6 + 15, 18);
    expect(Array.from(solveLowerTransposed(L, 3, c))).toEqual([1, 2, 3]);
    solveLowerTransposed(L, 3, c, c);
    expect(Array.from(c)).toEqual([1, 2, 3]);
    const U = Float64Array.of(2, 1, 4, 9, 3, 5, 9, 9, 6);
    expect(Array.from(solveUpper(U, 3, Float64Array.of(16, 21, 18)))).toEqual([1, 2, 3]);
  });
});
