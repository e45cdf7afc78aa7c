/**
 * Which runs teach most: a search over candidates that shrinks the mean predictive variance over a region (I-optimal) of a
 * linear model known as a Gaussian. Greedy from a few first runs, then exchanges until none helps (after V. V. Fedorov 1972,
 * from memory); then simpler runs where they cost next to nothing; at last the order in which whoever stops early has learned most. Only the covariance is needed: what a reading will
 * say moves the mean, never how sharply it is known. Pure linear algebra; knows nothing of films.
 */

/** One run's readings as rows of unit noise, independent of each other: what `whitened` makes. */
export type Probe = readonly Float64Array[];

export interface DesignQuestion {
  n: number;
  /** Covariance before the first run, dense n x n, symmetric. */
  covariance: Float64Array;
  /** Candidate `c` run as the `at`-th of the plan (from 0). */
  probe(c: number, at: number): Probe;
  candidates: number;
  runs: number;
  /** Mean over the region of h h', dense n x n: the criterion is its product's trace with the covariance. */
  region: Float64Array;
  /** Variances that age adds to single states before each run but the first. */
  walk?: readonly { state: number; variance: number }[];
  /** How many things a candidate moves, and the share of the criterion that moving fewer may cost in all. */
  simplicity?: { moves(c: number): number; slack: number };
}

export interface Design {
  /** Candidates in the order to run them; one may come more than once. */
  chosen: number[];
  /** The criterion before the first run and after each. */
  criterion: number[];
  /** Covariance before the first run and after each. */
  covariances: Float64Array[];
  /** Gain in ln det of the information of each run (the D-criterion's share). */
  information: number[];
}

/** Two correlated readings' rows turned into rows of unit noise; `noise` is [var, cov, var]. */
export function whitened(first: Float64Array, second: Float64Array, noise: readonly [number, number, number]): Probe {
  const l11 = Math.sqrt(noise[0]);
  const l21 = noise[1] / l11;
  const l22 = Math.sqrt(noise[2] - l21 * l21);
  const a = first.map((v) => v / l11);
  return [a, second.map((v, i) => (v - l21 * a[i]) / l22)];
}

/** Mean of h h' times a weight over rows, dense: adds to `region`. */
export function addMoments(region: Float64Array, n: number, row: Float64Array, weight: number): void {
  for (let i = 0; i < n; i++) {
    const wi = weight * row[i];
    if (wi !== 0) for (let j = 0; j < n; j++) region[i * n + j] += wi * row[j];
  }
}

/** Mean predictive variance over the region: trace of the product of two symmetric matrices. */
export function meanVariance(region: Float64Array, covariance: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < region.length; i++) sum += region[i] * covariance[i];
  return sum;
}

/** The covariance once a probe has been read, in place; returns the gain in ln det of the information. */
export function readProbe(p: Float64Array, n: number, probe: Probe): number {
  let gain = 0;
  const ph = new Float64Array(n);
  for (const h of probe) {
    let alpha = 1;
    for (let i = 0; i < n; i++) {
      let sum = 0;
      for (let j = 0; j < n; j++) sum += p[i * n + j] * h[j];
      ph[i] = sum;
      alpha += h[i] * sum;
    }
    for (let i = 0; i < n; i++) {
      const g = ph[i] / alpha;
      for (let j = 0; j < n; j++) p[i * n + j] -= g * ph[j];
    }
    gain += Math.log(alpha);
  }
  return gain;
}

/** A gain under this share of the criterion is rounding, not a better plan. */
const worth = 1e-9;
/** Rounds of exchanges; each round lowers the criterion, so this is a bound on time only. */
const rounds = 20;
/** First runs to start from, the best alone first: exchanges of single runs stop where no single one helps, which may be short of the best. */
const starts = 5;
/** The order that learns most early may cost this share of the criterion at the end. */
const orderMayCost = 0.01;

/** The best plan found. `runs` of 0 gives the state of things. */
export function design(q: DesignQuestion): Design {
  const { n, region, candidates } = q;
  const step = (p: Float64Array, c: number, at: number): Float64Array => {
    const out = p.slice();
    if (at > 0) for (const { state, variance } of q.walk ?? []) out[state * (n + 1)] += variance;
    readProbe(out, n, q.probe(c, at));
    return out;
  };
  const after = (p: Float64Array, order: readonly number[], from: number): number => {
    let now = p;
    for (let at = from; at < order.length; at++) now = step(now, order[at], at);
    return meanVariance(region, now);
  };
  /** The candidate after which the criterion is least, of those allowed. */
  const best = (p: Float64Array, at: number, allowed: Iterable<number>): number => {
    let found = -1;
    let least = Number.POSITIVE_INFINITY;
    for (const c of allowed) {
      const value = meanVariance(region, step(p, c, at));
      if (value < least * (1 - worth)) [found, least] = [c, value];
    }
    return found;
  };
  const all = Array.from({ length: candidates }, (_, c) => c);

  /** Greedy from a first run, then exchanges of single runs until none helps. */
  const from = (first: number): { chosen: number[]; value: number } => {
    let chosen = [first];
    let p = step(q.covariance, first, 0);
    for (let at = 1; at < q.runs; at++) {
      chosen.push(best(p, at, all));
      p = step(p, chosen[at], at);
    }
    let value = meanVariance(region, p);
    for (let round = 0, improved = true; improved && round < rounds; round++) {
      improved = false;
      let before = q.covariance;
      for (let at = 0; at < q.runs; at++) {
        const tries = [
          ...all.filter((c) => c !== chosen[at]).map((c) => chosen.with(at, c)),
          // Age tells runs apart by their place too.
          ...chosen.flatMap((c, later) => (later > at ? [chosen.with(at, c).with(later, chosen[at])] : [])),
        ];
        for (const tried of tries) {
          const here = after(before, tried, at);
          if (here >= value * (1 - worth)) continue;
          chosen = tried;
          value = here;
          improved = true;
        }
        before = step(before, chosen[at], at);
      }
    }
    return { chosen, value };
  };
  const alone = all.map((c) => ({ c, value: meanVariance(region, step(q.covariance, c, 0)) }));
  alone.sort((x, y) => x.value - y.value || x.c - y.c);
  const ends = alone.slice(0, q.runs === 0 ? 0 : starts).map(({ c }) => from(c));
  const { chosen, value } = ends.reduce(
    (x, y) => (y.value < x.value * (1 - worth) ? y : x),
    ends[0] ?? { chosen: [], value: 0 },
  );
  if (q.simplicity) simplify(q, chosen, value, (order) => after(q.covariance, order, 0));

  // Best first, for whoever stops early, unless ageing makes that order dearer at the end.
  const left = [...chosen];
  const order: number[] = [];
  let p = q.covariance;
  for (let at = 0; at < q.runs; at++) {
    const c = best(p, at, new Set(left));
    left.splice(left.indexOf(c), 1);
    order.push(c);
    p = step(p, c, at);
  }
  return told(q, meanVariance(region, p) <= after(q.covariance, chosen, 0) * (1 + orderMayCost) ? order : chosen);
}

/** A plan with what is known before and after each of its runs. */
function told(q: DesignQuestion, chosen: number[]): Design {
  const { n, region, covariance } = q;
  const out: Design = {
    chosen,
    criterion: [meanVariance(region, covariance)],
    covariances: [covariance],
    information: [],
  };
  let p = covariance;
  chosen.forEach((c, at) => {
    p = p.slice();
    if (at > 0) for (const { state, variance } of q.walk ?? []) p[state * (n + 1)] += variance;
    out.information.push(readProbe(p, n, q.probe(c, at)));
    out.covariances.push(p);
    out.criterion.push(meanVariance(region, p));
  });
  return out;
}

/** Takes candidates that move less, one run at a time, the one that costs least first, while the criterion stays within the slack. */
function simplify(
  { simplicity, candidates }: DesignQuestion,
  chosen: number[],
  value: number,
  judge: (order: readonly number[]) => number,
): void {
  if (!simplicity) return;
  const { moves, slack } = simplicity;
  const limit = value * (1 + slack);
  for (;;) {
    let least = limit;
    let swap: [at: number, c: number] | null = null;
    chosen.forEach((now, at) => {
      for (let c = 0; c < candidates; c++) {
        if (moves(c) >= moves(now)) continue;
        const here = judge(chosen.with(at, c));
        if (here <= least) {
          least = here;
          swap = [at, c];
        }
      }
    });
    if (swap === null) return;
    chosen[swap[0]] = swap[1];
  }
}
