/**
 * A chamber looked at ahead of its next readings: the belief about its coefficients as one Gaussian, for planning which
 * runs would teach most, and the course its film takes as depositions go by, for saying how long it stays in goal. Role: the
 * only doors of this room to the covariance itself; nothing is learned here.
 */
import { cholesky } from "../engine/index.ts";
import { walk as age, type Node, processVariance } from "./chamber-filter.ts";
import type { ChamberModel } from "./chamber-model.ts";
import type { Term } from "./film-response.ts";
import { rows } from "./prepare.ts";
import type { Settings } from "./run.ts";
import { covariance, diagonalState } from "./square-root.ts";

/**
 * Coefficients, the two steps and, after them, the coefficients that no run ever moved, as one Gaussian: the mixture of
 * nodes by its mean and covariance, before the next deposition. `covariance` is dense n x n.
 */
export interface Belief {
  n: number;
  mean: Float64Array;
  covariance: Float64Array;
  /** Variances of (index, ln thickness): scatter from run to run, and what each deposition adds to the steps. */
  process: readonly [number, number];
  walk: readonly [number, number];
  /** Places of the two steps (index, ln rate). */
  steps: readonly [number, number];
  /** Depositions since the clean before the next one. */
  k: number;
}

/** What a deposition's film says about a belief: mean film = rows times mean, plus `known` for ln thickness. */
export interface BeliefRows {
  index: Float64Array;
  lnThickness: Float64Array;
  known: number;
}

/** Standard deviations that one deposition adds to the two steps: the filter's own ageing, asked of a state without any. */
function walkOf(node: Node): [number, number] {
  const state = diagonalState([0, 0], [0, 0]);
  age(state, node, 1);
  return [state.factor[0], state.factor[3]];
}

/** The belief about a chamber after its whole history. */
export function beliefOf(model: ChamberModel): Belief {
  const { layout, passes, weights } = model;
  const own = layout.n;
  const n = own + layout.idle.length;
  const mean = new Float64Array(n);
  const process: [number, number] = [0, 0];
  const walk: [number, number] = [0, 0];
  passes.forEach(({ node, state }, i) => {
    const w = weights[i];
    for (let j = 0; j < own; j++) mean[j] += w * state.mean[j];
    const scatter = processVariance(node);
    const wander = walkOf(node);
    for (const o of [0, 1] as const) {
      process[o] += w * scatter[o];
      walk[o] += w * wander[o] ** 2;
    }
  });
  const out = new Float64Array(n * n);
  passes.forEach(({ state }, i) => {
    const w = weights[i];
    if (w < 1e-9) return;
    const p = covariance(state);
    for (let a = 0; a < own; a++)
      for (let b = 0; b < own; b++)
        out[a * n + b] += w * (p[a * own + b] + (state.mean[a] - mean[a]) * (state.mean[b] - mean[b]));
  });
  layout.idle.forEach(({ prior }, i) => {
    mean[own + i] = prior.mean;
    out[(own + i) * (n + 1)] = prior.sd ** 2 + prior.spread ** 2;
  });
  return { n, mean, covariance: out, process, walk, steps: [own - 2, own - 1], k: model.k };
}

/** Rows of a deposition at these settings, `k` depositions after the clean. Throws as the response: a needed setting is missing. */
export function beliefRows(model: ChamberModel, settings: Settings, k: number): BeliefRows {
  const { layout } = model;
  const { hIndex, hRate } = rows(layout, settings, k);
  const n = layout.n + layout.idle.length;
  const index = new Float64Array(n);
  const lnThickness = new Float64Array(n);
  index.set(hIndex);
  lnThickness.set(hRate);
  layout.idle.forEach((term, i) => {
    (term.output === "index" ? index : lnThickness)[layout.n + i] = term.value(settings, k);
  });
  return { index, lnThickness, known: layout.response.known(settings) };
}

/**
 * The film's level at fixed settings, one node of the mixture: index and ln thickness without the scatter of single runs,
 * as sums of a few jointly normal numbers z (mean and lower factor, `size` x `size`), of which the first of each output
 * counts as it is and the others times what `regressors` says of the deposition asked about; and a walk of its own.
 */
export interface Course {
  weight: number;
  size: number;
  mean: Float64Array;
  factor: Float64Array;
  /** Standard deviation that each deposition adds to (index, ln thickness). */
  walk: readonly [number, number];
}

export interface Courses {
  courses: readonly Course[];
  /**
   * Regressors of the `ahead`-th deposition from now (1 is the next): those of the index's numbers, then those of ln
   * thickness's, each beginning with 1.
   */
  regressors(ahead: number): { index: readonly number[]; lnThickness: readonly number[] };
  /** Known part of ln thickness, already within the mean of its first number. */
  known: number;
}

/** How the film's level at these settings goes on from here with no clean and no change. */
export function coursesOf(model: ChamberModel, settings: Settings): Courses {
  const { layout, k } = model;
  const known = layout.response.known(settings);
  const moves = (term: Term) => term.value(settings, k) !== term.value(settings, k + 1);
  const belief = beliefRows(model, settings, k);
  const n = belief.index.length;
  const terms = [...layout.active, null, null, ...layout.idle];
  const directions: Float64Array[] = [];
  const moving: { index: Term[]; rate: Term[] } = { index: [], rate: [] };
  for (const output of ["index", "rate"] as const) {
    const still = (output === "index" ? belief.index : belief.lnThickness).slice();
    directions.push(still);
    terms.forEach((term, i) => {
      if (term?.output !== output || !moves(term)) return;
      still[i] = 0;
      moving[output].push(term);
      const unit = new Float64Array(n);
      unit[i] = 1;
      directions.push(unit);
    });
  }
  const size = directions.length;
  const first = 1 + moving.index.length;
  const courses = model.passes.flatMap(({ node, state }, at): Course[] => {
    const weight = model.weights[at];
    if (weight < 1e-6) return [];
    const p = covariance(state);
    const own = layout.n;
    const mean = new Float64Array(size);
    const joint = new Float64Array(size * size);
    directions.forEach((a, i) => {
      for (let x = 0; x < own; x++) mean[i] += a[x] * state.mean[x];
      directions.forEach((b, j) => {
        let sum = 0;
        for (let x = 0; x < own; x++) {
          if (a[x] === 0) continue;
          for (let y = 0; y < own; y++) sum += a[x] * b[y] * p[x * own + y];
        }
        layout.idle.forEach(({ prior }, e) => {
          sum += a[own + e] * b[own + e] * (prior.sd ** 2 + (prior.spread * node.spread) ** 2);
        });
        joint[i * size + j] = sum;
      });
      layout.idle.forEach(({ prior }, e) => {
        mean[i] += a[own + e] * prior.mean;
      });
    });
    mean[first] += known;
    return [{ weight, size, mean, factor: cholesky(joint, size), walk: walkOf(node) }];
  });
  return {
    courses,
    known,
    regressors: (ahead) => ({
      index: [1, ...moving.index.map((t) => t.value(settings, k + ahead - 1))],
      lnThickness: [1, ...moving.rate.map((t) => t.value(settings, k + ahead - 1))],
    }),
  };
}
