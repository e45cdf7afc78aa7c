/**
 * Student's t law. Role: honest intervals from few runs, where a normal factor would promise too much. Degrees of
 * freedom need not be whole; they must be positive and finite (`bad-degrees`). Through the incomplete beta function
 * (Abramowitz and Stegun 1964, 26.7.1; from memory).
 */
import { refuse } from "../errors.ts";
import { betaTerm, incompleteBeta } from "./beta.ts";
import { invertCdf } from "./invert.ts";
import { checkProbability, normalQuantile } from "./normal.ts";

/** Refuses (`bad-degrees`) degrees of freedom that are not positive and finite. */
export function checkDegrees(degrees: number): void {
  if (!(degrees > 0) || degrees === Infinity) refuse("bad-degrees", `degrees of freedom must be positive: ${degrees}`);
}

/** v/(v + t^2) and t^2/(v + t^2), each without cancellation or overflow. */
function shares(t: number, degrees: number): [number, number] {
  const s = t / Math.sqrt(degrees);
  if (Math.abs(s) <= 1) return [1 / (1 + s * s), (s * s) / (1 + s * s)];
  const inverse = 1 / (s * s);
  return [inverse / (1 + inverse), 1 / (1 + inverse)];
}

/** Density at t. */
export function studentTPdf(t: number, degrees: number): number {
  checkDegrees(degrees);
  // The beta density divided by |t| is smooth at 0: any t this small gives the value there to the last digit.
  const size = Math.max(Math.abs(t), 1e-10);
  const [x, y] = shares(size, degrees);
  return betaTerm(degrees / 2, 0.5, x, y) / size;
}

/** Probability of a value <= t. Relatively accurate in the lower tail; for the upper tail pass -t. */
export function studentTCdf(t: number, degrees: number): number {
  checkDegrees(degrees);
  if (Number.isNaN(t)) refuse("not-a-number", "studentTCdf was given NaN");
  const [x, y] = shares(t, degrees);
  const tail = incompleteBeta(degrees / 2, 0.5, x, y).lower / 2;
  return t > 0 ? 1 - tail : tail;
}

/** The t with studentTCdf(t) = p; infinite at p = 0 and 1. */
export function studentTQuantile(p: number, degrees: number): number {
  checkProbability(p);
  checkDegrees(degrees);
  if (p === 0 || p === 1) return p === 0 ? -Infinity : Infinity;
  if (p === 0.5) return 0;
  // By symmetry always in the lower tail, where the distribution function keeps its digits.
  const tail = Math.min(p, 1 - p);
  const start = normalQuantile(tail);
  let low = 2 * start - 1;
  // Tails heavier than normal: for tiny degrees of freedom the quantile may be beyond any double.
  while (studentTCdf(low, degrees) > tail && low > -Number.MAX_VALUE) low *= 2;
  const law = {
    cdf: (t: number) => studentTCdf(t, degrees),
    upper: (t: number) => studentTCdf(-t, degrees),
    pdf: (t: number) => studentTPdf(t, degrees),
  };
  const t = invertCdf(tail, law, low, 0, start, 0.1);
  return p < 0.5 ? t : -t;
}
