/**
 * How likely a reading was before it was taken, under the same three hypotheses the filter goes by: ordinary, bad
 * measurement, unlogged step. Written for weighing a reading as it stands against what somebody may have meant.
 */
import { logSumExp } from "../../engine/index.ts";
import { type Node, stepVariance } from "../chamber-filter.ts";
import type { ChamberModel } from "../chamber-model.ts";
import { nodeWeights } from "../nodes.ts";
import type { PreparedRun } from "../prepare.ts";
import { hypothesisWeights } from "../priors.ts";

/** (index, ln thickness), NaN where not read, and their gauge covariance [var, cov, var]. */
export interface Reading {
  index: number;
  lnThickness: number;
  gauge: readonly [number, number, number];
}

/** The film expected of a run before it was read, one part a node; covariance with process scatter, without gauge. */
export type LawBefore = readonly {
  logWeight: number;
  index: number;
  lnThickness: number;
  covariance: readonly [number, number, number];
  node: Node;
}[];

/** The law before the measured run at place i, nodes weighted as they stood then. */
export function lawBefore(model: ChamberModel, i: number): LawBefore {
  const weights = nodeWeights(model.passes.map((p) => p.logBefore + p.forecasts.logBefore[i]));
  return model.passes.flatMap(({ forecasts, node }, at) =>
    weights[at] < 1e-9
      ? []
      : [
          {
            logWeight: Math.log(weights[at]),
            index: forecasts.index[i],
            lnThickness: forecasts.lnThickness[i],
            covariance: forecasts.covariance[i],
            node,
          },
        ],
  );
}

/** Mean film of a law. */
export function meanOf(law: LawBefore): { index: number; lnThickness: number } {
  let index = 0;
  let lnThickness = 0;
  for (const part of law) {
    index += Math.exp(part.logWeight) * part.index;
    lnThickness += Math.exp(part.logWeight) * part.lnThickness;
  }
  return { index, lnThickness };
}

/**
 * A run's reading, its gauge's variance on the log scale taken at the expected thickness: at the thickness read, a slip to
 * 0.09 nm would be excused by a gauge that then knows nothing.
 */
export function readingOf({ yIndex, yRate, known, gauge }: PreparedRun, law: LawBefore): Reading {
  const lnThickness = yRate + known;
  const scale = Number.isNaN(lnThickness) ? 1 : Math.exp(lnThickness - meanOf(law).lnThickness);
  return { index: yIndex, lnThickness, gauge: [gauge[0], gauge[1] * scale, gauge[2] * scale ** 2] };
}

/** Log density of a reading as an ordinary one, with variances added to (index, ln thickness); its share of ordinary included. */
export function ordinaryLog(law: LawBefore, reading: Reading, extra: readonly [number, number] = [0, 0]): number {
  return Math.log(hypothesisWeights[0]) + over(law, reading, () => extra, normalLog);
}

/** Log density of a reading as it stands: ordinary, bad or after an unlogged step. */
export function asItStandsLog(law: LawBefore, reading: Reading): number {
  const bad = ({ scatter }: Node): [number, number] => [scatter.badMeasurement[0] ** 2, scatter.badMeasurement[1] ** 2];
  return logSumExp([
    ordinaryLog(law, reading),
    Math.log(hypothesisWeights[1]) + over(law, reading, bad, tailedLog),
    Math.log(hypothesisWeights[2]) + over(law, reading, stepVariance, normalLog),
  ]);
}

type LogDensity = (outputs: number, logDet: number, q: number) => number;

function over(
  law: LawBefore,
  { index, lnThickness, gauge }: Reading,
  extra: (node: Node) => readonly [number, number],
  density: LogDensity,
): number {
  return logSumExp(
    law.map((part) => {
      const [more0, more1] = extra(part.node);
      const a = part.covariance[0] + gauge[0] + more0;
      const b = part.covariance[2] + gauge[2] + more1;
      const e0 = index - part.index;
      const e1 = lnThickness - part.lnThickness;
      if (Number.isNaN(e0) || Number.isNaN(e1)) {
        const [e, v] = Number.isNaN(e0) ? [e1, b] : [e0, a];
        return part.logWeight + (Number.isNaN(e) ? 0 : density(1, Math.log(v), (e * e) / v));
      }
      const c = part.covariance[1] + gauge[1];
      const det = a * b - c * c;
      return part.logWeight + density(2, Math.log(det), (e0 * e0 * b - 2 * e0 * e1 * c + e1 * e1 * a) / det);
    }),
  );
}

const normalLog: LogDensity = (m, logDet, q) => -0.5 * (m * Math.log(2 * Math.PI) + logDet + q);

/** Student's t with 4 degrees of freedom, as the filter has it (hypotheses.ts): Gamma(5/2)/Gamma(2) and Gamma(3)/Gamma(2). */
const tailedLog: LogDensity = (m, logDet, q) =>
  (m === 1 ? Math.log(1.329340388179137 / Math.sqrt(4 * Math.PI)) : Math.log(2 / (4 * Math.PI))) -
  0.5 * logDet -
  0.5 * (4 + m) * Math.log1p(q / 4);
