import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { random, symmetricEigen } from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

function symmetric(n: number, seed: number): Float64Array {
  const draw = random(seed);
  const A = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      A[i * n + j] = draw.normal();
      A[j * n + i] = A[i * n + j];
    }
  }
  return A;
}

describe("eigenvalues of a symmetric matrix", () => {
  for (const n of [1, 3, 12]) {
    it(`of size ${n} equal ml-matrix's, and V diag V^T rebuilds the matrix`, () => {
      const A = symmetric(n, n);
      const { values, vectors } = symmetricEigen(A, n);
      const oracle = new EigenvalueDecomposition(Matrix.from1DArray(n, n, Array.from(A)), { assumeSymmetric: true });
      const because = "rounding of a matrix of norm below 10";
      expectAllClose(
        values,
        [...oracle.realEigenvalues].sort((a, b) => b - a),
        { absolute: 1e-13, because },
      );
      const V = Matrix.from1DArray(n, n, Array.from(vectors));
      const rebuilt = V.mmul(Matrix.diag(Array.from(values))).mmul(V.transpose());
      expectAllClose(rebuilt.to1DArray(), A, { absolute: 1e-13, because });
      expectAllClose(V.transpose().mmul(V).to1DArray(), Matrix.eye(n).to1DArray(), { absolute: 1e-14, because });
    });
  }

  it("of [[2, 1], [1, 2]] are 3 and 1 with the diagonals as vectors, signs fixed", () => {
    const { values, vectors } = symmetricEigen(Float64Array.of(2, 1, 1, 2), 2);
    const r = Math.SQRT1_2;
    const because = "closed form";
    expectAllClose(values, [3, 1], { absolute: 1e-15, because });
    expectAllClose(vectors, [r, r, r, -r], { absolute: 1e-15, because });
  });

  it("keeps a tiny eigenvalue of a graded matrix to full relative accuracy", () => {
    // det = 1e-20 (1 - 0.25) exactly, the large one is 1 + 2.5e-21: the small one is 0.75e-20.
    const { values } = symmetricEigen(Float64Array.of(1, 0.5e-10, 0.5e-10, 1e-20), 2);
    expectClose(values[1], 0.75e-20, { relative: 1e-14, because: "Jacobi is accurate on graded positive matrices" });
  });

  it("is refused for matrices that are not symmetric or hold no numbers", () => {
    expect(refusalCode(() => symmetricEigen(Float64Array.of(1, 2, 3, 4), 2))).toBe("not-symmetric");
    expect(refusalCode(() => symmetricEigen(Float64Array.of(1, Number.NaN, 0, 4), 2))).toBe("not-a-number");
    expect(refusalCode(() => symmetricEigen(Float64Array.of(1, 2, 3), 2))).toBe("bad-shape");
  });
});
