/**
 * Derivatives by differences. Role: Jacobians of models that have no written derivative, and checks of those that do.
 */

/** What is differentiated; bounds are respected by moving the points inside, at the price of one order there. */
export interface Differentiable {
  residuals(p: Float64Array, out: Float64Array): void;
  count: number;
  start: ArrayLike<number>;
  typical?: ArrayLike<number>;
  lower?: ArrayLike<number>;
  upper?: ArrayLike<number>;
}

/** Cube root of the unit roundoff: balances rounding against the h^2 error of a central difference (textbook). */
const RELATIVE_STEP = Number.EPSILON ** (1 / 3);

/**
 * Writes dr_i/dp_j at out[i * n + j] by central differences, step 6e-6 of max(|p_j|, typical size). About ten digits
 * for a well-scaled model. A parameter whose bounds coincide gets zeros.
 */
export function centralDifferences(model: Differentiable, p: Float64Array, out: Float64Array): void {
  const n = p.length;
  const m = model.count;
  const at = Float64Array.from(p);
  const above = new Float64Array(m);
  const below = new Float64Array(m);
  for (let j = 0; j < n; j++) {
    const typical = model.typical ? model.typical[j] : Math.abs(model.start[j]) || 1;
    const h = RELATIVE_STEP * Math.max(Math.abs(p[j]), typical);
    const high = Math.min(p[j] + h, model.upper ? model.upper[j] : Infinity);
    const low = Math.max(p[j] - h, model.lower ? model.lower[j] : -Infinity);
    at[j] = high;
    model.residuals(at, above);
    at[j] = low;
    model.residuals(at, below);
    at[j] = p[j];
    // The distance as it was stored, not 2h: rounding of p + h would cost digits.
    const distance = high - low;
    for (let i = 0; i < m; i++) out[i * n + j] = distance > 0 ? (above[i] - below[i]) / distance : 0;
  }
}
