/**
 * Mixtures of univariate normals, given as equally long lists of weights, means and standard deviations. Role: the
 * predictive law over hyper-parameters and hypotheses; its quantiles are the intervals shown to people.
 * Weights are taken relative to their sum. All functions refuse (`bad-mixture`) lists of unequal or zero length, a
 * negative weight, no positive weight, or a standard deviation that is not positive.
 */
import { refuse } from "../errors.ts";
import { checkProbability, normalBetween, normalCdf, normalPdf, normalQuantile } from "./normal.ts";

/** A mixture of normals; the three lists run in parallel. */
export interface NormalMixture {
  readonly weights: ArrayLike<number>;
  readonly means: ArrayLike<number>;
  readonly sds: ArrayLike<number>;
}

/** Checks the mixture and returns the sum of its weights. */
function totalWeight({ weights, means, sds }: NormalMixture): number {
  const count = weights.length;
  if (count === 0 || means.length !== count || sds.length !== count) {
    refuse("bad-mixture", `a mixture needs equal lists: ${count} weights, ${means.length} means, ${sds.length} sds`);
  }
  let total = 0;
  for (let i = 0; i < count; i++) {
    if (!(weights[i] >= 0) || !Number.isFinite(means[i]) || !(sds[i] > 0) || !Number.isFinite(sds[i])) {
      refuse("bad-mixture", `part ${i + 1}: weight ${weights[i]}, mean ${means[i]}, sd ${sds[i]}`);
    }
    total += weights[i];
  }
  if (!(total > 0) || !Number.isFinite(total)) refuse("bad-mixture", `the weights sum to ${total}`);
  return total;
}

function averaged(mixture: NormalMixture, part: (mean: number, sd: number) => number): number {
  const total = totalWeight(mixture);
  let sum = 0;
  for (let i = 0; i < mixture.weights.length; i++) {
    if (mixture.weights[i] > 0) sum += mixture.weights[i] * part(mixture.means[i], mixture.sds[i]);
  }
  return sum / total;
}

/** Probability of a value <= x. */
export function mixtureCdf(x: number, mixture: NormalMixture): number {
  return averaged(mixture, (mean, sd) => normalCdf(x, mean, sd));
}

/** Density at x, per unit of x. */
export function mixturePdf(x: number, mixture: NormalMixture): number {
  return averaged(mixture, (mean, sd) => normalPdf(x, mean, sd));
}

/** Probability of low < value <= high. */
export function mixtureBetween(low: number, high: number, mixture: NormalMixture): number {
  return averaged(mixture, (mean, sd) => normalBetween(low, high, mean, sd));
}

/** Mean and variance of the mixture (spread of the means included). */
export function mixtureMoments(mixture: NormalMixture): { mean: number; variance: number } {
  const mean = averaged(mixture, (m) => m);
  return { mean, variance: averaged(mixture, (m, sd) => sd * sd + (m - mean) * (m - mean)) };
}

/**
 * The x with mixtureCdf(x) = p; infinite at p = 0 and 1. It lies between the smallest and the largest quantile of the
 * parts: a safeguarded Newton iteration starts from that bracket, at the quantile of one normal of the same moments. Newton
 * squares its error, so a step under 1e-8 of the narrowest part's sd leaves less than rounding does.
 */
export function mixtureQuantile(p: number, mixture: NormalMixture): number {
  checkProbability(p);
  const total = totalWeight(mixture);
  if (p === 0 || p === 1) return p === 0 ? -Infinity : Infinity;
  let low = Infinity;
  let high = -Infinity;
  let narrowest = Infinity;
  for (let i = 0; i < mixture.weights.length; i++) {
    if (mixture.weights[i] === 0) continue;
    const x = normalQuantile(p, mixture.means[i], mixture.sds[i]);
    if (x < low) low = x;
    if (x > high) high = x;
    if (mixture.sds[i] < narrowest) narrowest = mixture.sds[i];
  }
  const { mean, variance } = mixtureMoments(mixture);
  let x = Math.min(high, Math.max(low, normalQuantile(p, mean, Math.sqrt(variance))));
  let stepBefore = high - low;
  // Bisection alone ends in about 60 halvings per change of magnitude; 1000 covers the whole range of doubles thrice.
  for (let round = 0; round < 1000; round++) {
    const excess = excessAt(x, p, mixture, total);
    if (excess === 0 || high - low <= 1e-15 * Math.max(Math.abs(x), narrowest)) return x;
    if (excess > 0) high = x;
    else low = x;
    const newton = x - excess / mixturePdf(x, mixture);
    // A step that does not at least halve is no longer Newton's: bisect.
    const safe = newton >= low && newton <= high && Math.abs(newton - x) <= stepBefore / 2;
    const next = safe || round === 0 ? Math.min(high, Math.max(low, newton)) : low + (high - low) / 2;
    stepBefore = Math.abs(next - x);
    if (stepBefore <= 1e-8 * narrowest && safe) return next;
    if (next === x) return x;
    x = next;
  }
  return x;
}

/** How far the distribution at x is past p, worked out from the smaller tail so that it keeps its digits. */
function excessAt(x: number, p: number, { weights, means, sds }: NormalMixture, total: number): number {
  let sum = 0;
  const side = p > 0.5 ? -1 : 1;
  for (let i = 0; i < weights.length; i++)
    if (weights[i] > 0) sum += weights[i] * normalCdf((side * (x - means[i])) / sds[i]);
  return p > 0.5 ? 1 - p - sum / total : sum / total - p;
}
