/**
 * What is believed about the film of the next run: a mixture of bivariate normals over (index, ln thickness), one part a
 * hyper-parameter node and hypothesis. Intervals, moments and chances are read from the mixture itself, not from one
 * normal fitted to it: that is where the honest tails come from.
 */
import { gaussLegendre, mixtureMoments, mixtureQuantile, normalCdf } from "../engine/index.ts";

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

/** Where the film must lie. Open sides are infinite. `also`, given, must be <= 0 as well (a limit in reflectance, say). */
export interface GoalRegion {
  index: readonly [number, number];
  thicknessNm: readonly [number, number];
  also: readonly ((index: number, thicknessNm: number) => number)[];
}

/**
 * Chance that the film lies in the region: Gauss-Legendre over the index, exact normal differences in ln thickness given
 * the index (methods of conditional integration; tensor Gauss-Hermite is off by several per cent on indicator functions).
 * With `also`, the allowed stretches of thickness are found by sign changes on a grid of `steps` and linear roots.
 */
export function chanceIn(law: FilmLaw, region: GoalRegion, steps = 24): number {
  const rule = gaussLegendre(20);
  let total = 0;
  for (const part of law.parts) {
    if (part.weight < 1e-9) continue;
    total += part.weight * chanceInPart(part, region, rule, steps);
  }
  return Math.min(1, Math.max(0, total));
}

function chanceInPart(
  part: FilmPart,
  region: GoalRegion,
  rule: { nodes: Float64Array; weights: Float64Array },
  steps: number,
): number {
  const [vn, cov, vl] = part.covariance;
  const sn = Math.sqrt(vn);
  const low = Math.max(region.index[0], part.index - 6 * sn);
  const high = Math.min(region.index[1], part.index + 6 * sn);
  if (!(high > low)) return 0;
  const slope = cov / vn;
  const sl = Math.sqrt(Math.max(vl - slope * cov, 1e-18));
  let sum = 0;
  for (let i = 0; i < rule.nodes.length; i++) {
    const index = 0.5 * (low + high) + 0.5 * (high - low) * rule.nodes[i];
    const u = (index - part.index) / sn;
    const density = Math.exp(-0.5 * u * u) / (sn * Math.sqrt(2 * Math.PI));
    const mean = part.lnThickness + slope * (index - part.index);
    let inside = 0;
    for (const [a, b] of allowed(index, mean, sl, region, steps)) {
      inside +=
        normalCdf((Math.log(b) - mean) / sl) - normalCdf((a > 0 ? Math.log(a) - mean : Number.NEGATIVE_INFINITY) / sl);
    }
    sum += rule.weights[i] * density * inside;
  }
  return 0.5 * (high - low) * sum;
}

/** Stretches of thickness inside the region at one index. */
function allowed(index: number, meanLn: number, sdLn: number, region: GoalRegion, steps: number): [number, number][] {
  const reachLow = Math.exp(meanLn - 6 * sdLn);
  const reachHigh = Math.exp(meanLn + 6 * sdLn);
  const a = Math.max(region.thicknessNm[0], region.also.length > 0 ? reachLow : 0);
  const b = Math.min(region.thicknessNm[1], region.also.length > 0 ? reachHigh : Number.POSITIVE_INFINITY);
  if (!(b > a)) return [];
  if (region.also.length === 0) return [[a, b]];
  const worst = (d: number) => {
    let top = Number.NEGATIVE_INFINITY;
    for (const g of region.also) top = Math.max(top, g(index, d));
    return top;
  };
  const out: [number, number][] = [];
  let start: number | null = null;
  let previous = worst(a);
  if (previous <= 0) start = a;
  for (let i = 1; i <= steps; i++) {
    const d = a + ((b - a) * i) / steps;
    const now = worst(d);
    if (previous <= 0 !== now <= 0) {
      const before = d - (b - a) / steps;
      const root = before + ((d - before) * -previous) / (now - previous);
      if (now <= 0) start = root;
      else {
        out.push([start ?? root, root]);
        start = null;
      }
    }
    previous = now;
  }
  if (start !== null) out.push([start, b]);
  return out;
}
