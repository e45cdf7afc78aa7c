/**
 * How well a single cause explains what was read since an onset. A cause is an error e at one place: a setting delivered
 * (1 + e) times what was typed, a gauge that reads high, an index lowered by air. For a given e the readings are those of
 * other settings, so the filter is run over them from the state before the onset: the uncertainty of every slope, the
 * gauge, the process scatter and bad measurements enter as they do everywhere. What is left is one integral over e, which
 * is smooth and one-dimensional, so an even grid does it.
 */
import { emptyForecasts, type Node, runEvents } from "./chamber-filter.ts";
import type { ChamberModel, NodePass } from "./chamber-model.ts";
import type { Lever } from "./film-response.ts";
import type { LightLink } from "./light-link.ts";
import { nodeWeights } from "./nodes.ts";
import { type Layout, type PreparedEvent, type PreparedLog, type PreparedRun, rows } from "./prepare.ts";
import { causePriors, faultShift, transientDepositions } from "./priors.ts";
import type { Settings } from "./run.ts";
import { stateOf } from "./sisters.ts";
import { addNoise, copyState, covariance, type State } from "./square-root.ts";

export type CauseKind = "setting" | "gauge index" | "gauge thickness" | "leak" | "step" | "ordinary";

/** A single cause and what was thought of it before the readings. */
export interface Suspect {
  kind: CauseKind;
  /** The setting, for kind "setting". */
  setting: string | null;
  /** What e is: a fraction of what was typed (or read), degrees, or an index. */
  unit: "fraction" | "degrees" | "index";
  weight: number;
  mean: number;
  sd: number;
}

/** Where something may have begun: `at` is a place in the log's events. */
export interface Onset {
  at: number;
  kind: "clean" | "service" | "change" | "run";
  entry: number;
  prior: number;
}

/** A node of the hyper-parameters as it stood before the earliest onset. */
export interface Ready {
  node: Node;
  weight: number;
  /** State before event `at`, in the wide layout. */
  state: State;
  at: number;
}

/** The chamber set up for the question: its layout with every coefficient a cause can move, learned or not. */
export interface Scene {
  model: ChamberModel;
  layout: Layout;
  light: LightLink | null;
  /** Place of each active term of the chamber's own layout in the wide one. */
  place: readonly number[];
  /** Places of the transients after a clean. */
  transients: readonly { at: number; output: "index" | "rate" }[];
  /** Runs retold so far: the same tellings come up at every node and onset. */
  told: Map<PreparedRun, Map<string, PreparedRun>>;
}

/** The coefficients nobody ever moved join the state, at their prior: a controller can lie about a setting that stood still. */
export function sceneOf(model: ChamberModel): Scene {
  const own = model.layout;
  const of = (output: "index" | "rate") => [
    ...own.active.filter((t) => t.output === output),
    ...own.idle.filter((t) => t.output === output),
  ];
  const active = [...of("index"), ...of("rate")];
  const indexTerms = of("index").length;
  const layout: Layout = {
    response: own.response,
    active,
    idle: [],
    indexTerms,
    rateTerms: active.length - indexTerms,
    n: active.length + 2,
    sameAs: active.map((term) => active.findIndex((other) => other.value === term.value)),
  };
  const transients = active.flatMap((t, at) => (t.name === "transient" ? [{ at, output: t.output }] : []));
  return {
    model,
    layout,
    light: model.context.light,
    place: own.active.map((term) => active.indexOf(term)),
    transients,
    told: new Map(),
  };
}

function widen(scene: Scene, state: State, node: Node): State {
  const { layout, place } = scene;
  if (layout.n === state.n) return copyState(state);
  const { n } = layout;
  const to = [...place, n - 2, n - 1];
  const mean = new Float64Array(n);
  const full = new Float64Array(n * n);
  layout.active.forEach((term, i) => {
    mean[i] = term.prior.mean;
    full[i * n + i] = term.prior.sd ** 2 + (term.prior.spread * node.spread) ** 2;
  });
  const p = covariance(state);
  to.forEach((a, i) => {
    mean[a] = state.mean[i];
    to.forEach((b, j) => {
      full[a * n + b] = p[i * state.n + j];
    });
  });
  return stateOf({ p: n, mean, covariance: full });
}

/** Nodes that carry less than this of the weight before the onset are left out. */
const negligible = 0.04;

/** The nodes as they stood before event `at`, heaviest first: judged with the readings in question a fault excuses itself. */
export function nodesBefore(scene: Scene, at: number): Ready[] {
  const { model } = scene;
  const later = new Set(model.log.events.slice(at).map((e) => e.entry));
  const found = model.runs.findIndex((run) => later.has(run.entry));
  const first = found < 0 ? model.runs.length : found;
  type Entrant = Omit<NodePass, "logAfter">;
  const reached = model.context.entrants.filter((e: Entrant) => e.forecasts.logBefore[first] !== undefined);
  const weights = nodeWeights(reached.map((e) => e.logBefore + e.forecasts.logBefore[first]));
  const kept = reached
    .map((entrant, i) => ({ entrant, weight: weights[i] }))
    .filter(({ weight }) => weight > negligible)
    .sort((a, b) => b.weight - a.weight);
  const total = kept.reduce((sum, k) => sum + k.weight, 0);
  return kept.map(({ entrant, weight }) => {
    const state = copyState(entrant.start);
    runEvents(state, model.layout, model.log, entrant.node, { to: at, light: scene.light });
    return { node: entrant.node, weight: weight / total, state: widen(scene, state, entrant.node), at };
  });
}

/** Causes a chamber of these levers can have. */
export function suspectsOf(levers: readonly Lever[], settings: Settings, onset: Onset["kind"]): Suspect[] {
  const { weights, controller, temperature, gaugeIndex, gaugeThickness } = causePriors;
  const byName: Readonly<Record<string, number>> = weights;
  const plain = { setting: null, mean: 0 };
  // A clean always leaves a step behind: there the step is what "ordinary" means.
  const step = onset === "service" ? weights.serviceStep : weights.step;
  const ordinaryWeight = weights.ordinary + (onset === "clean" ? step : 0);
  const out: Suspect[] = [{ ...plain, kind: "ordinary", unit: "index", weight: ordinaryWeight, sd: 0 }];
  if (onset !== "clean") out.push({ ...plain, kind: "step", unit: "index", weight: step, sd: 0 });
  for (const { setting, meaning } of levers) {
    const value = settings.get(setting);
    if (value === undefined) continue;
    const warm = meaning === "temperature" || (meaning?.startsWith("zone_") ?? false);
    if (!warm && !(value > 0)) continue;
    const weight = byName[warm ? "temperature" : (meaning ?? "other")] ?? weights.other;
    const sd = warm ? temperature : controller;
    out.push({ kind: "setting", setting, unit: warm ? "degrees" : "fraction", weight, mean: 0, sd });
  }
  out.push(
    { ...plain, kind: "gauge index", unit: "index", weight: weights.gaugeIndex, sd: gaugeIndex },
    { ...plain, kind: "gauge thickness", unit: "fraction", weight: weights.gaugeThickness, sd: gaugeThickness },
    {
      ...plain,
      kind: "leak",
      unit: "index",
      weight: weights.leak,
      mean: -faultShift.index,
      sd: faultShift.sd,
    },
  );
  return out;
}

/** Settings as they were delivered if the cause held. */
export function delivered(settings: Settings, suspect: Suspect, e: number): Settings {
  const { setting, unit, kind } = suspect;
  if (kind !== "setting" || setting === null) return settings;
  const value = settings.get(setting);
  if (value === undefined) return settings;
  return new Map(settings).set(setting, unit === "degrees" ? value + e : value * (1 + e));
}

function retold(scene: Scene, run: PreparedRun, suspect: Suspect, e: number, since: number | null): PreparedRun {
  let known = scene.told.get(run);
  if (!known) {
    known = new Map();
    scene.told.set(run, known);
  }
  // What changes neither rows nor readings is one telling.
  const moves = suspect.kind === "setting" || suspect.kind === "gauge index" || suspect.kind === "gauge thickness";
  const key = moves ? `${suspect.kind} ${suspect.setting} ${e} ${since}` : `${since}`;
  let found = known.get(key);
  if (!found) {
    found = retell(scene, run, suspect, e, since);
    known.set(key, found);
  }
  return found;
}

/** The run as the filter is to take it if the cause held: rows of what was delivered, the reading without the gauge's error. */
function retell(scene: Scene, run: PreparedRun, suspect: Suspect, e: number, since: number | null): PreparedRun {
  const { layout, transients } = scene;
  const settings = delivered(run.settings, suspect, e);
  const { hIndex, hRate } = rows(layout, settings, run.k);
  if (since !== null)
    for (const { at, output } of transients)
      (output === "index" ? hIndex : hRate)[at] = Math.exp(-since / transientDepositions);
  const known = layout.response.known(settings);
  const yIndex = run.yIndex - (suspect.kind === "gauge index" ? e : 0);
  const yRate = run.yRate + run.known - known - (suspect.kind === "gauge thickness" ? Math.log1p(e) : 0);
  const seen = run.seen && {
    ...run.seen,
    rows: run.seen.outputs.map((o) => (o === 0 ? hIndex : hRate)),
    values: run.seen.outputs.map((o) => (o === 0 ? yIndex : yRate)),
  };
  // Weighted reflectance is left aside: flat in thickness, and its grid costs more here than it tells.
  const light = run.light.filter((reading) => reading.kind === "reflectance_minimum_nm");
  return { ...run, settings, hIndex, hRate, known, yIndex, yRate, seen, light };
}

/** One telling of the readings from an onset on: cause, size, and whether the transient after a clean came back with it. */
export interface Telling {
  suspect: Suspect;
  e: number;
  restart: boolean;
}

/** Nothing wrong: the readings as they stand. */
export const ordinary: Telling = {
  suspect: { kind: "ordinary", setting: null, unit: "index", weight: 1, mean: 0, sd: 0 },
  e: 0,
  restart: false,
};

/**
 * Runs the events from `ready.at` up to `to` as told. Returns ln density of the readings, the state they leave, and how far
 * each is doubted. `blind` leaves the readings since the onset unread.
 */
export function tell(
  scene: Scene,
  ready: Ready,
  onset: Onset,
  { suspect, e, restart }: Telling,
  { to = scene.model.log.events.length, blind = false } = {},
): { logDensity: number; state: State; doubts: Map<number, number> } {
  const { layout, light, model } = scene;
  const state = copyState(ready.state);
  // One cause at a time: no unlogged step on the way, but for those before the onset.
  const quiet: Node = { ...ready.node, scatter: { ...ready.node.scatter, step: [1e-9, 1e-9] } };
  const doubts = new Map<number, number>();
  let logDensity = 0;
  let since = 0;
  const none: Suspect = { ...suspect, kind: "ordinary", setting: null };
  for (let at = ready.at; at < to; at++) {
    const event = model.log.events[at];
    const begun = at >= onset.at;
    if (at === onset.at && suspect.kind === "leak") state.mean[0] += e;
    if (at === onset.at && suspect.kind === "step" && event.kind !== "service") {
      const [index, rate] = ready.node.scatter.step;
      addNoise(state, state.n - 2, index * ready.node.step);
      addNoise(state, state.n - 1, rate * ready.node.step);
    }
    // A lying controller is told as the only thing a service left behind; that the chamber itself moved, as another.
    if (at === onset.at && event.kind === "service" && suspect.kind !== "step") continue;
    let own: PreparedEvent = event;
    if (event.kind === "run")
      own =
        blind && at >= onset.at
          ? { kind: "age", entry: event.entry, count: event.count }
          : retold(scene, event, begun ? suspect : none, e, begun && restart ? since + event.count - 1 : null);
    const forecasts = own.kind === "run" ? emptyForecasts() : undefined;
    const one: PreparedLog = { chamber: model.chamber, events: [own], k: 0, unusable: [] };
    logDensity += runEvents(state, layout, one, own.kind === "run" ? quiet : ready.node, { forecasts, light });
    if (forecasts && own.kind === "run") doubts.set(own.entry, forecasts.weights[0][1]);
    if (event.kind === "run" || event.kind === "age") since += at >= onset.at ? event.count : 0;
    if (event.kind === "clean") since = 0;
  }
  return { logDensity, state, doubts };
}

/** Points of the grid over e, and how far it reaches in standard deviations of the prior. */
const gridPoints = 37;
const reach = 4.5;

/** The sizes of a cause that are tried, and ln(prior density x step) of each. */
export function gridOf(suspect: Suspect): { e: number[]; logPrior: number[] } {
  if (suspect.sd === 0) return { e: [0], logPrior: [0] };
  const step = (2 * reach * suspect.sd) / (gridPoints - 1);
  const z = Array.from({ length: gridPoints }, (_, i) => (i * step) / suspect.sd - reach);
  return {
    e: z.map((v) => suspect.mean + v * suspect.sd),
    logPrior: z.map((v) => -0.5 * v * v + Math.log(step / (suspect.sd * Math.sqrt(2 * Math.PI)))),
  };
}

/** Chance that the transient came back with a cause at this onset. */
export function restartChance(suspect: Suspect, onset: Onset): number {
  if (onset.kind === "service") return causePriors.restartAtService;
  if (suspect.kind === "step") return causePriors.restartAtStep;
  if (suspect.kind !== "setting") return 0;
  return onset.kind === "run" ? causePriors.restartAtRun : 0;
}
