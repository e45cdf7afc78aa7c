/**
 * Gaussian quadrature. Role: averages over a prediction (chance of being in the window, expected reflectance) without
 * a random number. Gauss-Legendre for any smooth integrand on an interval, three-point Gauss-Hermite for a normal law.
 */
import { refuse } from "../errors.ts";

/** Nodes in increasing order with their weights. Shared between callers: read only. */
export interface QuadratureRule {
  readonly nodes: Float64Array;
  readonly weights: Float64Array;
}

const LARGEST_RULE = 64;
const known = new Map<number, QuadratureRule>();

/**
 * The n-point Gauss-Legendre rule on [-1, 1]: exact for polynomials up to degree 2n - 1. n is an integer from 1 to 64,
 * else refused (`bad-rule`). Newton's method on the Legendre polynomial from the start cos(pi (i - 1/4)/(n + 1/2))
 * (Abramowitz and Stegun 1964, 22.16.6 and 25.4.29; from memory).
 */
export function gaussLegendre(n: number): QuadratureRule {
  const stored = known.get(n);
  if (stored) return stored;
  if (!Number.isInteger(n) || n < 1 || n > LARGEST_RULE) {
    refuse("bad-rule", `a Gauss-Legendre rule has 1 to ${LARGEST_RULE} points, asked for ${n}`);
  }
  const nodes = new Float64Array(n);
  const weights = new Float64Array(n);
  for (let i = 0; i < (n + 1) >> 1; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (n + 0.5));
    let slope = 0;
    // Newton converges quadratically from this start: 4 to 6 steps reach rounding, 20 is a bound that never matters.
    for (let step = 0; step < 20; step++) {
      const [value, derivative] = legendre(n, x);
      slope = derivative;
      const change = value / derivative;
      x -= change;
      if (Math.abs(change) < 1e-15) break;
    }
    // The middle node of an odd rule is zero by symmetry.
    if (2 * i + 1 === n) x = 0;
    slope = legendre(n, x)[1];
    const weight = 2 / ((1 - x * x) * slope * slope);
    // Adding 0 turns -0 into 0.
    nodes[i] = -x + 0;
    nodes[n - 1 - i] = x;
    weights[i] = weight;
    weights[n - 1 - i] = weight;
  }
  const rule = { nodes, weights };
  known.set(n, rule);
  return rule;
}

/** P_n(x) and its derivative, |x| < 1, by the three-term recurrence. */
function legendre(n: number, x: number): [number, number] {
  let previous = 1;
  let value = x;
  for (let k = 2; k <= n; k++) {
    const next = ((2 * k - 1) * x * value - (k - 1) * previous) / k;
    previous = value;
    value = next;
  }
  return [value, (n * (x * value - previous)) / (x * x - 1)];
}

/** Integral of f from a to b by the n-point Gauss-Legendre rule (default 20). Signed: b < a gives the negative. */
export function integrate(f: (x: number) => number, a: number, b: number, n = 20): number {
  const { nodes, weights } = gaussLegendre(n);
  const middle = (a + b) / 2;
  const half = (b - a) / 2;
  let sum = 0;
  for (let i = 0; i < n; i++) sum += weights[i] * f(middle + half * nodes[i]);
  return half * sum;
}

/**
 * Three points for a standard normal variable z: E f(z) = sum of weights x f(nodes), exact to degree 5. Nodes in
 * standard deviations (0 and +-sqrt 3), weights 2/3 and 1/6 (Abramowitz and Stegun 1964, 25.4.46 rescaled; from memory).
 */
export const GAUSS_HERMITE_3: QuadratureRule = {
  nodes: Float64Array.of(-Math.sqrt(3), 0, Math.sqrt(3)),
  weights: Float64Array.of(1 / 6, 2 / 3, 1 / 6),
};
