/**
 * The hyper-parameter nodes: how large the scatters really are is not known, so the filter runs at a fixed grid of
 * multipliers and the answers are averaged by how well each node predicted the readings (multiple-model estimation after
 * Magill 1965, from memory; integrating over a small design of hyper-parameters: Rue, Martino and Chopin 2009).
 */
import { weightsFromLogs } from "../engine/index.ts";
import type { Node } from "./chamber-filter.ts";
import { hyperGrid, type Scatter, scatter as standard } from "./priors.ts";

export function hyperNodes(scatter: Scatter = standard): { node: Node; logPrior: number }[] {
  const out: { node: Node; logPrior: number }[] = [];
  for (const process of hyperGrid.process)
    for (const step of hyperGrid.step)
      for (const spread of hyperGrid.spread) {
        const z = [process, step, spread].map((m, i) => Math.log(m) / hyperGrid.logSd[i]);
        out.push({ node: { process, step, spread, scatter }, logPrior: -0.5 * z.reduce((s, v) => s + v * v, 0) });
      }
  return out;
}

/** Normalised weights from log evidences. */
export function nodeWeights(logs: readonly number[]): number[] {
  return Array.from(weightsFromLogs(Float64Array.from(logs)));
}
