/**
 * Every chamber measured lately moved the same way at the same time: then a gauge or a gas supply moved, not the chambers.
 * The readings of all chambers since a common moment are weighed three ways: as usual; each chamber with a shift of its
 * own; all with one shift of (index, ln thickness). The shift stands as two states before the chamber's own, so that a
 * clean does not take it away, and what one chamber says of it is handed on to the next: the density of all readings
 * under one shift comes out with the shift summed over, nothing is fitted.
 */
import { logSumExp } from "../../engine/index.ts";
import { type Node, processVariance, runEvents, stepVariance, walk } from "../chamber-filter.ts";
import type { ChamberModel } from "../chamber-model.ts";
import { type Observation, observe } from "../hypotheses.ts";
import type { LineModel } from "../line-model.ts";
import { commonShift } from "../priors.ts";
import { addNoise, copyState, covariance, diagonalState, resetLast, type State } from "../square-root.ts";
import { leaderBefore } from "./onsets.ts";

export interface CommonMove {
  name: "all_moved";
  probability: number;
  /** First entry read after the move, and the chambers read since with their measured runs. */
  onsetEntry: number;
  chambers: { chamber: string; runs: number }[];
  /** The shift they share. */
  index: { mean: number; sd: number };
  lnThickness: { mean: number; sd: number };
}

/** A law of the shift: a state of two. */
type Shift = State;

/** So many of the line's last measured runs are tried as the first after the move. */
const lateRuns = 12;
/** Where the asked chamber's own readings speak for a move by less than this (nats), the others are not asked. */
const ownVoice = 0.5;

/** A chamber's last measured runs with the state before each, at the node that led before the first of them. */
interface Tail {
  model: ChamberModel;
  node: Node;
  runs: { entry: number; at: number; before: State }[];
}

/**
 * The move shared by `chamber` and the others measured since, as likely as it is; null where this chamber alone was
 * measured lately or shows no move. `order` gives the moment of an entry (default: its number). Refuses `unknown-chamber`.
 */
export function allMoved(
  line: LineModel,
  chamber: string,
  order: (entry: number) => number = (entry) => entry,
): CommonMove | null {
  const asked = tailOf(line.chamber(chamber));
  // The other chambers' models cost time, so this one is asked first whether it shows a move at all.
  if (!asked.runs.some((run) => ownVoiceOf(asked, run) > ownVoice)) return null;
  const tails = line.logs.map(({ chamber: name }) => (name === chamber ? asked : tailOf(line.chamber(name))));
  const moments = tails
    .flatMap((tail) => tail.runs.map((run) => ({ entry: run.entry, when: order(run.entry) })))
    .sort((a, b) => a.when - b.when || a.entry - b.entry)
    .slice(-lateRuns);
  const found: { move: Omit<CommonMove, "probability">; logOdds: number }[] = [];
  for (const { entry, when } of moments) {
    const since = tails
      .map((tail) => ({ tail, runs: tail.runs.filter((run) => order(run.entry) >= when) }))
      .filter(({ runs }) => runs.length > 0);
    if (since.length < 2 || !since.some(({ tail }) => tail === asked)) continue;
    const { logOdds, shift } = weighMove(since.map(({ tail, runs }) => ({ tail, first: runs[0] })));
    const spread = covariance(shift);
    const part = (i: 0 | 1) => ({ mean: shift.mean[i], sd: Math.sqrt(spread[3 * i]) });
    const chambers = since.map(({ tail, runs }) => ({ chamber: tail.model.chamber, runs: runs.length }));
    found.push({
      move: { name: "all_moved", onsetEntry: entry, chambers, index: part(0), lnThickness: part(1) },
      logOdds,
    });
  }
  if (found.length === 0) return null;
  const total = logSumExp([0, ...found.map((f) => f.logOdds)]);
  const best = found.reduce((a, b) => (b.logOdds > a.logOdds ? b : a));
  return { ...best.move, probability: Math.exp(logSumExp(found.map((f) => f.logOdds)) - total) };
}

function tailOf(model: ChamberModel): Tail {
  const { log, layout } = model;
  const { light } = model.context;
  const places = log.events.flatMap((e, at) => (e.kind === "run" ? [at] : [])).slice(-lateRuns);
  const { node, start } = leaderBefore(model, places[0] ?? log.events.length);
  const state = copyState(start);
  let done = 0;
  const runs = places.map((at) => {
    runEvents(state, layout, log, node, { from: done, to: at, light });
    done = at;
    return { entry: log.events[at].entry, at, before: copyState(state) };
  });
  return { model, node, runs };
}

const freshShift = (): Shift => diagonalState([0, 0], commonShift.sd);

/** What the chamber's readings since a run say for a move of its own, in nats. */
function ownVoiceOf(tail: Tail, first: Tail["runs"][number]): number {
  return replay(tail, first, freshShift()).logDensity - replay(tail, first, null).logDensity;
}

function weighMove(since: readonly { tail: Tail; first: Tail["runs"][number] }[]): { logOdds: number; shift: Shift } {
  let shift = freshShift();
  let shared = 0;
  let separate = 0;
  const { own, perRun } = commonShift;
  for (const { tail, first } of since) {
    const handedOn = replay(tail, first, shift);
    shared += handedOn.logDensity;
    shift = firstTwo(handedOn.state);
    const alone = replay(tail, first, freshShift()).logDensity;
    separate += logSumExp([Math.log(1 - own) + replay(tail, first, null).logDensity, Math.log(own) + alone]);
  }
  return { logOdds: shared - separate + Math.log(perRun / (1 - perRun)), shift };
}

/**
 * A chamber's film readings from a run on, as usual (`shift` null) or with a shift of this law in two states before its own.
 * Runs with light alone say too little of so small a move and are passed over.
 */
function replay(tail: Tail, first: Tail["runs"][number], shift: Shift | null): { state: State; logDensity: number } {
  const { model, node } = tail;
  const { scatter } = node;
  const own = shift ? 2 : 0;
  const state = shift ? joined(shift, first.before) : copyState(first.before);
  let logDensity = 0;
  for (const event of model.log.events.slice(first.at)) {
    if (event.kind === "clean") resetLast(state, freshStep(node));
    else if (event.kind === "service") {
      addNoise(state, own, scatter.service[0]);
      addNoise(state, own + model.layout.indexTerms, scatter.service[1]);
    } else walk(state, node, event.count);
    if (event.kind !== "run" || !event.seen) continue;
    const seen = shift ? shifted(event.seen) : event.seen;
    logDensity += observe(state, seen, stepVariance(node), processVariance(node), scatter.badMeasurement).logDensity;
  }
  return { state, logDensity };
}

const freshStep = ({ scatter, step }: Node) => scatter.step.map((sd) => ({ mean: 0, sd: sd * step }));

/** The shift's two states before the chamber's, independent of them. */
function joined(shift: Shift, state: State): State {
  const n = state.n + 2;
  const out = diagonalState(new Float64Array(n), new Float64Array(n));
  out.mean.set(shift.mean);
  out.mean.set(state.mean, 2);
  for (let i = 0; i < 2; i++) for (let j = 0; j <= i; j++) out.factor[i * n + j] = shift.factor[i * 2 + j];
  for (let i = 0; i < state.n; i++)
    for (let j = 0; j <= i; j++) out.factor[(i + 2) * n + j + 2] = state.factor[i * state.n + j];
  return out;
}

/** The marginal of the first two states: the upper corner of a lower factor is their own. */
function firstTwo({ n, mean, factor }: State): Shift {
  return { n: 2, mean: mean.slice(0, 2), factor: Float64Array.of(factor[0], 0, factor[n], factor[n + 1]) };
}

/** The rows of a reading with the shift's own before them. */
function shifted(seen: Observation): Observation {
  const rows = seen.rows.map((row, i) => {
    const out = new Float64Array(row.length + 2);
    out[seen.outputs[i]] = 1;
    out.set(row, 2);
    return out;
  });
  return { ...seen, rows };
}
