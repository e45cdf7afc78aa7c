/**
 * Where in a chamber's history a fault may have begun, and by which node it is judged: what the alarms share. A fault is
 * weighed against ordinary behaviour from a possible onset on, so both must start from the same state before it.
 */
import type { ChamberModel } from "../chamber-model.ts";
import type { PreparedEvent } from "../prepare.ts";

export type Entrant = ChamberModel["context"]["entrants"][number];

export interface Onset {
  /** Position in the log's events. */
  at: number;
  kind: "clean" | "service" | "run";
}

/** How many of the last runs are tried as an onset in mid-cycle, and how old an onset may be, in measured runs. */
const lateOnsets = 4;
const longestMemory = 15;
/** Older runs are tried where the reading was less likely ordinary than this; so many of them, the latest. */
const surprised = 0.5;
const olderOnsets = 3;

/**
 * Possible onsets in order of time: the last clean or service, each of the last measured runs since, and older ones whose
 * reading surprised the model, so that a fault named once stays named while it lasts.
 */
export function onsetsOf(model: ChamberModel): Onset[] {
  const { events } = model.log;
  const { forecasts } = leadingPass(model);
  const out: Onset[] = [];
  let runs = 0;
  let older = 0;
  for (let at = events.length - 1; at >= 0 && runs <= longestMemory; at--) {
    const { kind } = events[at];
    if (kind === "run") {
      runs++;
      const odd = forecasts.weights[forecasts.weights.length - runs]?.[0] < surprised;
      if (runs > lateOnsets && odd) older++;
      if (runs <= lateOnsets || (odd && older <= olderOnsets)) out.push({ at, kind });
    } else if (kind === "clean" || kind === "service") {
      if (runs > 0) out.push({ at, kind });
      break;
    }
  }
  return out.reverse();
}

/** The pass that the readings speak for most. */
export function leadingPass(model: ChamberModel): ChamberModel["passes"][number] {
  return model.passes[model.weights.indexOf(Math.max(...model.weights))];
}

/**
 * The node that led before the event at `at`, though it may have been dropped since: judged with the readings in question,
 * a fault makes large ordinary steps look likely and so excuses itself.
 */
export function leaderBefore(model: ChamberModel, at: number): Entrant {
  const runsBefore = countRuns(model.log.events, 0, at);
  const score = (e: Entrant) => e.logBefore + (e.forecasts.logBefore[runsBefore] ?? Number.NEGATIVE_INFINITY);
  return model.context.entrants.reduce((best, e) => (score(e) > score(best) ? e : best));
}

/** Measured runs among events [from, to). */
export function countRuns(events: readonly PreparedEvent[], from: number, to = events.length): number {
  let count = 0;
  for (let at = from; at < to; at++) if (events[at].kind === "run") count++;
  return count;
}
