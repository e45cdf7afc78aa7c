/**
 * From a chamber's history to the rows the filter eats: regressors, observations in (index, ln thickness) and their gauge
 * covariance, depositions since the clean. Done once, shared by all hyper-parameter nodes.
 */
import type { FilmResponse, Term } from "./film-response.ts";
import type { Observation } from "./hypotheses.ts";
import type { ChamberLog, LightReading, RunEvent } from "./run.ts";

/** Layout of the state: index terms, rate terms, then the two steps (index, ln rate) last. */
export interface Layout {
  response: FilmResponse;
  /** Terms that the history moves, and so can be learned; index terms first. */
  active: readonly Term[];
  /** Terms nothing ever moved: their coefficient stays at the prior and is added at prediction only. */
  idle: readonly Term[];
  indexTerms: number;
  rateTerms: number;
  /** State length, indexTerms + rateTerms + 2. */
  n: number;
  /** For each active term the first one with the same regressor, itself when it is the first: worked out once a run. */
  sameAs: readonly number[];
}

export interface PreparedRun {
  kind: "run";
  entry: number;
  settings: RunEvent["settings"];
  count: number;
  /** Depositions since the clean before this one. */
  k: number;
  /** Regressor rows, length n. */
  hIndex: Float64Array;
  hRate: Float64Array;
  /** The film read as the filter takes it, without process scatter; null when none was read. Made once for all nodes. */
  seen: Observation | null;
  /** Observed index and ln thickness minus the known part; NaN when not measured. */
  yIndex: number;
  yRate: number;
  /** Known part of ln thickness. */
  known: number;
  /** Gauge covariance of (index, ln thickness): [var, cov, var]. */
  gauge: readonly [number, number, number];
  light: readonly LightReading[];
}

export type PreparedEvent =
  | PreparedRun
  | { kind: "clean"; entry: number }
  | { kind: "service"; entry: number }
  | { kind: "age"; entry: number; count: number };

export interface PreparedLog {
  chamber: string;
  events: readonly PreparedEvent[];
  /** Depositions since the clean at the end of the log. */
  k: number;
  /** Runs that could not be used, with the setting that was missing. */
  unusable: readonly { entry: number; missing: string }[];
}

const tiny = 1e-9;

/** Splits the response's terms into those some run of some chamber moved and those none did. */
export function layoutFor(response: FilmResponse, logs: readonly ChamberLog[]): Layout {
  const moved = new Set<Term>();
  let still = response.terms.filter((term) => term.movedBy.length > 0);
  // Values of the settings that have moved no term yet: only where one of them changes is a term worth asking again.
  let watched = new Map<string, number | undefined>();
  let first = true;
  for (const log of logs)
    for (const event of log.events) {
      if (still.length === 0) break;
      if (event.kind !== "run" || (event.film === null && event.light.length === 0)) continue;
      if (response.spoilt(event.settings) !== null) continue;
      let changed = first;
      for (const [name, value] of watched) if (event.settings.get(name) !== value) changed = true;
      if (!changed) continue;
      first = false;
      for (const term of still) if (Math.abs(term.value(event.settings, 0)) > tiny) moved.add(term);
      still = still.filter((term) => !moved.has(term));
      const names = new Set(still.flatMap((term) => term.movedBy));
      watched = new Map([...names].map((name) => [name, event.settings.get(name)]));
    }
  const isActive = (t: Term) => t.movedBy.length === 0 || moved.has(t);
  const active = [
    ...response.terms.filter((t) => t.output === "index" && isActive(t)),
    ...response.terms.filter((t) => t.output === "rate" && isActive(t)),
  ];
  const indexTerms = active.filter((t) => t.output === "index").length;
  return {
    response,
    active,
    idle: response.terms.filter((t) => !isActive(t)),
    indexTerms,
    rateTerms: active.length - indexTerms,
    n: active.length + 2,
    sameAs: active.map((term) => active.findIndex((other) => other.value === term.value)),
  };
}

/** Regressor rows of one deposition: index row and ln-thickness row, each of length layout.n. */
export function rows(
  layout: Layout,
  settings: RunEvent["settings"],
  k: number,
): { hIndex: Float64Array; hRate: Float64Array } {
  const { n } = layout;
  const hIndex = new Float64Array(n);
  const hRate = new Float64Array(n);
  fillRows(layout, settings, k, hIndex, hRate);
  return { hIndex, hRate };
}

/** The same into two rows of zeros. */
function fillRows(
  { active, sameAs, indexTerms, n }: Layout,
  settings: RunEvent["settings"],
  k: number,
  hIndex: Float64Array,
  hRate: Float64Array,
): void {
  for (let i = 0; i < active.length; i++) {
    const known = sameAs[i];
    const value = known === i ? active[i].value(settings, k) : known < indexTerms ? hIndex[known] : hRate[known];
    if (i < indexTerms) hIndex[i] = value;
    else hRate[i] = value;
  }
  hIndex[n - 2] = 1;
  hRate[n - 1] = 1;
}

/** Turns a log into filter rows, counting depositions since the clean. */
export function prepare(layout: Layout, log: ChamberLog): PreparedLog {
  let k = 0;
  // One block for all rows: thousands of small arrays of their own cost more than what is in them.
  const { n } = layout;
  const block = new Float64Array(2 * n * log.events.length);
  const unusable: { entry: number; missing: string }[] = [];
  const events: PreparedEvent[] = [];
  for (const event of log.events) {
    if (event.kind === "clean" || event.kind === "service") {
      k = event.kind === "clean" ? 0 : k;
      events.push({ kind: event.kind, entry: event.entry });
    } else if (event.kind === "precoat") {
      k += event.count;
      events.push({ kind: "age", entry: event.entry, count: event.count });
    } else {
      if (event.sinceClean !== null) k = Math.max(event.sinceClean - 1, 0);
      else k += event.count - 1;
      const missing = layout.response.spoilt(event.settings);
      const read = event.film !== null || event.light.length > 0;
      if (missing !== null && read) unusable.push({ entry: event.entry, missing });
      if (missing !== null || !read) events.push({ kind: "age", entry: event.entry, count: event.count });
      else {
        const at = 2 * n * events.length;
        const hIndex = block.subarray(at, at + n);
        const hRate = block.subarray(at + n, at + 2 * n);
        events.push(preparedRun(layout, event, k, hIndex, hRate));
      }
      k += 1;
    }
  }
  return { chamber: log.chamber, events, k, unusable };
}

function preparedRun(
  layout: Layout,
  event: RunEvent,
  k: number,
  hIndex: Float64Array,
  hRate: Float64Array,
): PreparedRun {
  fillRows(layout, event.settings, k, hIndex, hRate);
  const known = layout.response.known(event.settings);
  const film = event.film;
  const d = film?.thicknessNm ?? null;
  const [vn, cov, vd] = film?.gauge ?? noGauge;
  const index = film?.index ?? null;
  // First order: var(ln d) = var(d)/d^2; at 0.5 nm in 80 the second order is 2e-5 of it.
  const gauge: PreparedRun["gauge"] = d === null ? [vn, 0, 0] : [vn, cov / d, vd / (d * d)];
  const yRate = d === null ? Number.NaN : Math.log(d) - known;
  return {
    kind: "run",
    entry: event.entry,
    settings: event.settings,
    count: event.count,
    k,
    hIndex,
    hRate,
    seen: index === null && d === null ? null : observation(hIndex, hRate, index, d === null ? null : yRate, gauge),
    yIndex: index ?? Number.NaN,
    yRate,
    known,
    gauge,
    light: event.light,
  };
}

const noGauge = [0, 0, 0] as const;

function observation(
  hIndex: Float64Array,
  hRate: Float64Array,
  index: number | null,
  rate: number | null,
  [vn, cov, vl]: PreparedRun["gauge"],
): Observation {
  if (index === null) return { rows: [hRate], values: [rate as number], noise: [vl], outputs: [1] };
  if (rate === null) return { rows: [hIndex], values: [index], noise: [vn], outputs: [0] };
  return { rows: [hIndex, hRate], values: [index, rate], noise: [vn, cov, cov, vl], outputs: [0, 1] };
}
