/**
 * How the bias of a gauge wanders, and the backward half of the reference filter (gauge-bias.ts): what all readings, earlier
 * and later, say of it at a day. State [r_n, r_d, b_n, b_d, v_n, v_d]: the wafer, the bias, and its pace a day.
 *
 *   db/dt = v,   v an Ornstein-Uhlenbeck process of sd `pace` and memory T (gaugeDrift.memoryDays);   a = exp(-t/T)
 *   b' = b + T (1 - a) v,   v' = a v
 *   noise: var b s^2 T^2 (2t/T - 3 + 4a - a^2),   cov s^2 T (1 - a)^2,   var v s^2 (1 - a^2)
 *
 * (integral of that process; textbook, from memory, and held to the dense answer by a test).
 */
import { cholesky, choleskyInverse } from "../engine/index.ts";
import { gaugeDrift } from "./priors.ts";
import type { GaugeCovariance } from "./run.ts";

/** A bias (index, thickness nm) with its covariance. */
export interface Bias {
  index: number;
  thicknessNm: number;
  covariance: GaugeCovariance;
}

/** Mean (6) and covariance (6 x 6). */
export interface Reference {
  mean: Float64Array;
  covariance: Float64Array;
}

/** A day of the filter: the state foreseen, and after its readings. `opened`: the bias jumped here. */
export interface Step {
  day: number;
  before: Reference;
  after: Reference;
  opened: boolean;
}

/** Length of the state, and where the bias and its pace start in it. */
export const n = 6;
export const biasAt = 2;
export const paceAt = 4;
/** Standard deviation of the pace, a day, of index and thickness nm. */
export type Pace = readonly [index: number, thicknessNm: number];
const memory = gaugeDrift.memoryDays;

/** The state some days later, nothing seen in between. */
export function carried({ mean, covariance }: Reference, days: number, pace: Pace): Reference {
  const a = Math.exp(-days / memory);
  const g = memory * (1 - a);
  const later = mean.slice();
  // F P F' by rows, then by columns: b += g v, v *= a.
  const P = covariance.slice();
  for (const p of [0, 1]) {
    const b = biasAt + p;
    const v = paceAt + p;
    later[b] += g * mean[v];
    later[v] = a * mean[v];
    for (let j = 0; j < n; j++) {
      P[b * n + j] += g * P[v * n + j];
      P[v * n + j] *= a;
    }
    for (let i = 0; i < n; i++) {
      P[i * n + b] += g * P[i * n + v];
      P[i * n + v] *= a;
    }
    const s2 = pace[p] ** 2;
    P[b * n + b] += s2 * memory ** 2 * (2 * (days / memory) - 3 + 4 * a - a * a);
    P[b * n + v] += s2 * memory * (1 - a) ** 2;
    P[v * n + b] += s2 * memory * (1 - a) ** 2;
    P[v * n + v] += s2 * (1 - a * a);
  }
  return { mean: later, covariance: P };
}

/** P F' for the step of `carried`: the covariance of a state with what it becomes. */
function withLater(P: Float64Array, days: number): Float64Array {
  const a = Math.exp(-days / memory);
  const out = P.slice();
  for (const p of [0, 1])
    for (let i = 0; i < n; i++) {
      out[i * n + biasAt + p] += memory * (1 - a) * P[i * n + paceAt + p];
      out[i * n + paceAt + p] *= a;
    }
  return out;
}

function times(a: Float64Array, b: Float64Array): Float64Array {
  const out = new Float64Array(n * n);
  for (let i = 0; i < n; i++)
    for (let k = 0; k < n; k++) for (let j = 0; j < n; j++) out[i * n + j] += a[i * n + k] * b[k * n + j];
  return out;
}

/** The bias at any day, every reading heard: (index, thickness nm) with covariance. */
export function smoothed(steps: readonly Step[], pace: Pace): (day: number) => Bias {
  const foreseen = steps.map(({ before }, i) => (i === 0 ? null : inverse(before.covariance)));
  const full: Reference[] = [];
  const heard = (here: Reference, day: number, next: number) =>
    pulled(here, steps[next].day - day, steps[next].before, full[next], foreseen[next] as Float64Array);
  for (let i = steps.length - 1; i >= 0; i--)
    full[i] = i === steps.length - 1 ? steps[i].after : heard(steps[i].after, steps[i].day, i + 1);
  return (day) => {
    const next = steps.findIndex((step) => step.day > day);
    if (next === 0) return biasBefore(full[0], steps[0].day - day, pace);
    const at = next < 0 ? steps.length - 1 : next - 1;
    if (steps[at].day === day) return biasOf(full[at]);
    const here = carried(steps[at].after, day - steps[at].day, pace);
    if (next < 0) return biasOf(here, biasOf(steps[at].after));
    return biasOf(heard(here, day, next), wider(biasOf(full[at]), biasOf(full[next])));
  };
}

/** Before the first reading: as it was then, and ever vaguer backwards. */
function biasBefore(first: Reference, days: number, pace: Pace): Bias {
  const grown = first.covariance.slice();
  const x = days / memory;
  for (const p of [0, 1]) grown[(biasAt + p) * n + biasAt + p] += 2 * (pace[p] * memory) ** 2 * (x - 1 + Math.exp(-x));
  return biasOf({ mean: first.mean, covariance: grown }, biasOf(first));
}

/** The wafer may be certified exactly: a hair keeps its row regular. */
function inverse(covariance: Float64Array): Float64Array {
  const out = covariance.slice();
  for (let i = 0; i < n; i++) out[i * n + i] = Math.max(out[i * n + i], 1e-15);
  return choleskyInverse(cholesky(out, n), n);
}

/** One backward step: the state `here`, foreseen as `foreseen` so many days later, where all readings say `after`. */
function pulled(
  here: Reference,
  days: number,
  foreseen: Reference,
  after: Reference,
  inverseForeseen: Float64Array,
): Reference {
  const gain = times(withLater(here.covariance, days), inverseForeseen);
  const mean = here.mean.slice();
  const difference = after.covariance.map((v, i) => v - foreseen.covariance[i]);
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++) mean[i] += gain[i * n + j] * (after.mean[j] - foreseen.mean[j]);
  const half = times(gain, difference);
  const covariance = here.covariance.slice();
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++) for (let k = 0; k < n; k++) covariance[i * n + j] += half[i * n + k] * gain[j * n + k];
  return { mean, covariance };
}

/** The bias of a state. `seen`: of the nearest day with a reading; no more than `unseen` is feared beyond that. */
function biasOf({ mean, covariance: P }: Reference, seen?: Bias): Bias {
  // Rounding may leave a hair below zero where the bias is certain (at the first reading of an uncertified wafer).
  const v = [0, 1].map((p) => Math.max(P[(biasAt + p) * n + biasAt + p], 0));
  let cov = P[biasAt * n + biasAt + 1];
  if (seen)
    for (const p of [0, 1]) {
      const most = seen.covariance[p === 0 ? 0 : 2] + gaugeDrift.unseen[p] ** 2;
      if (v[p] <= most) continue;
      cov *= Math.sqrt(most / v[p]);
      v[p] = most;
    }
  return { index: mean[biasAt], thicknessNm: mean[biasAt + 1], covariance: [v[0], cov, v[1]] };
}

const wider = (a: Bias, b: Bias): Bias => (a.covariance[0] >= b.covariance[0] ? a : b);
