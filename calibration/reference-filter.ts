/**
 * The forward half of the reference filter (gauge-bias.ts): days of readings of a reference wafer, in order, and which of
 * them are believed. State as in reference-walk.ts: the wafer's values, what the gauge reads too high, and its pace.
 */
import { cholesky, choleskyInverse, choleskyLogDeterminant, choleskyQuadraticForm } from "../engine/index.ts";
import { gaugeDrift } from "./priors.ts";
import { biasAt, carried, n, type Pace, paceAt, type Reference, type Step } from "./reference-walk.ts";
import type { GaugeCovariance } from "./run.ts";

export interface ReferenceGauge {
  /** Covariance of one reading on one spot, and of the part that all readings of a day share. */
  repeatability: GaugeCovariance;
  dayToDay: GaugeCovariance;
  /** Certified values of the wafer with their standard deviation; null: the first readings are the reference. */
  certified: {
    index: { value: number; sd: number } | null;
    thicknessNm: { value: number; sd: number } | null;
  };
}

/** Readings of one day, averaged. */
export interface Day {
  day: number;
  /** Positions in the list given. */
  members: number[];
  value: readonly [number, number];
  seen: readonly [boolean, boolean];
  noise: GaugeCovariance;
}

const both: readonly number[] = [0, 1];

/**
 * The filter. A day that surprises is left aside until the next one agrees with it; then both are taken, as a jump
 * (`confirmed`, the position of the first), which a lamp change or a recalibration makes.
 */
export function forwards(
  days: readonly Day[],
  gauge: ReferenceGauge,
  pace: Pace,
  jumps: ReadonlySet<number>,
): { steps: Step[]; doubted: number[]; logDensity: number; confirmed: number | null } {
  let { mean, covariance } = start(days, gauge, pace);
  const steps: Step[] = [];
  const doubted: number[] = [];
  let logDensity = 0;
  let waiting: { at: number; miss: number[] } | null = null;
  for (const [i, day] of days.entries()) {
    const opened = jumps.has(i);
    const before = carried({ mean, covariance }, i === 0 ? 0 : day.day - days[i - 1].day, pace);
    if (opened) for (const p of both) before.covariance[(biasAt + p) * n + biasAt + p] += gaugeDrift.start[p] ** 2;
    const read = both.filter((p) => day.seen[p]);
    const m = read.length;
    const miss = read.map((p) => day.value[p] - before.mean[p] - before.mean[biasAt + p]);
    const spread = innovation(before.covariance, day.noise, read);
    const surprise = choleskyQuadraticForm(cholesky(spread, m), m, Float64Array.from(miss));
    if (surprise > gaugeDrift.surprise && i > 0) {
      if (waiting && !jumps.has(waiting.at) && agree(waiting.miss, miss, day.noise, read))
        return { steps, doubted, logDensity, confirmed: waiting.at };
      waiting = { at: i, miss };
      doubted.push(i);
      logDensity += Math.log(gaugeDrift.slip) + density(widened(spread, read), miss);
      ({ mean, covariance } = before);
    } else {
      waiting = null;
      logDensity += density(spread, miss) + (opened ? Math.log(gaugeDrift.slip) : 0);
      ({ mean, covariance } = update(before, read, miss, spread));
    }
    steps.push({ day: day.day, before, after: { mean, covariance }, opened });
  }
  return { steps, doubted, logDensity, confirmed: null };
}

function start(days: readonly Day[], { certified }: ReferenceGauge, pace: Pace): Reference {
  const mean = new Float64Array(n);
  const covariance = new Float64Array(n * n);
  for (const p of both) {
    const known = p === 0 ? certified.index : certified.thicknessNm;
    const first = days.find((d) => d.seen[p])?.value[p] ?? 0;
    mean[p] = known?.value ?? first;
    // An unknown reference lies anywhere within what `farOff` lets through.
    covariance[p * n + p] = known ? known.sd ** 2 : (3 * gaugeDrift.farOff[p]) ** 2;
    covariance[(biasAt + p) * n + biasAt + p] = known ? gaugeDrift.start[p] ** 2 : 0;
    covariance[(paceAt + p) * n + paceAt + p] = pace[p] ** 2;
  }
  return { mean, covariance };
}

/** Covariance of state `a` with what is read of property `q`. */
const seenWith = (P: Float64Array, a: number, q: number): number => P[a * n + q] + P[a * n + biasAt + q];

/** Covariance of the misses: H P H' + R over the properties read, H = [I I 0]. */
function innovation(P: Float64Array, [vn, cov, vd]: GaugeCovariance, read: readonly number[]): Float64Array {
  const R = [vn, cov, cov, vd];
  const m = read.length;
  const out = new Float64Array(m * m);
  read.forEach((p, i) => {
    read.forEach((q, j) => {
      out[i * m + j] = seenWith(P, p, q) + seenWith(P, biasAt + p, q) + R[p * 2 + q];
    });
  });
  return out;
}

function update(before: Reference, read: readonly number[], miss: readonly number[], spread: Float64Array): Reference {
  const m = read.length;
  const P = before.covariance;
  const inverse = choleskyInverse(cholesky(spread, m), m);
  const mean = before.mean.slice();
  const covariance = P.slice();
  for (let a = 0; a < n; a++)
    for (let i = 0; i < m; i++)
      for (let j = 0; j < m; j++) {
        const gain = seenWith(P, a, read[i]) * inverse[i * m + j];
        mean[a] += gain * miss[j];
        for (let b = 0; b < n; b++) covariance[a * n + b] -= gain * seenWith(P, b, read[j]);
      }
  return { mean, covariance };
}

function widened(spread: Float64Array, read: readonly number[]): Float64Array {
  const m = read.length;
  const out = spread.slice();
  for (let i = 0; i < m; i++) out[i * m + i] += gaugeDrift.start[read[i]] ** 2;
  return out;
}

function density(spread: Float64Array, miss: readonly number[]): number {
  const m = miss.length;
  const L = cholesky(spread, m);
  const square = choleskyQuadraticForm(L, m, Float64Array.from(miss));
  return -0.5 * (m * Math.log(2 * Math.PI) + choleskyLogDeterminant(L, m) + square);
}

/** Do two surprising days tell of the same jump? Their misses differ by no more than three deviations of two readings. */
function agree(a: readonly number[], b: readonly number[], noise: GaugeCovariance, read: readonly number[]): boolean {
  if (a.length !== b.length) return false;
  return read.every((p, i) => (a[i] - b[i]) ** 2 <= 9 * 2 * noise[p === 0 ? 0 : 2]);
}
