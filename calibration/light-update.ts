/**
 * A run whose film nobody read, but whose light was: what a reflectance minimum or a weighted reflectance says about the film,
 * through the optics of the coated cell. On pyramids light knows index times thickness on the facet, so the index is hardly
 * moved by it, and the facet factor's own uncertainty stays in.
 *
 * A minimum alone moves evenly with the film and is linearised, twice. Weighted reflectance is flat and two-valued in thickness:
 * there the film's law is weighed on a grid of films and brought back to its mean and covariance, which keeps both branches in
 * the spread. With f = (index, ln facet thickness) = H z + noise of prior N(m, S) and posterior moments m', S' on the grid,
 *
 *   z' = z + K (m' - m),   P' = P - K (S - S') K',   K = P H' S^-1        (exact for the moments of z, since z | f is unchanged)
 */
import type { LightLink } from "./light-link.ts";
import type { PreparedRun } from "./prepare.ts";
import { opticsFloor, strayLight } from "./priors.ts";
import type { LightReading } from "./run.ts";
import { covariance, dot, factorInPlace, project, type State } from "./square-root.ts";

/** Takes in the light of a run whose film was not read; returns the log density of what taught something. */
export function readLight(
  state: State,
  { hIndex, hRate, known, light }: PreparedRun,
  link: LightLink,
  process: readonly [number, number],
): number {
  const f1 = new Float64Array(state.n);
  const f2 = new Float64Array(state.n);
  project(state, hIndex, f1);
  project(state, hRate, f2);
  const prior: Moments = {
    mean: [dot(hIndex, state.mean), dot(hRate, state.mean) + known + link.lnFacetFactor],
    covariance: [dot(f1, f1) + process[0], dot(f1, f2), dot(f2, f2) + process[1] + link.lnFacetSd ** 2],
  };
  let film = prior;
  let density = 0;
  const take = (learned: { film: Moments; logDensity: number } | null): void => {
    if (!learned) return;
    film = learned.film;
    density += learned.logDensity;
  };
  // The sharp reading first: the grid for the other then need not be fine.
  for (const reading of light) if (reading.kind === "reflectance_minimum_nm") take(withMinimum(film, reading, link));
  for (const reading of light)
    if (reading.kind === "weighted_reflectance_percent") take(withWeighted(film, reading, link));
  if (film !== prior) pull(state, hIndex, hRate, prior, film);
  return density;
}

/** Mean and covariance (var, cov, var) of a run's own index and ln thickness on the facet. */
interface Moments {
  mean: [number, number];
  covariance: [number, number, number];
}

/** Steps of the minimum's slopes: the curve is smooth over them, and they are far from its rounding. */
const slopeSteps = { index: 0.005, lnThickness: 0.006 };

/** Linearised where the film is believed, then once more where it then is. */
function withMinimum(
  prior: Moments,
  reading: LightReading,
  link: LightLink,
): { film: Moments; logDensity: number } | null {
  const [v11, v12, v22] = prior.covariance;
  let [index, ln] = prior.mean;
  for (let round = 0; round < 2; round++) {
    const at = (dn: number, dl: number) => link.expected(reading.kind, index + dn, ln + dl);
    const { index: hn, lnThickness: hl } = slopeSteps;
    const [here, more, less, up, down] = [at(0, 0), at(hn, 0), at(-hn, 0), at(0, hl), at(0, -hl)];
    if (here === null || more === null || less === null || up === null || down === null) return null;
    const a = (more - less) / (2 * hn);
    const b = (up - down) / (2 * hl);
    const innovation = reading.value - here - a * (prior.mean[0] - index) - b * (prior.mean[1] - ln);
    const g1 = v11 * a + v12 * b;
    const g2 = v12 * a + v22 * b;
    const alpha = reading.sd ** 2 + opticsFloor.minimumNm ** 2 + a * g1 + b * g2;
    // A minimum far from anything the film could be (another order, a wrong wafer) teaches nothing.
    if (innovation ** 2 > 25 * alpha) return null;
    index = prior.mean[0] + (g1 * innovation) / alpha;
    ln = prior.mean[1] + (g2 * innovation) / alpha;
    if (round === 1)
      return {
        film: {
          mean: [index, ln],
          covariance: [v11 - (g1 * g1) / alpha, v12 - (g1 * g2) / alpha, v22 - (g2 * g2) / alpha],
        },
        logDensity: -0.5 * (Math.log(2 * Math.PI * alpha) + innovation ** 2 / alpha),
      };
  }
  return null;
}

/**
 * A standard normal as so many even places up to `reach` sd each way: places and weights. Stretched until their variance is
 * exactly 1, so that a reading that favours no film leaves the law as it was, however often it is taken.
 */
function places(reach: number, count: number): { z: number; weight: number }[] {
  const even = Array.from({ length: count }, (_, i) => -reach + (2 * reach * i) / (count - 1));
  const weights = even.map((z) => Math.exp(-0.5 * z * z));
  const total = weights.reduce((sum, w) => sum + w, 0);
  const variance = even.reduce((sum, z, i) => sum + weights[i] * z * z, 0) / total;
  return even.map((z, i) => ({ z: z / Math.sqrt(variance), weight: weights[i] / total }));
}

/** Films weighed: in index, and at each index in ln thickness. */
const indexPlaces = places(3, 7);
const thicknessPlaces = places(4, 61);

/** The film's law after the reading, on the grid; null where the optics have no answer for most of it. */
function withWeighted(
  prior: Moments,
  reading: LightReading,
  link: LightLink,
): { film: Moments; logDensity: number } | null {
  const [vn, cov, vl] = prior.covariance;
  const sdN = Math.sqrt(vn);
  const slope = cov / vn;
  const sdL = Math.sqrt(vl - slope * cov);
  const variance = reading.sd ** 2 + opticsFloor.weightedPercent ** 2;
  const peak = 1 / Math.sqrt(2 * Math.PI * variance);
  let known = 0;
  let density = 0;
  const sums = [0, 0, 0, 0, 0];
  for (const { z: zn, weight: wn } of indexPlaces) {
    for (const { z: zl, weight: wl } of thicknessPlaces) {
      const weight = wn * wl;
      const dn = sdN * zn;
      const dl = slope * dn + sdL * zl;
      const value = link.expected(reading.kind, prior.mean[0] + dn, prior.mean[1] + dl);
      if (value !== null) known += weight;
      const fits = value === null ? 0 : peak * Math.exp(-((reading.value - value) ** 2) / (2 * variance));
      const w = weight * ((1 - strayLight.chance) * fits + strayLight.chance / strayLight.weightedPercent);
      density += w;
      sums[0] += w * dn;
      sums[1] += w * dl;
      sums[2] += w * dn * dn;
      sums[3] += w * dn * dl;
      sums[4] += w * dl * dl;
    }
  }
  if (known < 0.5) return null;
  const [mn, ml, nn, nl, ll] = sums.map((sum) => sum / density);
  return {
    film: {
      mean: [prior.mean[0] + mn, prior.mean[1] + ml],
      covariance: [nn - mn * mn, nl - mn * ml, ll - ml * ml],
    },
    logDensity: Math.log(density),
  };
}

/** Brings the state to what the film's new moments say of it; if rounding spoils the covariance the wider prior stays. */
function pull(state: State, hIndex: Float64Array, hRate: Float64Array, before: Moments, after: Moments): void {
  const { n } = state;
  const p = covariance(state);
  const times = (h: Float64Array) =>
    Float64Array.from({ length: n }, (_, i) => dot(p.subarray(i * n, (i + 1) * n) as Float64Array, h));
  const a = times(hIndex);
  const b = times(hRate);
  const [s11, s12, s22] = before.covariance;
  const det = s11 * s22 - s12 * s12;
  const k1 = a.map((v, i) => (v * s22 - b[i] * s12) / det);
  const k2 = b.map((v, i) => (v * s11 - a[i] * s12) / det);
  const [d11, d12, d22] = after.covariance.map((v, i) => before.covariance[i] - v);
  const shift = [after.mean[0] - before.mean[0], after.mean[1] - before.mean[1]];
  const factor = p.slice();
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++)
      factor[i * n + j] -= d11 * k1[i] * k1[j] + d12 * (k1[i] * k2[j] + k2[i] * k1[j]) + d22 * k2[i] * k2[j];
  if (!factorInPlace(factor, n)) return;
  for (let i = 0; i < n; i++) {
    state.mean[i] += k1[i] * shift[0] + k2[i] * shift[1];
    for (let j = 0; j < n; j++) state.factor[i * n + j] = j <= i ? factor[i * n + j] : 0;
  }
}
