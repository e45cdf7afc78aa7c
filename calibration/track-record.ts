/**
 * How the model's one-step predictions have held for a chamber: before each reading a law over it, afterwards where it
 * fell. Running coverage and the mean squared standardised innovation are what an engineer should ask first.
 */
import { normalCdf } from "../engine/index.ts";
import { stepVariance } from "./chamber-filter.ts";
import type { ChamberModel } from "./chamber-model.ts";
import { nodeWeights } from "./nodes.ts";
import { hypothesisWeights } from "./priors.ts";

/** One measured run beside what was expected of it, in index and thickness nm. */
export interface TrackedRun {
  entry: number;
  k: number;
  index: number | null;
  thicknessNm: number | null;
  /** Expected mean and sd of the reading (gauge included). */
  expectedIndex: { mean: number; sd: number };
  expectedThickness: { mean: number; sd: number };
  /** (read - expected) / sd, null when not read. Thickness on the log scale. */
  surpriseIndex: number | null;
  surpriseThickness: number | null;
  /** Where the reading fell in the predicted law, 0 to 1. */
  rankIndex: number | null;
  rankThickness: number | null;
  /** Posterior probability of a bad measurement and of an unlogged step. */
  suspect: number;
  step: number;
}

/**
 * Replays the forecasts of a model (of the `last` runs, or all), with the node weights as they stood before each run: nodes
 * that later fell hopelessly behind had their say until then.
 */
export function trackRecord(model: ChamberModel, last = Number.POSITIVE_INFINITY): TrackedRun[] {
  const first = Math.max(0, model.runs.length - last);
  return model.runs.slice(first).map((run, at) => {
    const i = first + at;
    const passes = model.context.entrants.filter((entrant) => i < entrant.forecasts.runs.length);
    const weights = nodeWeights(passes.map((p) => p.logBefore + p.forecasts.logBefore[i]));
    const [gn, , gl] = run.gauge;
    const output = (which: 0 | 1, gauge: number, y: number) => {
      let mean = 0;
      let second = 0;
      let rank = 0;
      passes.forEach((pass, node) => {
        const w = weights[node];
        if (w < 1e-9) return;
        const m = which === 0 ? pass.forecasts.index[i] : pass.forecasts.lnThickness[i];
        const v = pass.forecasts.covariance[i][which === 0 ? 0 : 2] + gauge;
        mean += w * m;
        second += w * (v + m * m);
        if (Number.isFinite(y)) {
          const variances = [v, v + pass.node.scatter.badMeasurement[which] ** 2, v + stepVariance(pass.node)[which]];
          for (let h = 0; h < 3; h++) rank += w * hypothesisWeights[h] * normalCdf((y - m) / Math.sqrt(variances[h]));
        }
      });
      const sd = Math.sqrt(Math.max(second - mean * mean, 1e-18));
      return {
        mean,
        sd,
        surprise: Number.isFinite(y) ? (y - mean) / sd : null,
        rank: Number.isFinite(y) ? rank : null,
      };
    };
    const yLn = run.yRate + run.known;
    const n = output(0, gn, run.yIndex);
    const l = output(1, gl, yLn);
    const after = nodeWeights(passes.map((p) => logWeightAfter(model, p, i)));
    let suspect = 0;
    let step = 0;
    passes.forEach((p, node) => {
      suspect += after[node] * p.forecasts.weights[i][1];
      step += after[node] * p.forecasts.weights[i][2];
    });
    const d = Math.exp(l.mean);
    return {
      entry: run.entry,
      k: run.k,
      index: Number.isFinite(run.yIndex) ? run.yIndex : null,
      thicknessNm: Number.isFinite(yLn) ? Math.exp(yLn) : null,
      expectedIndex: { mean: n.mean, sd: n.sd },
      expectedThickness: { mean: d, sd: d * l.sd },
      surpriseIndex: n.surprise,
      surpriseThickness: l.surprise,
      rankIndex: n.rank,
      rankThickness: l.rank,
      suspect,
      step,
    };
  });
}

export interface Coverage {
  /** Readings counted (index and thickness each count one). */
  readings: number;
  /** Fraction inside the central 95 %. */
  inside: number;
  /** Mean squared standardised innovation of readings not judged bad; about 1 when the model holds. */
  meanSquare: number;
}

/** Coverage of the nominal 95 % one-step interval so far; null with no readings. */
export function coverageOf(record: readonly TrackedRun[]): Coverage | null {
  let readings = 0;
  let inside = 0;
  let square = 0;
  let squares = 0;
  for (const run of record)
    for (const [rank, surprise] of [
      [run.rankIndex, run.surpriseIndex],
      [run.rankThickness, run.surpriseThickness],
    ] as const) {
      if (rank === null || surprise === null) continue;
      readings++;
      if (rank > 0.025 && rank < 0.975) inside++;
      if (run.suspect < 0.5) {
        square += surprise * surprise;
        squares++;
      }
    }
  return readings === 0
    ? null
    : { readings, inside: inside / readings, meanSquare: squares ? square / squares : Number.NaN };
}

/** Log weight of a node after its run `i`; minus infinity for one dropped right there. */
function logWeightAfter(model: ChamberModel, entrant: ChamberModel["context"]["entrants"][number], i: number): number {
  const next = entrant.forecasts.logBefore[i + 1];
  if (next !== undefined) return entrant.logBefore + next;
  return model.passes.find((pass) => pass.node === entrant.node)?.logAfter ?? Number.NEGATIVE_INFINITY;
}
