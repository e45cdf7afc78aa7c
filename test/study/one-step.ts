/**
 * What was predicted of each run before it was read. The honest way is one model a prefix of the book (`beforeRun`). The
 * quick way (`oneStepAhead`) takes the forecasts that one pass over the whole book wrote down before each run, weighs the
 * nodes as they stood at that moment, dropped since or not (the survivors alone would be a choice made with later
 * readings), and gives the same answer to rounding and the nodes' 1e-5; `test/study` and every study hold it to that.
 */

import { stepVariance } from "../../calibration/chamber-filter.ts";
import type { ChamberModel, FilmLaw, GaugeCovariance } from "../../calibration/index.ts";
import { filmMoments } from "../../calibration/index.ts";
import { nodeWeights } from "../../calibration/nodes.ts";
import { hypothesisWeights, scatter } from "../../calibration/priors.ts";
import { mixtureCdf } from "../../engine/index.ts";
import type { StudiedLine, StudiedRun } from "./studied-line.ts";

/** A law over the reading of one run, and where the reading fell. */
export interface Prediction {
  run: StudiedRun;
  /** Mean index, and the thickness of the mean ln thickness, nm. */
  index: number;
  thicknessNm: number;
  /** Share of the law below what was read, 0 to 1; null where not read. */
  rankIndex: number | null;
  rankThickness: number | null;
  /** (read - mean) / sd of an ordinary reading; thickness on the scale of logarithms. Null where not read. */
  surpriseIndex: number | null;
  surpriseThickness: number | null;
}

/** Is it inside the middle 95 %? */
export const covered = (rank: number) => rank > 0.025 && rank < 0.975;

function rankIn(law: FilmLaw, which: 0 | 1, y: number): number {
  return mixtureCdf(y, {
    weights: law.parts.map((p) => p.weight),
    means: law.parts.map((p) => (which === 0 ? p.index : p.lnThickness)),
    sds: law.parts.map((p) => Math.sqrt(p.covariance[which === 0 ? 0 : 2])),
  });
}

/** `law` is over the reading with bad measurements and unwritten steps in, `ordinary` the same without. */
function judged(run: StudiedRun, law: FilmLaw, ordinary: FilmLaw): Prediction {
  const { index, thicknessNm } = run.reading;
  const ln = thicknessNm === null ? null : Math.log(thicknessNm);
  const m = filmMoments(ordinary);
  return {
    run,
    index: m.index,
    thicknessNm: Math.exp(m.lnThickness),
    rankIndex: index === null ? null : rankIn(law, 0, index),
    rankThickness: ln === null ? null : rankIn(law, 1, ln),
    surpriseIndex: index === null ? null : (index - m.index) / Math.sqrt(m.covariance[0]),
    surpriseThickness: ln === null ? null : (ln - m.lnThickness) / Math.sqrt(m.covariance[2]),
  };
}

/** Every third part of a measured law, from the first, is an ordinary reading: taken alone they are the ordinary law. */
function ordinaryOf(law: FilmLaw): FilmLaw {
  const parts = law.parts.filter((_, i) => i % hypothesisWeights.length === 0);
  const total = parts.reduce((sum, p) => sum + p.weight, 0);
  return { parts: parts.map((p) => ({ ...p, weight: p.weight / total })) };
}

/** The prediction of one run by the model of the book as it stood before it. */
export function beforeRun(line: StudiedLine, run: StudiedRun): Prediction {
  const law = line.model(run.prefix).measuredLaw(run.settings, line.world.gauge);
  return judged(run, law, ordinaryOf(law));
}

/** The predictions of all measured runs from one model of the whole book. */
export function oneStepAhead(line: StudiedLine, model: ChamberModel = line.model()): Prediction[] {
  return line.runs.map((run) => {
    const law = lawBefore(model, run.entry, line.world.gauge);
    return judged(run, law, ordinaryOf(law));
  });
}

/** The measured law of a run as the pass over the whole book foresaw it. */
function lawBefore(model: ChamberModel, entry: number, gauge: GaugeCovariance): FilmLaw {
  const { entrants } = model.context;
  const at = model.runs.findIndex((run) => run.entry === entry);
  if (at < 0) throw new Error(`the model has no measured run ${entry}`);
  // A node that was dropped has no forecast from there on.
  const there = entrants.filter((e) => at < e.forecasts.runs.length);
  const weights = nodeWeights(there.map((e) => e.logBefore + e.forecasts.logBefore[at]));
  const [ordinary, bad, unlogged] = hypothesisWeights;
  const parts = there.flatMap((entrant, i): FilmLaw["parts"] => {
    const weight = weights[i];
    const index = entrant.forecasts.index[at];
    const lnThickness = entrant.forecasts.lnThickness[at];
    const d = Math.exp(lnThickness);
    const [a, c, b] = entrant.forecasts.covariance[at];
    const [vn, vl] = [a + gauge[0], b + gauge[2] / (d * d)];
    const cov = c + gauge[1] / d;
    const [stepN, stepL] = stepVariance(entrant.node);
    const [badN, badL] = scatter.badMeasurement;
    return [
      { weight: weight * ordinary, index, lnThickness, covariance: [vn, cov, vl] },
      { weight: weight * bad, index, lnThickness, covariance: [vn + badN ** 2, cov, vl + badL ** 2] },
      { weight: weight * unlogged, index, lnThickness, covariance: [vn + stepN, cov, vl + stepL] },
    ];
  });
  return { parts };
}

/**
 * How far the two ways lie apart on some of the line's runs: the largest difference of a rank, and of a mean in units of
 * the gauge's sd.
 */
export function waysApart(line: StudiedLine, runs: readonly StudiedRun[]): number {
  const quick = new Map(oneStepAhead(line).map((p) => [p.run.entry, p]));
  const [vn, , vd] = line.world.gauge;
  let apart = 0;
  for (const run of runs) {
    const honest = beforeRun(line, run);
    const other = quick.get(run.entry);
    if (!other) throw new Error(`no prediction of run ${run.entry}`);
    apart = Math.max(
      apart,
      Math.abs((honest.rankIndex ?? 0) - (other.rankIndex ?? 0)),
      Math.abs((honest.rankThickness ?? 0) - (other.rankThickness ?? 0)),
      Math.abs(honest.index - other.index) / Math.sqrt(vn),
      Math.abs(honest.thicknessNm - other.thicknessNm) / Math.sqrt(vd),
    );
  }
  return apart;
}
