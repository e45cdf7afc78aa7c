/**
 * Which controller is lying: the misses since an onset restated as the single causes that would explain them. Each cause is
 * an error of one thing (a setting delivered more or less than typed, a gauge, air in the chamber, an ordinary step), with
 * the posterior of its size and its chance among the others; or it is said that they cannot be told apart. Source of the
 * idea: Bayesian comparison of models, each with its own prior for the size of the effect (Jeffreys 1939, from memory).
 */
import { weightsFromLogs } from "../engine/index.ts";
import {
  type CauseKind,
  gridOf,
  nodesBefore,
  type Onset,
  ordinary,
  type Ready,
  restartChance,
  type Scene,
  type Suspect,
  sceneOf,
  suspectsOf,
  tell,
} from "./cause-evidence.ts";
import { type MissedRun, type Misses, missesOf, refusedBy } from "./cause-misses.ts";
import { onsetsOf } from "./cause-onset.ts";
import { gaugeElsewhere } from "./cause-sisters.ts";
import { type TellingRun, tellingRuns } from "./cause-telling.ts";
import type { ChamberModel } from "./chamber-model.ts";
import type { Lever } from "./film-response.ts";
import type { Settings } from "./run.ts";

export interface Cause {
  kind: CauseKind;
  setting: string | null;
  unit: Suspect["unit"];
  probability: number;
  /** Its size if it is the cause: posterior mean and middle 95 %. Null for what has no one size (step, ordinary). */
  size: { mean: number; low: number; high: number } | null;
  /** Properties it leaves unexplained by more than `unexplained` standard deviations. */
  cannotExplain: ("index" | "rate")[];
}

export interface Explanation {
  onset: { entry: number; kind: Onset["kind"]; stated: boolean; probability: number };
  runs: (MissedRun & { /** Chance that its reading is bad, under the likeliest cause. */ suspect: number })[];
  miss: Misses["miss"];
  /** Likeliest first. */
  causes: Cause[];
  verdict: "named" | "nothing" | "cannot separate";
  /** The one cause named, or those that cannot be told apart; where nothing is worth explaining, those not excluded either. */
  likely: Cause[];
  /** How well each of the runs offered would tell the likely causes apart. */
  tellingRuns: TellingRun[];
}

export interface CauseQuestion {
  levers: readonly Lever[];
  /** Entries of changes typed in at the tool, as further possible onsets. */
  changes?: readonly number[];
  /** Entry of the onset, when a person says it. */
  since?: number;
  /** The other chambers, read with the same gauge: a gauge that lies does so everywhere. */
  sisters?: readonly ChamberModel[];
  /** Runs that could be done next, for `tellingRuns`. */
  runs?: readonly Settings[];
}

/** A cause is named from this probability on, when no other has more than `rival`; those that share `told` are told together. */
const namedFrom = 0.8;
const rival = 0.1;
const told = 0.97;
/** Nothing is worth explaining where "ordinary" leads with this: the readings have made a fault no likelier than it was. */
const ordinaryFrom = 0.4;
/** Runs weighed since an onset. */
const mostRuns = 40;

/** A node brought up to an onset, with the log density of the readings on the way. */
interface Eve extends Ready {
  logBefore: number;
}

function eveOf(scene: Scene, ready: Ready, onset: Onset): Eve {
  const { state, logDensity } = tell(scene, ready, onset, ordinary, { to: onset.at });
  return { ...ready, state, at: onset.at, logBefore: logDensity };
}

/**
 * ln evidence of one cause at an onset, at one node, with the grid's log weights. `rough`: every other size and without the
 * returned transient, which is near enough (8 % at worst) to choose an onset by.
 */
function evidence(scene: Scene, from: Eve, onset: Onset, suspect: Suspect, to: number, rough = false): Weighed {
  const grid = gridOf(suspect);
  const every = rough && grid.e.length > 1 ? 2 : 1;
  const e = grid.e.filter((_, i) => i % every === 0);
  const back = rough ? 0 : restartChance(suspect, onset);
  const ways = back === 0 ? [false] : [false, true];
  const points = e.map((size, i) => {
    const each = ways.map((restart) => {
      const { logDensity } = tell(scene, from, onset, { suspect, e: size, restart }, { to });
      return from.logBefore + logDensity + (back === 0 ? 0 : Math.log(restart ? back : 1 - back));
    });
    return grid.logPrior[i * every] + Math.log(every) + logSum(each);
  });
  return { e, points, total: logSum(points) };
}

interface Weighed {
  e: number[];
  points: number[];
  total: number;
}

function logSum(values: readonly number[]): number {
  const top = Math.max(...values);
  return top + Math.log(values.reduce((sum, v) => sum + Math.exp(v - top), 0));
}

/** The likeliest onset, and how much of all onsets' evidence it stands for. Weighed at the heaviest node. */
function chooseOnset(scene: Scene, ready: Ready, onsets: readonly Onset[], levers: readonly Lever[], to: number) {
  if (onsets.length === 1) return { onset: onsets[0], share: 1 };
  const scored = onsets.map((onset) => {
    const causes = suspectsOf(levers, settingsAt(scene, onset.at), onset.kind).filter((s) => s.kind !== "ordinary");
    const eve = eveOf(scene, ready, onset);
    const each = causes.map((s) => Math.log(s.weight) + evidence(scene, eve, onset, s, to, true).total);
    return Math.log(onset.prior) + logSum(each);
  });
  const weights = weightsFromLogs(Float64Array.from(scored));
  let best = 0;
  weights.forEach((w, i) => {
    if (w > weights[best]) best = i;
  });
  return { onset: onsets[best], share: weights[best] };
}

function settingsAt({ model }: Scene, at: number): Settings {
  const run = model.log.events.slice(at).find((e) => e.kind === "run");
  return run?.kind === "run" ? run.settings : new Map();
}

/**
 * The causes that would explain what was read since the onset. Refuses `no-reading` and `no-run-since`.
 */
export function causesOf(model: ChamberModel, question: CauseQuestion): Explanation {
  const onsets = onsetsOf(model, question);
  const scene = sceneOf(model);
  const ready = nodesBefore(scene, onsets[0].at);
  const to = endOf(scene, onsets[0].at);
  const { onset, share } = chooseOnset(scene, ready[0], onsets, question.levers, to);
  const suspects = suspectsOf(question.levers, settingsAt(scene, onset.at), onset.kind);
  const gauge = gaugeElsewhere(question.sisters ?? [], onset.entry);
  // Of the chance that it began at any of the onsets tried, the one chosen speaks for all: its causes carry their weight.
  const prior = onset.prior / onsets.reduce((sum, o) => sum + o.prior, 0) / share;
  const eves = ready.map((node) => eveOf(scene, node, onset));
  const weighed = suspects.map((suspect) => {
    const each = eves.map((node) => {
      const w = evidence(scene, node, onset, suspect, to);
      const points = w.points.map((p, i) => p + gauge(suspect, w.e[i]) + Math.log(node.weight));
      return { e: w.e, points };
    });
    const points = each[0].e.map((_, i) => logSum(each.map((n) => n.points[i])));
    const chance = suspect.kind === "ordinary" ? 1 : prior;
    return { suspect, e: each[0].e, points, log: logSum(points) + Math.log(suspect.weight * chance) };
  });
  const chances = weightsFromLogs(Float64Array.from(weighed, (w) => w.log));
  const misses = missesOf(scene, ready, onset, to);
  const found = weighed
    .map((w, i) => {
      const { kind, setting, unit } = w.suspect;
      const size = w.e.length > 1 ? sizeOf(w.e, w.points) : null;
      const cannotExplain = refusedBy(scene, ready[0], onset, w.suspect, size?.mean ?? 0, misses);
      const cause: Cause = { kind, setting, unit, probability: chances[i], size, cannotExplain };
      const weights = Array.from(weightsFromLogs(Float64Array.from(w.points)));
      return { cause, suspect: w.suspect, probability: chances[i], e: w.e, weights };
    })
    .sort((a, b) => b.probability - a.probability);
  const [first] = found;
  const verdict = verdictOn(found);
  const likely = verdict === "named" ? [first] : credible(found);
  const best = { suspect: first.suspect, e: first.cause.size?.mean ?? 0, restart: false };
  const { doubts } = tell(scene, ready[0], onset, best, { to });
  return {
    onset: { entry: onset.entry, kind: onset.kind, stated: question.since !== undefined, probability: share },
    runs: misses.runs.map((run) => ({ ...run, suspect: doubts.get(run.entry) ?? 0 })),
    miss: misses.miss,
    // What shares the probability is not refused, whatever its mean size leaves over.
    causes: found.map((f) => (likely.includes(f) ? Object.assign(f.cause, { cannotExplain: [] }) : f.cause)),
    verdict,
    likely: likely.map((f) => f.cause),
    tellingRuns: tellingRuns(scene, ready[0], onset, likely, question.runs ?? []),
  };
}

function verdictOn(found: readonly { suspect: Suspect; probability: number }[]): Explanation["verdict"] {
  const [first, second] = found;
  if (first.suspect.kind === "ordinary") return first.probability >= ordinaryFrom ? "nothing" : "cannot separate";
  return first.probability >= namedFrom && second.probability <= rival ? "named" : "cannot separate";
}

/** The event after the last run that is weighed. */
function endOf({ model }: Scene, from: number): number {
  const { events } = model.log;
  let runs = 0;
  for (let at = from; at < events.length; at++) {
    if (events[at].kind === "run") runs++;
    if (runs === mostRuns) return at + 1;
  }
  return events.length;
}

/** The likeliest causes that together carry nearly all the probability. */
function credible<T extends { probability: number }>(causes: readonly T[]): T[] {
  let sum = 0;
  const out: T[] = [];
  for (const cause of causes) {
    if (sum >= told) break;
    out.push(cause);
    sum += cause.probability;
  }
  return out;
}

/** Mean and middle 95 % of a size from ln weights on an even grid; between points ln weight is taken as a parabola. */
function sizeOf(e: readonly number[], points: readonly number[]): { mean: number; low: number; high: number } {
  const fine = 20;
  const top = Math.max(...points);
  const at: number[] = [];
  const weight: number[] = [];
  for (let i = 0; i < (e.length - 1) * fine; i++) {
    const x = i / fine;
    const m = Math.min(Math.max(Math.round(x), 1), e.length - 2);
    const t = x - m;
    const [a, b, c] = [points[m - 1], points[m], points[m + 1]];
    at.push(e[0] + x * (e[1] - e[0]));
    weight.push(Math.exp(b + 0.5 * t * (c - a) + 0.5 * t * t * (a - 2 * b + c) - top));
  }
  const total = weight.reduce((s, w) => s + w, 0);
  const quantile = (p: number) => {
    let sum = 0;
    for (let i = 0; i < at.length; i++) {
      sum += weight[i];
      if (sum >= p * total) return at[i];
    }
    return at[at.length - 1];
  };
  const mean = at.reduce((s, x, i) => s + x * weight[i], 0) / total;
  return { mean, low: quantile(0.025), high: quantile(0.975) };
}
