/**
 * Mixtures of univariate normals, given as equally long lists of weights, means and standard deviations. Role: the
 * predictive law over hyper-parameters and hypotheses; its quantiles are the intervals shown to people.
 * Weights are taken relative to their sum. All functions refuse (`bad-mixture`) lists of unequal or zero length, a
 * negative weight, no positive weight, or a standard deviation that is not positive.
 */
import { refuse } from "../errors.ts";
import { invertCdf } from "./invert.ts";
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
 * parts: a safeguarded Newton iteration starts from that bracket.
 */
export function mixtureQuantile(p: number, mixture: NormalMixture): number {
  checkProbability(p);
  totalWeight(mixture);
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
  const law = {
    cdf: (x: number) => mixtureCdf(x, mixture),
    upper: (x: number) => mixtureBetween(x, Infinity, mixture),
    pdf: (x: number) => mixturePdf(x, mixture),
  };
  return invertCdf(p, law, low, high, low + (high - low) / 2, narrowest);
}
