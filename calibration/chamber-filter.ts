/**
 * One pass of the filter over one chamber's history at one setting of the hyper-parameters. Keeps, for every measured run,
 * what was predicted before it was read, so that coverage, surprises and evidence can be told afterwards.
 */
import { observe } from "./hypotheses.ts";
import type { LightLink } from "./light-link.ts";
import { readLight } from "./light-update.ts";
import type { Layout, PreparedLog, PreparedRun } from "./prepare.ts";
import type { Scatter } from "./priors.ts";
import { addNoise, diagonalState, dot, project, resetLast, type State } from "./square-root.ts";

/** Multipliers of the scatters, one node of the hyper-parameter grid. */
export interface Node {
  process: number;
  /** Of the index process scatter; that of thickness is divided by it. */
  balance: number;
  step: number;
  spread: number;
  /** What they multiply. */
  scatter: Scatter;
}

/** Predictions before each measured run: parallel arrays over `runs`. True film of the run, gauge not included. */
export interface Forecasts {
  runs: PreparedRun[];
  index: number[];
  lnThickness: number[];
  /** Covariance of (index, ln thickness), process included. */
  covariance: [number, number, number][];
  /** Cumulative log density before this run. */
  logBefore: number[];
  /** Posterior weights of (ordinary, bad measurement, unlogged step). */
  weights: [number, number, number][];
}

export interface Pass {
  state: State;
  logDensity: number;
  forecasts: Forecasts;
}

export const stepVariance = (node: Node): [number, number] => [
  (node.scatter.step[0] * node.step) ** 2,
  (node.scatter.step[1] * node.step) ** 2,
];
export const processVariance = (node: Node): [number, number] => [
  (node.scatter.process[0] * node.process * node.balance) ** 2,
  ((node.scatter.process[1] * node.process) / node.balance) ** 2,
];

/** The state a chamber starts with: the given law of its coefficients, and an unknown step. */
export function startState(coefficients: State, node: Node): State {
  const p = coefficients.n;
  const n = p + 2;
  const state = diagonalState(new Float64Array(n), new Float64Array(n));
  for (let i = 0; i < p; i++) {
    state.mean[i] = coefficients.mean[i];
    for (let j = 0; j <= i; j++) state.factor[i * n + j] = coefficients.factor[i * p + j];
  }
  resetLast(state, freshStep(node));
  return state;
}

const freshStep = (node: Node) => node.scatter.step.map((sd) => ({ mean: 0, sd: sd * node.step }));

export function emptyForecasts(): Forecasts {
  return { runs: [], index: [], lnThickness: [], covariance: [], logBefore: [], weights: [] };
}

/**
 * Runs events [from, to) over the state, in place. With `forecasts` given, records what was predicted. Returns the log
 * density of all readings in that stretch.
 */
export function runEvents(
  state: State,
  layout: Layout,
  log: PreparedLog,
  node: Node,
  options: { from?: number; to?: number; forecasts?: Forecasts; light?: LightLink | null; logBefore?: number } = {},
): number {
  const { from = 0, to = log.events.length, forecasts, light = null } = options;
  let total = options.logBefore ?? 0;
  const start = total;
  const context = { node, step: stepVariance(node), process: processVariance(node), forecasts, light };
  for (let at = from; at < to; at++) {
    const event = log.events[at];
    if (event.kind === "clean") resetLast(state, freshStep(node));
    else if (event.kind === "service") newHardware(state, layout, node);
    else {
      walk(state, node, event.count);
      if (event.kind === "run") total += readRun(state, event, context, total);
    }
  }
  return total - start;
}

/** Ages the chamber by some depositions: the offset wanders. */
export function walk(state: State, node: Node, count: number): void {
  // A chamber that steps far at its cleans wanders more in between, but less than in proportion.
  const root = Math.sqrt(count * node.step);
  addNoise(state, state.n - 2, node.scatter.walk[0] * root);
  addNoise(state, state.n - 1, node.scatter.walk[1] * root);
}

/** A service or a controller swap: the chamber's own offset is loosened for good, not only until the next clean. */
function newHardware(state: State, layout: Layout, { scatter }: Node): void {
  addNoise(state, 0, scatter.service[0]);
  addNoise(state, layout.indexTerms, scatter.service[1]);
}

/** What stays the same over a pass. */
interface ReadContext {
  node: Node;
  step: [number, number];
  process: [number, number];
  forecasts: Forecasts | undefined;
  light: LightLink | null;
}

function readRun(state: State, run: PreparedRun, x: ReadContext, total: number): number {
  if (x.forecasts) recordForecast(x.forecasts, state, run, x.process, total);
  if (!run.seen) {
    // Film unread but light read: one number about the film, through the optics.
    const density = x.light ? readLight(state, run, x.light, x.process) : 0;
    x.forecasts?.weights.push([1, 0, 0]);
    return density;
  }
  const { logDensity, weights } = observe(state, run.seen, x.step, x.process, x.node.scatter.badMeasurement);
  x.forecasts?.weights.push([weights[0], weights[1], weights[2]]);
  return logDensity;
}

function recordForecast(
  forecasts: Forecasts,
  state: State,
  run: PreparedRun,
  process: [number, number],
  total: number,
): void {
  const film = filmAt(state, run.hIndex, run.hRate, process);
  forecasts.runs.push(run);
  forecasts.index.push(film.index);
  forecasts.lnThickness.push(film.rate + run.known);
  forecasts.covariance.push(film.covariance);
  forecasts.logBefore.push(total);
}

let work: [Float64Array, Float64Array] = [new Float64Array(0), new Float64Array(0)];

/** Mean and covariance of (index, ln thickness - known part) of a deposition with these rows, process scatter included. */
export function filmAt(
  state: State,
  hIndex: Float64Array,
  hRate: Float64Array,
  process: readonly [number, number],
): { index: number; rate: number; covariance: [number, number, number] } {
  if (work[0].length !== state.n) work = [new Float64Array(state.n), new Float64Array(state.n)];
  const f1 = work[0];
  const f2 = work[1];
  project(state, hIndex, f1);
  project(state, hRate, f2);
  return {
    index: dot(hIndex, state.mean),
    rate: dot(hRate, state.mean),
    covariance: [dot(f1, f1) + process[0], dot(f1, f2), dot(f2, f2) + process[1]],
  };
}
