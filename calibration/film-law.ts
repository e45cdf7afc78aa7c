/**
 * What is believed about the film of the next run: a mixture of bivariate normals over (index, ln thickness), one part a
 * hyper-parameter node and hypothesis. Intervals, moments and chances are read from the mixture itself, not from one
 * normal fitted to it: that is where the honest tails come from.
 */
import { mixtureMoments, mixtureQuantile } from "../engine/index.ts";

export interface FilmPart {
  weight: number;
  index: number;
  lnThickness: number;
  /** Covariance of (index, ln thickness): [var, cov, var]. */
  covariance: readonly [number, number, number];
}

export interface FilmLaw {
  parts: readonly FilmPart[];
}

export interface Bounds {
  mean: number;
  low: number;
  high: number;
}

const marginal = (law: FilmLaw, which: 0 | 1) => ({
  weights: Float64Array.from(law.parts, (p) => p.weight),
  means: Float64Array.from(law.parts, (p) => (which === 0 ? p.index : p.lnThickness)),
  sds: Float64Array.from(law.parts, (p) => Math.sqrt(p.covariance[which === 0 ? 0 : 2])),
});

/** Mean and middle `coverage` of the index. */
export function indexBounds(law: FilmLaw, coverage = 0.95): Bounds {
  const m = marginal(law, 0);
  const tail = (1 - coverage) / 2;
  return { mean: mixtureMoments(m).mean, low: mixtureQuantile(tail, m), high: mixtureQuantile(1 - tail, m) };
}

/** Mean and middle `coverage` of the thickness, nm. The mean is that of the log-normal parts. */
export function thicknessBounds(law: FilmLaw, coverage = 0.95): Bounds {
  const m = marginal(law, 1);
  const tail = (1 - coverage) / 2;
  const mean = law.parts.reduce((s, p) => s + p.weight * Math.exp(p.lnThickness + p.covariance[2] / 2), 0);
  return { mean, low: Math.exp(mixtureQuantile(tail, m)), high: Math.exp(mixtureQuantile(1 - tail, m)) };
}

export interface Moments {
  index: number;
  lnThickness: number;
  covariance: [number, number, number];
}

/** Mean and covariance of the mixture in (index, ln thickness). */
export function filmMoments(law: FilmLaw): Moments {
  let index = 0;
  let ln = 0;
  for (const p of law.parts) {
    index += p.weight * p.index;
    ln += p.weight * p.lnThickness;
  }
  const covariance: [number, number, number] = [0, 0, 0];
  for (const p of law.parts) {
    const a = p.index - index;
    const b = p.lnThickness - ln;
    covariance[0] += p.weight * (p.covariance[0] + a * a);
    covariance[1] += p.weight * (p.covariance[1] + a * b);
    covariance[2] += p.weight * (p.covariance[2] + b * b);
  }
  return { index, lnThickness: ln, covariance };
}

/** The same moments with thickness in nm: [var index, cov, var thickness]. First order in the spread of ln thickness. */
export function filmPoint(law: FilmLaw): { index: number; thicknessNm: number; covariance: [number, number, number] } {
  const m = filmMoments(law);
  const d = Math.exp(m.lnThickness + m.covariance[2] / 2);
  return {
    index: m.index,
    thicknessNm: d,
    covariance: [m.covariance[0], m.covariance[1] * d, m.covariance[2] * d * d],
  };
}
