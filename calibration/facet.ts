/**
 * The facet factor: film on a pyramid facet over film on a polished witness. It cannot be read directly; runs that have
 * both a witness reading and a reflectance minimum on textured cells pin it, because the minimum moves with index times
 * thickness on the facet.
 */
import type { MinimumOf } from "./light-link.ts";
import { facetFloor } from "./priors.ts";
import type { ChamberLog } from "./run.ts";

export interface FacetFactor {
  mean: number;
  sd: number;
  /** Runs that pinned it. */
  runs: number;
  /** Entries whose minimum did not fit any sensible factor. */
  doubted: readonly number[];
}

/** The comparison of witness and cell has a floor that averaging does not pass, so older runs add nothing after this many. */
const mostRuns = 40;

/**
 * Posterior of the factor from a declared N(mean, sd) and the latest runs with index, thickness and a minimum. Each run
 * gives one value; those that fit no sensible factor, or lie over 4 sd off the rest, are left out and named.
 */
export function facetFactor(
  declared: { mean: number; sd: number },
  logs: readonly ChamberLog[],
  minimumOf: MinimumOf,
): FacetFactor {
  if (declared.sd === 0) return { ...declared, runs: 0, doubted: [] };
  const pairs = pairsIn(logs)
    .sort((a, b) => a.entry - b.entry)
    .slice(-mostRuns);
  if (pairs.length === 0) return { ...declared, runs: 0, doubted: [] };
  const surface = localMinimum(
    minimumOf,
    median(pairs.map((p) => p.index)),
    declared.mean * median(pairs.map((p) => p.thicknessNm)),
  );
  const doubted: number[] = [];
  const found: { entry: number; value: number; variance: number }[] = [];
  for (const pair of pairs) {
    const one = surface && factorOf(declared.mean, pair, surface);
    if (one) found.push({ entry: pair.entry, ...one });
    else doubted.push(pair.entry);
  }
  let { mean, sd } = declared;
  let used = 0;
  const middle = median(found.map((f) => f.value));
  let precision = 1 / sd ** 2;
  let weighted = mean / sd ** 2;
  for (const f of found) {
    if (found.length > 2 && (f.value - middle) ** 2 > 16 * (f.variance + (0.01 * middle) ** 2)) {
      doubted.push(f.entry);
      continue;
    }
    precision += 1 / f.variance;
    weighted += f.value / f.variance;
    used++;
  }
  mean = weighted / precision;
  sd = Math.sqrt(1 / precision + (used > 0 ? (facetFloor * mean) ** 2 : 0));
  return { mean, sd: Math.min(sd, declared.sd), runs: used, doubted };
}

/** A run with film on a witness and a minimum on a cell. */
interface Pair {
  entry: number;
  index: number;
  thicknessNm: number;
  gauge: readonly [number, number, number];
  minimumNm: number;
  sd: number;
}

function pairsIn(logs: readonly ChamberLog[]): Pair[] {
  const out: Pair[] = [];
  for (const log of logs)
    for (const event of log.events) {
      if (event.kind !== "run" || event.film?.index == null || event.film.thicknessNm == null) continue;
      const { index, thicknessNm, gauge } = event.film;
      for (const reading of event.light)
        if (reading.kind === "reflectance_minimum_nm")
          out.push({ entry: event.entry, index, thicknessNm, gauge, minimumNm: reading.value, sd: reading.sd });
    }
  return out;
}

/** The minimum and its slopes near one film, from nine exact values: a quadratic each way. */
interface LocalMinimum {
  at(index: number, facetNm: number): { value: number; perIndex: number; perNm: number } | null;
}

const indexStep = 0.04;
const facetStepNm = 8;

function localMinimum(minimumOf: MinimumOf, index0: number, facet0: number): LocalMinimum | null {
  const values: number[][] = [];
  for (const i of [-1, 0, 1]) {
    const row = [-1, 0, 1].map((j) => minimumOf(index0 + i * indexStep, facet0 + j * facetStepNm));
    if (row.some((v) => v === null)) return null;
    values.push(row as number[]);
  }
  // Weights of the three nodes at -1, 0, 1 for value and slope.
  const quadratic = (u: number) => [(u * (u - 1)) / 2, 1 - u * u, (u * (u + 1)) / 2];
  const slope = (u: number) => [u - 0.5, -2 * u, u + 0.5];
  const sum = (a: number[], b: number[]) =>
    a.reduce((s, wa, i) => s + b.reduce((t, wb, j) => t + wa * wb * values[i][j], 0), 0);
  return {
    at(index, facetNm) {
      const u = (index - index0) / indexStep;
      const v = (facetNm - facet0) / facetStepNm;
      // Two steps out the quadratic is still within about 0.5 nm of the exact curve; further it is nobody's business.
      if (Math.abs(u) > 2.5 || Math.abs(v) > 2.5) return null;
      return {
        value: sum(quadratic(u), quadratic(v)),
        perIndex: sum(slope(u), quadratic(v)) / indexStep,
        perNm: sum(quadratic(u), slope(v)) / facetStepNm,
      };
    },
  };
}

/** The factor at which the film read would have the minimum read, by Newton's method, and its variance. */
function factorOf(start: number, pair: Pair, surface: LocalMinimum): { value: number; variance: number } | null {
  let value = start;
  for (let round = 0; round < 12; round++) {
    const here = surface.at(pair.index, value * pair.thicknessNm);
    if (!here || !(here.perNm > 0)) return null;
    const miss = here.value - pair.minimumNm;
    if (Math.abs(miss) > 0.01) {
      value -= miss / (here.perNm * pair.thicknessNm);
      continue;
    }
    const [vn, cov, vd] = pair.gauge;
    const bySlope = here.perNm * value;
    const film = here.perIndex ** 2 * vn + 2 * here.perIndex * bySlope * cov + bySlope ** 2 * vd;
    return { value, variance: (pair.sd ** 2 + film) / (here.perNm * pair.thicknessNm) ** 2 };
  }
  return null;
}

function median(values: number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted.length === 0 ? Number.NaN : sorted[Math.floor(sorted.length / 2)];
}
