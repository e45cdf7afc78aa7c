/**
 * What the other chambers of the line teach about a chamber: a fleet mean g with chambers z = g + dev, dev ~ N(0, D).
 *
 * Each sister is filtered on its own from the law N(m0, P0 = Pg + D) of "some chamber of this line". What its data alone
 * said about its coefficients is the ratio of posterior to prior; seen through dev it becomes information about g:
 *
 *   J = Ppost^-1 - P0^-1,   h = Ppost^-1 mpost - P0^-1 m0
 *   information about g  = D^-1 - D^-1 (D^-1 + J)^-1 D^-1,   vector  D^-1 (D^-1 + J)^-1 h
 *
 * For a linear Gaussian model this equals filtering all chambers jointly (a test compares it with the dense answer); the
 * merging of hypotheses makes it an approximation only in which readings a sister doubted. It costs one pass a chamber
 * instead of one pass a pair of chambers, and a pass is shared by all its sisters.
 */
import { cholesky, choleskyInverse, choleskyLogDeterminant } from "../engine/index.ts";
import { covariance, type State } from "./square-root.ts";

/** A Gaussian over the coefficients in moment form, P dense p x p. */
export interface Law {
  p: number;
  mean: Float64Array;
  covariance: Float64Array;
}

interface Inverse {
  inverse: Float64Array;
  logDet: number;
}

export function invertSpd(a: Float64Array, n: number): Inverse {
  const factor = cholesky(a, n);
  return { inverse: choleskyInverse(factor, n), logDet: choleskyLogDeterminant(factor, n) };
}

const inverses = new WeakMap<Law, Inverse>();

/** The inverse of a law's covariance, kept with it: the same laws come up at every value of the chamber spread. */
function inverseOf(law: Law): Inverse {
  let known = inverses.get(law);
  if (!known) {
    known = invertSpd(law.covariance, law.p);
    inverses.set(law, known);
  }
  return known;
}

/** The coefficients' part of a filter state (all but the two steps). */
export function coefficientLaw(state: State): Law {
  const n = state.n;
  const p = n - 2;
  const full = covariance(state);
  const out = new Float64Array(p * p);
  for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) out[i * p + j] = full[i * n + j];
  return { p, mean: state.mean.slice(0, p), covariance: out };
}

/** Filter state over the coefficients from a law. */
export function stateOf(law: Law): State {
  return { n: law.p, mean: law.mean.slice(), factor: cholesky(law.covariance, law.p) };
}

/** A chamber drawn from the fleet: adds D (variances) to the law of the fleet mean. */
export function drawChamber(fleet: Law, spread: Float64Array): Law {
  const out = fleet.covariance.slice();
  for (let i = 0; i < fleet.p; i++) out[i * fleet.p + i] += spread[i];
  return { p: fleet.p, mean: fleet.mean, covariance: out };
}

/** What one chamber's data alone say, as information on its coefficients. */
interface Said {
  information: Float64Array;
  vector: Float64Array;
}

function saidBy(prior: Law, posterior: Law): Said & { generic: Inverse; posterior: Inverse } {
  const p = prior.p;
  const generic = inverseOf(prior);
  const own = inverseOf(posterior);
  const before = generic.inverse;
  const after = own.inverse;
  const information = new Float64Array(p * p);
  const vector = new Float64Array(p);
  for (let i = 0; i < p; i++)
    for (let j = 0; j < p; j++) {
      information[i * p + j] = after[i * p + j] - before[i * p + j];
      vector[i] += after[i * p + j] * posterior.mean[j] - before[i * p + j] * prior.mean[j];
    }
  return { information, vector, generic, posterior: own };
}

/**
 * The fleet's law after a sister has spoken, and the log density of her readings under the fleet's law before, given the
 * log density they had under `generic` (the prior she was filtered from).
 */
export function hearSister(
  fleet: Law,
  spread: Float64Array,
  sister: { generic: Law; posterior: Law; logDensity: number },
): { fleet: Law; logDensity: number } {
  const p = fleet.p;
  const said = saidBy(sister.generic, sister.posterior);
  const logDensity = sister.logDensity + priorSwap(sister.generic, sister.posterior, drawChamber(fleet, spread), said);

  const inner = said.information.slice();
  for (let i = 0; i < p; i++) inner[i * p + i] += 1 / spread[i];
  symmetrise(inner, p);
  const c = invertSpd(inner, p).inverse;
  const now = inverseOf(fleet).inverse.slice();
  const vector = new Float64Array(p);
  for (let i = 0; i < p; i++) {
    let sum = 0;
    for (let j = 0; j < p; j++) sum += now[i * p + j] * fleet.mean[j] + (c[i * p + j] * said.vector[j]) / spread[i];
    vector[i] = sum;
  }
  for (let i = 0; i < p; i++)
    for (let j = 0; j < p; j++)
      now[i * p + j] += (i === j ? 1 / spread[i] : 0) - c[i * p + j] / (spread[i] * spread[j]);
  symmetrise(now, p);
  const posterior = invertSpd(now, p).inverse;
  return { fleet: { p, mean: times(posterior, vector, p), covariance: posterior }, logDensity };
}

/**
 * ln of the ratio of marginal likelihoods under prior `next` and under prior `generic`, for data whose posterior under
 * `generic` is `posterior`: the integral of N(z; post) N(z; next) / N(z; generic), a ratio of Gaussians.
 */
function priorSwap(generic: Law, posterior: Law, next: Law, said: ReturnType<typeof saidBy>): number {
  const p = generic.p;
  const a = said.posterior;
  const b = invertSpd(next.covariance, p);
  const g = said.generic;
  const sum = said.information.slice();
  for (let i = 0; i < p * p; i++) sum[i] += b.inverse[i];
  symmetrise(sum, p);
  const s = invertSpd(sum, p);
  const vb = times(b.inverse, next.mean, p);
  const v = said.vector.map((x, i) => x + vb[i]);
  const quadratic =
    inner(v, times(s.inverse, v, p)) -
    inner(posterior.mean, times(a.inverse, posterior.mean, p)) -
    inner(next.mean, vb) +
    inner(generic.mean, times(g.inverse, generic.mean, p));
  return 0.5 * (quadratic - a.logDet - b.logDet + g.logDet - s.logDet);
}

function times(a: Float64Array, v: Float64Array, n: number): Float64Array {
  const out = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += a[i * n + j] * v[j];
    out[i] = sum;
  }
  return out;
}

function inner(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i] * b[i];
  return sum;
}

function symmetrise(a: Float64Array, n: number): void {
  for (let i = 0; i < n; i++)
    for (let j = 0; j < i; j++) {
      const mean = 0.5 * (a[i * n + j] + a[j * n + i]);
      a[i * n + j] = mean;
      a[j * n + i] = mean;
    }
}
