/**
 * The regularised incomplete beta function. Role: Student's t and F probabilities. Continued fraction of
 * A. R. DiDonato and A. H. Morris, ACM Trans. Math. Softw. 18 (1992) 360-373, evaluated by the modified
 * Lentz method; prefactor after C. Loader (2000). Both from memory, checked in the tests against 40-digit values.
 */
import { refuse } from "../errors.ts";
import { deviance, stirlingError, type TailPair } from "./gamma.ts";

/** x^a y^b / B(a, b) with y = 1 - x. */
export function betaTerm(a: number, b: number, x: number, y: number): number {
  if (x === 0 || y === 0) return 0;
  const n = a + b;
  // a - n x, with the small one of x and y doing the work.
  const off = a * y - b * x;
  const log =
    stirlingError(n) - stirlingError(a) - stirlingError(b) - deviance(a, n * x, off) - deviance(b, n * y, -off);
  return Math.sqrt((a * b) / (2 * Math.PI * n)) * Math.exp(log);
}

/**
 * I_x(a, b) as `lower` and 1 - I_x(a, b) as `upper`, for a, b > 0 and x in [0, 1], else refused (`out-of-domain`).
 * Give y = 1 - x when it is known better than the subtraction can tell (x close to 1).
 */
export function incompleteBeta(a: number, b: number, x: number, y = 1 - x): TailPair {
  if (!(a > 0) || !(b > 0) || !(x >= 0) || !(y >= 0) || !(x <= 1) || !(y <= 1) || a === Infinity || b === Infinity) {
    refuse("out-of-domain", `incompleteBeta(${a}, ${b}, ${x})`);
  }
  if (x === 0) return { lower: 0, upper: 1 };
  if (y === 0) return { lower: 1, upper: 0 };
  // The fraction converges fast below the mean; above it the roles are exchanged.
  if (x > (a + 1) / (a + b + 2)) {
    const { lower, upper } = incompleteBeta(b, a, y, x);
    return { lower: upper, upper: lower };
  }
  const lower = Math.min(1, betaTerm(a, b, x, y) * betaFraction(a, b, x, y));
  return { lower, upper: 1 - lower };
}

/**
 * alpha_1/(beta_1 + alpha_2/(beta_2 + ...)), whose product with x^a y^b/B(a, b) is I_x(a, b), for x <= (a + 1)/(a + b + 2).
 * Written with a - (a + b) x = a y - b x, so that x close to 1 costs no digits.
 */
function betaFraction(a: number, b: number, x: number, y: number): number {
  const tiny = 1e-300;
  const nonzero = (value: number) => (Math.abs(value) < tiny ? tiny : value);
  const most = 500 + 20 * Math.sqrt(Math.max(a, b));
  const off = a * y - b * x + 1;
  const beta = (n: number) =>
    n + (n * (b - n) * x) / (a + 2 * n - 1) + ((a + n) / (a + 2 * n + 1)) * (off + n * (1 + y));
  // The n = 0 term of beta would divide by a - 1; its second part is zero.
  let fraction = nonzero((a / (a + 1)) * off);
  let c = fraction;
  let d = 0;
  for (let n = 1; n < most; n++) {
    const root = x / (a + 2 * n - 1);
    const alpha = (a + n - 1) * (a + b + n - 1) * n * (b - n) * root * root;
    const term = beta(n);
    d = 1 / nonzero(term + alpha * d);
    c = nonzero(term + alpha / c);
    const factor = c * d;
    fraction *= factor;
    if (Math.abs(factor - 1) < 3e-16) break;
  }
  return 1 / fraction;
}
