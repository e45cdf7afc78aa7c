/**
 * A fault is not an offset. Cleans move a chamber's index by under 0.01; an air leak, a wet boat or starved ammonia moves
 * it by 0.05 to 0.1 at once and leaves the rate alone. Cleans move the rate by a few per cent; a generator, a pressure
 * gauge or a time base gone wrong moves it by 10 or more and leaves the index alone. This file weighs them: the readings
 * since a possible onset under the ordinary model (bad measurements and unlogged steps included) against the same model
 * with a shift of that kind, as a likelihood ratio with prior odds. One odd reading is usually a bad measurement; the
 * second one decides.
 */
import { logSumExp } from "../engine/index.ts";
import { leaderBefore, type Onset, onsetsOf } from "./alarms/onsets.ts";
import { runEvents } from "./chamber-filter.ts";
import type { ChamberModel } from "./chamber-model.ts";
import type { PreparedRun } from "./prepare.ts";
import { shiftFaults } from "./priors.ts";
import { addNoise, copyState, dot, type State } from "./square-root.ts";

const shifts = [
  { name: "index_low", sign: -1, output: "index" },
  { name: "index_high", sign: 1, output: "index" },
  { name: "rate_low", sign: -1, output: "rate" },
  { name: "rate_high", sign: 1, output: "rate" },
] as const;

export type ShiftName = (typeof shifts)[number]["name"];

export interface Suspicion {
  name: ShiftName;
  /** Posterior probability that such a fault is present. */
  probability: number;
  /** Entry of the likeliest onset (a clean, a service, or the run itself). */
  onsetEntry: number;
  onsetKind: Onset["kind"];
  /** Measured runs since the onset. */
  runsSince: number;
  /** Median of (read - expected before the onset) since then: index, and ln of the rate. 0 where none was read. */
  indexMiss: number;
  rateMiss: number;
}

interface Weighed {
  name: ShiftName;
  onset: Onset;
  /** State just before the first run since the onset. */
  entered: State;
  logOdds: number;
}

/** Suspicions of all kinds at the end of the history, likelier first. Empty without readings. */
export function suspicions(model: ChamberModel): Suspicion[] {
  const weighed = weighAll(model);
  if (weighed.length === 0) return [];
  // None of them (log odds 0) is one of the explanations.
  const total = logSumExp([0, ...weighed.map((w) => w.logOdds)]);
  return shifts
    .map(({ name }): Suspicion => {
      const mine = weighed.filter((w) => w.name === name);
      const best = mine.reduce((a, b) => (b.logOdds > a.logOdds ? b : a));
      return {
        name,
        probability: Math.exp(logSumExp(mine.map((w) => w.logOdds)) - total),
        onsetEntry: model.log.events[best.onset.at].entry,
        onsetKind: best.onset.kind,
        ...missesSince(model, best),
      };
    })
    .sort((a, b) => b.probability - a.probability);
}

function weighAll(model: ChamberModel): Weighed[] {
  const { log, layout } = model;
  const onsets = onsetsOf(model);
  if (onsets.length === 0) return [];
  const pass = leaderBefore(model, onsets[0].at);
  // One pass up to the earliest onset, then a snapshot before each.
  const state = copyState(pass.start);
  const { light } = model.context;
  const run = (over: State, from: number, to?: number) => runEvents(over, layout, log, pass.node, { from, to, light });
  let done = 0;
  const out: Weighed[] = [];
  for (const onset of onsets) {
    run(state, done, onset.at);
    done = onset.at;
    const entered = copyState(state);
    const first = onset.kind === "run" ? onset.at : onset.at + 1;
    run(entered, onset.at, first);
    const ordinary = run(copyState(entered), first);
    for (const { name, sign, output } of shifts) {
      const { sizes, perEvent, perRun } = shiftFaults[output];
      const prior = onset.kind === "run" ? perRun : perEvent;
      const logs = sizes.map(({ by, sd, share }) => {
        const shifted = copyState(entered);
        shift(shifted, output, sign * by, sd);
        return Math.log(share) + run(shifted, first);
      });
      out.push({ name, onset, entered, logOdds: logSumExp(logs) - ordinary + Math.log(prior / (1 - prior)) });
    }
  }
  return out;
}

function shift(state: State, output: "index" | "rate", by: number, sd: number): void {
  const at = state.n - (output === "index" ? 2 : 1);
  state.mean[at] += by;
  addNoise(state, at, sd);
}

function missesSince(
  model: ChamberModel,
  { onset, entered }: Weighed,
): Pick<Suspicion, "runsSince" | "indexMiss" | "rateMiss"> {
  const since = model.log.events.slice(onset.at).filter((e): e is PreparedRun => e.kind === "run");
  const miss = (of: (run: PreparedRun) => number) => median(since.map(of).filter(Number.isFinite));
  return {
    runsSince: since.length,
    indexMiss: miss((r) => r.yIndex - dot(r.hIndex, entered.mean)),
    rateMiss: miss((r) => r.yRate - dot(r.hRate, entered.mean)),
  };
}

function median(values: readonly number[]): number {
  if (values.length === 0) return 0;
  const sorted = [...values].sort((a, b) => a - b);
  const half = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[half] : (sorted[half - 1] + sorted[half]) / 2;
}
