/**
 * A fault is not an offset. Cleans move a chamber's index by under 0.01; an air leak, a wet boat or starved ammonia moves
 * it by 0.05 to 0.1 at once and leaves the rate alone. This file weighs the two: the readings since a possible onset under
 * the ordinary model (bad measurements and unlogged steps included) against the same model with a shift of that kind, as a
 * likelihood ratio with prior odds. One odd reading is usually a bad measurement; the second one decides.
 */
import { runEvents } from "./chamber-filter.ts";
import type { ChamberModel } from "./chamber-model.ts";
import { faultShift } from "./priors.ts";
import { addNoise, copyState, type State } from "./square-root.ts";

export interface Suspicion {
  /** "index_low" or "index_high". */
  name: "index_low" | "index_high";
  /** Posterior probability that such a fault is present. */
  probability: number;
  /** Entry of the likeliest onset (a clean, a service, or the run itself). */
  onsetEntry: number;
  onsetKind: "clean" | "service" | "run";
  /** Measured runs since the onset. */
  runsSince: number;
  /** Mean of (read - ordinarily expected) index since the onset. */
  indexMiss: number;
}

interface Onset {
  at: number;
  kind: "clean" | "service" | "run";
  prior: number;
}

/** How many of the last runs are tried as an onset in mid-cycle, and how old an onset may be, in measured runs. */
const lateOnsets = 4;
const longestMemory = 15;

/** Suspicions of both kinds at the end of the history, likelier first. Empty without readings. */
export function suspicions(model: ChamberModel): Suspicion[] {
  const { log, layout } = model;
  const onsets = candidates(model);
  if (onsets.length === 0) return [];
  const pass = leaderBefore(model, onsets[0].at);
  // One pass up to the earliest onset, then a snapshot before each.
  const state = copyState(pass.start);
  const light = model.context.light;
  let done = 0;
  const results: { name: Suspicion["name"]; onset: Onset; logOdds: number }[] = [];
  for (const onset of onsets) {
    runEvents(state, layout, log, pass.node, { from: done, to: onset.at, light });
    done = onset.at;
    const first = onset.kind === "run" ? onset.at : onset.at + 1;
    const entered = copyState(state);
    if (onset.kind !== "run") runEvents(entered, layout, log, pass.node, { from: onset.at, to: first, light });
    const ordinary = runEvents(copyState(entered), layout, log, pass.node, { from: first, light });
    for (const [name, sign] of [
      ["index_low", -1],
      ["index_high", 1],
    ] as const) {
      const shifted = copyState(entered);
      shift(shifted, sign * faultShift.index);
      const fault = runEvents(shifted, layout, log, pass.node, { from: first, light });
      results.push({ name, onset, logOdds: fault - ordinary + Math.log(onset.prior / (1 - onset.prior)) });
    }
  }
  const top = Math.max(0, ...results.map((r) => r.logOdds));
  const total = Math.exp(-top) + results.reduce((sum, r) => sum + Math.exp(r.logOdds - top), 0);
  return (["index_low", "index_high"] as const)
    .map((name): Suspicion => {
      const mine = results.filter((r) => r.name === name);
      const probability = mine.reduce((sum, r) => sum + Math.exp(r.logOdds - top), 0) / total;
      const best = mine.reduce((a, b) => (b.logOdds > a.logOdds ? b : a));
      const event = log.events[best.onset.at];
      return {
        name,
        probability,
        onsetEntry: event.entry,
        onsetKind: best.onset.kind,
        ...missSince(model, best.onset.at),
      };
    })
    .sort((a, b) => b.probability - a.probability);
}

/**
 * The node that led before the first possible onset, though it may have been dropped since: judged with the readings in
 * question, a fault makes large ordinary steps look likely and so excuses itself.
 */
function leaderBefore(model: ChamberModel, at: number): ChamberModel["context"]["entrants"][number] {
  const entries = new Set(model.log.events.slice(at).map((e) => e.entry));
  const first = model.runs.findIndex((run) => entries.has(run.entry));
  const score = (e: ChamberModel["context"]["entrants"][number]) =>
    e.logBefore + (e.forecasts.logBefore[first] ?? Number.NEGATIVE_INFINITY);
  return model.context.entrants.reduce((best, e) => (score(e) > score(best) ? e : best));
}

function shift(state: State, by: number): void {
  state.mean[state.n - 2] += by;
  addNoise(state, state.n - 2, faultShift.sd);
}

/** The last clean or service, and each of the last measured runs after it, in order of time. */
function candidates(model: ChamberModel): Onset[] {
  const events = model.log.events;
  const out: Onset[] = [];
  let runs = 0;
  for (let at = events.length - 1; at >= 0 && runs <= longestMemory; at--) {
    const event = events[at];
    if (event.kind === "run") {
      runs++;
      if (runs <= lateOnsets) out.push({ at, kind: "run", prior: faultShift.perRun });
    } else if (event.kind === "clean" || event.kind === "service") {
      if (runs > 0) out.push({ at, kind: event.kind, prior: faultShift.perEvent });
      break;
    }
  }
  return out.reverse();
}

function missSince(model: ChamberModel, at: number): { runsSince: number; indexMiss: number } {
  const since = new Set(
    model.log.events
      .slice(at)
      .filter((e) => e.kind === "run")
      .map((e) => e.entry),
  );
  const { forecasts } = model.passes[model.weights.indexOf(Math.max(...model.weights))];
  // Against what was expected before the onset: the first forecast after it, not the ones that have already followed.
  let sum = 0;
  let count = 0;
  let first: number | null = null;
  forecasts.runs.forEach((run, i) => {
    if (!since.has(run.entry) || !Number.isFinite(run.yIndex)) return;
    first ??= forecasts.index[i];
    sum += run.yIndex - first;
    count++;
  });
  return { runsSince: since.size, indexMiss: count ? sum / count : 0 };
}
