/**
 * The hyper-parameter nodes: how large the scatters really are is not known, so the filter runs at a fixed grid of
 * multipliers and the answers are averaged by how well each node predicted the readings (multiple-model estimation after
 * Magill 1965, from memory; integrating over a small design of hyper-parameters: Rue, Martino and Chopin 2009).
 */
import { weightsFromLogs } from "../engine/index.ts";
import type { Node } from "./chamber-filter.ts";
import { hyperGrid, type Scatter, scatter as standard } from "./priors.ts";

export function hyperNodes(scatter: Scatter = standard): { node: Node; logPrior: number }[] {
  const { process, balance, step, spread, logSd } = hyperGrid;
  const logPrior = (value: number, sd: number) => -0.5 * (Math.log(value) / sd) ** 2;
  return process.flatMap((p) =>
    balance.flatMap((b) =>
      step.flatMap((s) =>
        spread.map((c) => ({
          node: { process: p, balance: b, step: s, spread: c, scatter },
          logPrior:
            logPrior(p, logSd.process) +
            logPrior(b, logSd.balance) +
            logPrior(s, logSd.step) +
            logPrior(c, logSd.spread),
        })),
      ),
    ),
  );
}

/** Normalised weights from log evidences. */
export function nodeWeights(logs: readonly number[]): number[] {
  return Array.from(weightsFromLogs(Float64Array.from(logs)));
}
