import { Matrix, QrDecomposition } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { cholesky, inverseOfGram, leastSquares, qrSolve, random, triangularise } from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const draw = random("least squares");
const m = 40;
const n = 5;
const X = Float64Array.from({ length: m * n }, (_, k) => (k % n === 0 ? 1 : draw.normal()));
const y = Float64Array.from({ length: m }, () => draw.normal());
const because = "rounding; the columns are independent normal numbers, condition below 10";

describe("linear least squares", () => {
  it("gives ml-matrix's QR solution", () => {
    const qr = new QrDecomposition(Matrix.from1DArray(m, n, Array.from(X)));
    const oracle = qr.solve(Matrix.columnVector(Array.from(y)));
    expectAllClose(leastSquares(X, m, n, y).coefficients, oracle.to1DArray(), { absolute: 1e-14, because });
  });

  it("leaves residuals orthogonal to every column", () => {
    const { residuals } = leastSquares(X, m, n, y);
    for (let j = 0; j < n; j++) {
      let dot = 0;
      for (let i = 0; i < m; i++) dot += X[i * n + j] * residuals[i];
      expectClose(dot, 0, { absolute: 1e-13, because });
    }
  });

  it("gives the textbook line, errors and R squared for four points (1,1) (2,2) (3,2) (4,3)", () => {
    // By hand: slope 3/5, intercept 1/2, residual sum of squares 0.2, s^2 = 0.1, Sxx = 5, total 2.
    const fit = leastSquares(Float64Array.of(1, 1, 1, 2, 1, 3, 1, 4), 4, 2, Float64Array.of(1, 2, 2, 3));
    const because = "closed form; rounding";
    expectAllClose(fit.coefficients, [0.5, 0.6], { absolute: 1e-14, because });
    expectAllClose(fit.standardErrors, [Math.sqrt(0.1 * (1 / 4 + 6.25 / 5)), Math.sqrt(0.1 / 5)], {
      relative: 1e-13,
      because,
    });
    expectClose(fit.rSquared ?? 0, 0.9, { relative: 1e-13, because });
    expectClose(fit.covariance[1], -0.1 * (2.5 / 5), { relative: 1e-13, because });
    expectClose(fit.unitCovariance[3], 1 / 5, { relative: 1e-13, because });
  });

  it("does not care about the units of the columns", () => {
    const scale = [1, 1e-150, 1e8, 3, 1e150];
    const rescaled = X.map((v, k) => v * scale[k % n]);
    const plain = leastSquares(X, m, n, y);
    const scaled = leastSquares(rescaled, m, n, y);
    expectAllClose(
      scaled.coefficients.map((v, j) => v * scale[j]),
      plain.coefficients,
      { absolute: 1e-14, because },
    );
    expectAllClose(
      scaled.standardErrors.map((v, j) => v * scale[j]),
      plain.standardErrors,
      { relative: 1e-13, because },
    );
  });

  it("refuses columns that depend on others, also after rounding, and too few rows", () => {
    const dependent = X.map((v, k) => (k % n === 4 ? X[k - 1] / 3 + X[k - 2] * 0.7 : v));
    expect(refusalCode(() => leastSquares(dependent, m, n, y))).toBe("rank-deficient");
    const zero = X.map((v, k) => (k % n === 2 ? 0 : v));
    expect(refusalCode(() => leastSquares(zero, m, n, y))).toBe("rank-deficient");
    expect(refusalCode(() => leastSquares(X.slice(0, 25), 5, 5, y.slice(0, 5)))).toBe("too-few-rows");
    expect(refusalCode(() => qrSolve(X.slice(0, 20), 4, 5, y.slice(0, 4)))).toBe("too-few-rows");
    const broken = Float64Array.from(X);
    broken[7] = Number.NaN;
    expect(refusalCode(() => leastSquares(broken, m, n, y))).toBe("not-a-number");
    expect(refusalCode(() => leastSquares(X, m, n, y.slice(1)))).toBe("bad-shape");
  });

  it("has no R squared for a response that never varies, and takes it about zero on request", () => {
    const ones = Float64Array.of(1, 1, 1);
    expect(leastSquares(ones, 3, 1, Float64Array.of(5, 5, 5)).rSquared).toBeNull();
    const fit = leastSquares(ones, 3, 1, Float64Array.of(1, 2, 3), { rSquaredAbout: "zero" });
    // Residuals -1, 0, 1 of 1, 2, 3: 1 - 2/14.
    expectClose(fit.rSquared ?? 0, 6 / 7, { relative: 1e-14, because: "closed form" });
  });
});

describe("Householder triangularisation", () => {
  it("of a wide factor S gives the Cholesky factor of S S^T", () => {
    const columns = 9;
    const S = Float64Array.from({ length: n * columns }, () => draw.normal());
    const product = Float64Array.from({ length: n * n }, (_, k) => {
      let sum = 0;
      for (let c = 0; c < columns; c++) sum += S[Math.floor(k / n) * columns + c] * S[(k % n) * columns + c];
      return sum;
    });
    expectAllClose(triangularise(S, n, columns), cholesky(product, n), { absolute: 1e-13, because });
  });

  it("works for fewer columns than rows, where S S^T is singular", () => {
    const S = Float64Array.of(1, 2, 2);
    const L = triangularise(S, 3, 1);
    const LLt = Float64Array.from({ length: 9 }, (_, k) => {
      let sum = 0;
      for (let c = 0; c < 3; c++) sum += L[Math.floor(k / 3) * 3 + c] * L[(k % 3) * 3 + c];
      return sum;
    });
    expectAllClose(LLt, [1, 2, 2, 2, 4, 4, 2, 4, 4], { absolute: 1e-14, because });
  });

  it("keeps a variance of 1e-20 beside one of 1, which the product could not hold", () => {
    // S S^T = [[1, 1], [1, 1 + 1e-20]] rounds to a singular matrix; its factor does not.
    const L = triangularise(Float64Array.of(1, 0, 1, 1e-10), 2, 2);
    expectAllClose(L, [1, 0, 1, 1e-10], { relative: 1e-14, because: "rounding" });
  });

  it("gives (R^T R)^-1 as the inverse of the normal matrix", () => {
    const { R } = qrSolve(X, m, n, y);
    const normal = Matrix.from1DArray(m, n, Array.from(X));
    const identity = normal
      .transpose()
      .mmul(normal)
      .mmul(Matrix.from1DArray(n, n, Array.from(inverseOfGram(R, n))));
    expectAllClose(identity.to1DArray(), Matrix.eye(n).to1DArray(), { absolute: 1e-13, because });
  });
});
