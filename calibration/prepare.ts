/**
 * From a chamber's history to the rows the filter eats: regressors, observations in (index, ln thickness) and their gauge
 * covariance, depositions since the clean. Done once, shared by all hyper-parameter nodes.
 */
import type { FilmResponse, Term } from "./film-response.ts";
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
}

export interface PreparedRun {
  kind: "run";
  entry: number;
  settings: RunEvent["settings"];
  count: number;
  /** Depositions since the clean before this one. */
  k: number;
  /** Regressor rows (length n); null when the settings needed are not known. */
  hIndex: Float64Array | null;
  hRate: Float64Array | null;
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
  for (const log of logs)
    for (const event of log.events) {
      if (event.kind !== "run" || (event.film === null && event.light.length === 0)) continue;
      if (response.needed.some((name) => !event.settings.has(name))) continue;
      for (const term of response.terms)
        if (!moved.has(term) && Math.abs(term.value(event.settings, 0)) > tiny) moved.add(term);
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
  };
}

/** Regressor rows of one deposition: index row and ln-thickness row, each of length layout.n. */
export function rows(
  layout: Layout,
  settings: RunEvent["settings"],
  k: number,
): { hIndex: Float64Array; hRate: Float64Array } {
  const hIndex = new Float64Array(layout.n);
  const hRate = new Float64Array(layout.n);
  layout.active.forEach((term, i) => {
    (term.output === "index" ? hIndex : hRate)[i] = term.value(settings, k);
  });
  hIndex[layout.n - 2] = 1;
  hRate[layout.n - 1] = 1;
  return { hIndex, hRate };
}

/** Turns a log into filter rows, counting depositions since the clean. */
export function prepare(layout: Layout, log: ChamberLog): PreparedLog {
  let k = 0;
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
      const missing = layout.response.needed.find((name) => !event.settings.has(name));
      const read = event.film !== null || event.light.length > 0;
      if (missing !== undefined && read) unusable.push({ entry: event.entry, missing });
      if (missing !== undefined || !read) events.push({ kind: "age", entry: event.entry, count: event.count });
      else events.push(preparedRun(layout, event, k));
      k += 1;
    }
  }
  return { chamber: log.chamber, events, k, unusable };
}

function preparedRun(layout: Layout, event: RunEvent, k: number): PreparedRun {
  const { hIndex, hRate } = rows(layout, event.settings, k);
  const known = layout.response.known(event.settings);
  const film = event.film;
  const d = film?.thicknessNm ?? null;
  const [vn, cov, vd] = film?.gauge ?? [0, 0, 0];
  return {
    kind: "run",
    entry: event.entry,
    settings: event.settings,
    count: event.count,
    k,
    hIndex,
    hRate,
    yIndex: film?.index ?? Number.NaN,
    yRate: d === null ? Number.NaN : Math.log(d) - known,
    known,
    // First order: var(ln d) = var(d)/d^2; at 0.5 nm in 80 the second order is 2e-5 of it.
    gauge: d === null ? [vn, 0, 0] : [vn, cov / d, vd / (d * d)],
    light: event.light,
  };
}
