/**
 * Linear least squares with its statistics. Role: response surfaces, trends, and every "fit a line through these runs".
 * Householder QR on columns scaled to equal length; never the normal equations, which lose half the digits.
 */
import { refuse } from "../errors.ts";
import { columnLength, inverseOfGram, qrSolve } from "./householder.ts";

/** Choices of a fit. */
export interface LeastSquaresOptions {
  /** Scale the columns by powers of two to comparable length first (default true); changes no digit but guards range. */
  equilibrate?: boolean;
  /** See `qrSolve`; default 1e-13. */
  rankTolerance?: number;
  /** R squared about the mean of y (default, for models with a constant) or about zero (for models without one). */
  rSquaredAbout?: "mean" | "zero";
}

/** A fitted linear model, n coefficients from m rows. Covariances are n x n row-major. */
export interface LinearFit {
  readonly coefficients: Float64Array;
  readonly standardErrors: Float64Array;
  /** residualSd^2 x unitCovariance. */
  readonly covariance: Float64Array;
  /** (X^T X)^-1: the covariance for noise of unit variance. */
  readonly unitCovariance: Float64Array;
  /** y - X b, length m. */
  readonly residuals: Float64Array;
  readonly residualSumOfSquares: number;
  /** m - n. */
  readonly degreesOfFreedom: number;
  /** In the unit of y. */
  readonly residualSd: number;
  /** Null when y does not vary at all. */
  readonly rSquared: number | null;
}

/**
 * Fits y = X b + noise: X is m x n row-major (the constant, if any, is a column of ones), y of length m. Refuses
 * `too-few-rows` unless m > n (with m = n there is no residual to judge the fit by; `qrSolve` solves such a system),
 * `rank-deficient`, `bad-shape` and `not-a-number` as `qrSolve` does.
 */
export function leastSquares(
  X: Float64Array,
  m: number,
  n: number,
  y: Float64Array,
  options: LeastSquaresOptions = {},
): LinearFit {
  if (m <= n) refuse("too-few-rows", `${n} coefficients and their errors need more than ${n} rows, got ${m}`);
  const scales = options.equilibrate === false ? new Float64Array(n).fill(1) : columnScales(X, m, n);
  const scaled = new Float64Array(X.length);
  for (let k = 0; k < X.length; k++) scaled[k] = X[k] * scales[k % n];
  const { x, R } = qrSolve(scaled, m, n, y, options.rankTolerance);
  const coefficients = x.map((value, j) => value * scales[j]);
  const unitCovariance = inverseOfGram(R, n).map((v, k) => v * scales[Math.floor(k / n)] * scales[k % n]);

  const residuals = new Float64Array(m);
  let residualSumOfSquares = 0;
  let mean = 0;
  for (let i = 0; i < m; i++) {
    let fitted = 0;
    for (let j = 0; j < n; j++) fitted += X[i * n + j] * coefficients[j];
    residuals[i] = y[i] - fitted;
    residualSumOfSquares += residuals[i] * residuals[i];
    mean += y[i] / m;
  }
  const centre = options.rSquaredAbout === "zero" ? 0 : mean;
  let total = 0;
  for (let i = 0; i < m; i++) total += (y[i] - centre) * (y[i] - centre);

  const degreesOfFreedom = m - n;
  const variance = residualSumOfSquares / degreesOfFreedom;
  const standardErrors = new Float64Array(n);
  for (let j = 0; j < n; j++) standardErrors[j] = Math.sqrt(variance * unitCovariance[j * n + j]);
  return {
    coefficients,
    standardErrors,
    covariance: unitCovariance.map((v) => v * variance),
    unitCovariance,
    residuals,
    residualSumOfSquares,
    degreesOfFreedom,
    residualSd: Math.sqrt(variance),
    rSquared: total > 0 ? 1 - residualSumOfSquares / total : null,
  };
}

/** For each column the power of two nearest below 1/length: multiplying by it is exact. */
function columnScales(X: Float64Array, m: number, n: number): Float64Array {
  const scales = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    const length = columnLength(X, j, m, n);
    // A column of zeros, or one that is not finite, is left for qrSolve to refuse.
    scales[j] = length > 0 && Number.isFinite(length) ? 2 ** -Math.round(Math.log2(length)) : 1;
  }
  return scales;
}
