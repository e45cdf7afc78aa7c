/** What a chamber's model has learned, in trade units: what one per cent more of each setting does, offsets beside sisters, drift, track record. */
import {
  type ChamberModel,
  coverageOf,
  type Settings,
  surprisesOf,
  type TrackedRun,
  trackRecord,
} from "../../calibration/index.ts";
import type { Workspace } from "./workspace.ts";

const signed = (v: number, digits: number) => `${v < 0 ? "-" : "+"}${Math.abs(v).toFixed(digits)}`;

/** Sisters named one by one; of more, the nearest and the farthest. */
const mostSisters = 3;
/** Runs under doubt that are told, the latest first to matter. */
const mostDoubts = 5;

/**
 * "+1 % silane: +0.0022 index, +0.62 nm (95 % +0.0015 to +0.0029, +0.55 to +0.69)". What no run of this line has moved is
 * what was thought beforehand, and says so.
 */
export function slopeSentences(ws: Workspace, model: ChamberModel, at: Settings): string[] {
  const d = Math.exp(model.quick(at).lnThickness);
  const out: string[] = [];
  for (const setting of ws.line.settings.values()) {
    const value = at.get(setting.name);
    if (value === undefined) continue;
    const linear = setting.dimension === "temperature" || value === 0;
    const by = linear ? 1 : 0.01 * value;
    const e = model.effect(at, new Map(at).set(setting.name, value + by));
    const what = linear ? `+1 ${setting.unit} ${setting.name}` : `+1 % ${setting.name}`;
    const nm = d * e.lnThickness.mean;
    const nmHalf = 1.96 * d * e.lnThickness.sd;
    const half = 1.96 * e.index.sd;
    const touched = Math.abs(e.index.mean) > 1e-9 || half > 1e-9;
    const range = (mean: number, to: number, digits: number) =>
      `${signed(mean - to, digits)} to ${signed(mean + to, digits)}`;
    const terms = [...model.layout.active, ...model.layout.idle].filter((t) => t.movedBy.includes(setting.name));
    const untaught = terms.length > 0 && terms.every((t) => model.layout.idle.includes(t));
    const known = untaught ? "; nobody moved it on this line: prior only" : "";
    out.push(
      touched
        ? `${what}: ${signed(e.index.mean, 4)} index, ${signed(nm, 2)} nm (95 % ${range(e.index.mean, half, 4)}, ${range(nm, nmHalf, 2)})${known}.`
        : `${what}: ${signed(nm, 2)} nm (95 % ${range(nm, nmHalf, 2)})${known}.`,
    );
  }
  return out;
}

export function learned(ws: Workspace, model: ChamberModel, at: Settings, record: readonly TrackedRun[]): string[] {
  const d = Math.exp(model.quick(at).lnThickness);
  const out = [
    ...slopeSentences(ws, model, at),
    ...driftSentence(model, d),
    ...stepSentence(model, d),
    ...sisterSentences(ws, model, at),
    ...facetSentence(ws),
  ];
  const coverage = coverageOf(record);
  if (coverage)
    out.push(
      `Track record: ${Math.round(100 * coverage.inside)} % of ${coverage.readings} readings fell inside the 95 % interval given before them; mean squared surprise ${coverage.meanSquare.toFixed(2)} (1 when the model holds).`,
      bandSentence(record),
    );
  out.push(...doubtSentences(record));
  return out;
}

function driftSentence(model: ChamberModel, d: number): string[] {
  const terms = model.coefficients();
  const drift = (output: "index" | "rate") => terms.find((c) => c.term.name === "drift" && c.term.output === output);
  const n = drift("index");
  const r = drift("rate");
  if (!n || !r) return [];
  return [
    `Drift over 10 depositions: ${signed(10 * n.mean, 4)} index (sd ${(10 * n.sd).toFixed(4)}), ${signed(10 * r.mean * d, 2)} nm (sd ${(10 * r.sd * d).toFixed(2)}).`,
  ];
}

/** How far the chamber stands from its own long-run offset: the step of the last clean and what it wandered since. */
function stepSentence(model: ChamberModel, d: number): string[] {
  const { events } = model.log;
  const clean = events.findLast((e) => e.kind === "clean");
  if (!clean) return [];
  const n = model.layout.n;
  const along = (i: number) => {
    const h = new Float64Array(n);
    h[i] = 1;
    return model.combination(h);
  };
  const index = along(n - 2);
  const rate = along(n - 1);
  return [
    `Since the clean of entry ${clean.entry} it stands ${signed(index.mean, 4)} index (sd ${index.sd.toFixed(4)}), ${signed(rate.mean * d, 1)} nm (sd ${(rate.sd * d).toFixed(1)}) off its long-run offset.`,
  ];
}

/** This chamber beside its sisters, all at the same settings and as they stand now. */
function sisterSentences(ws: Workspace, model: ChamberModel, at: Settings): string[] {
  const here = model.quick(at);
  const d = Math.exp(here.lnThickness);
  const others = model.context.sisters.flatMap(({ chamber }) => {
    const other = ws.model?.chamber(chamber).quick(at);
    if (!other) return [];
    const nm = Math.exp(other.lnThickness);
    // Apart in units of what chambers of a line usually differ by.
    const apart = Math.hypot((here.index - other.index) / 0.02, (here.lnThickness - other.lnThickness) / 0.06);
    return [{ chamber, index: other.index, nm, apart }];
  });
  const tell = (o: (typeof others)[number], at = "At these settings ") =>
    `${at}${o.chamber} would lay index ${o.index.toFixed(3)}, ${o.nm.toFixed(1)} nm: ${model.chamber} differs by ${signed(here.index - o.index, 3)} and ${signed(d - o.nm, 1)} nm.`;
  if (others.length <= mostSisters) return others.map((o) => tell(o));
  const sorted = [...others].sort((a, b) => a.apart - b.apart);
  const mean = (of: (o: (typeof others)[number]) => number) =>
    others.reduce((sum, o) => sum + of(o), 0) / others.length;
  return [
    `At these settings its ${others.length} sisters would lay index ${mean((o) => o.index).toFixed(3)}, ${mean((o) => o.nm).toFixed(1)} nm on average: ${model.chamber} differs by ${signed(here.index - mean((o) => o.index), 3)} and ${signed(d - mean((o) => o.nm), 1)} nm.`,
    tell(sorted[0], "The nearest, "),
    tell(sorted[sorted.length - 1], "The farthest, "),
  ];
}

function facetSentence(ws: Workspace): string[] {
  const { facet } = ws.light;
  if (ws.line.wafer.surface !== "pyramids") return [];
  return [
    facet.runs > 0
      ? `Facet factor ${facet.mean.toFixed(3)} sd ${facet.sd.toFixed(3)}, pinned by ${facet.runs} reflectance minima on textured cells.`
      : `Facet factor ${facet.mean.toFixed(2)} sd ${facet.sd.toFixed(2)} as declared; no reflectance minimum has pinned it.`,
  ];
}

/** A run under doubt: its reading, or the chamber moved before it and nobody wrote down why. */
export interface DoubtedRun {
  entry: number;
  badMeasurement: number;
  unloggedStep: number;
}

/** The runs judged likelier bad, or likelier preceded by an unlogged step, than ordinary; oldest first. */
export function doubtedRuns(record: readonly TrackedRun[]): DoubtedRun[] {
  return record
    .filter((run) => run.suspect + run.step > 0.5)
    .map((run) => ({ entry: run.entry, badMeasurement: run.suspect, unloggedStep: run.step }));
}

function doubtSentences(record: readonly TrackedRun[]): string[] {
  const doubted = doubtedRuns(record);
  if (doubted.length === 0) return [];
  const percent = (p: number) => `${Math.round(100 * p)} %`;
  const shown = doubted.slice(-mostDoubts).map((run) => {
    const [bad, step] = [percent(run.badMeasurement), percent(run.unloggedStep)];
    return run.badMeasurement >= run.unloggedStep
      ? `entry ${run.entry} bad measurement ${bad} (step ${step})`
      : `entry ${run.entry} unlogged step ${step} (bad measurement ${bad})`;
  });
  const earlier = doubted.length - shown.length;
  return [`Doubts: ${shown.join("; ")}${earlier > 0 ? `; ${earlier} earlier` : ""}.`];
}

/** Readings outside +-3 beside how many the band promises: one in 370 while the model holds. */
function bandSentence(record: readonly TrackedRun[]): string {
  const { readings, outside, expected } = surprisesOf(record);
  const latest = [...new Set(outside.map((o) => o.entry))].slice(-5);
  const entries =
    latest.length === 0
      ? ""
      : ` (${latest.length === 1 ? "entry" : "entries"} ${latest.join(", ")}${latest.length < outside.length ? " the latest" : ""})`;
  return `Surprises: ${outside.length} of ${readings} readings fell outside +-3 of what was expected before them${entries}; ${expected.toFixed(1)} are expected while the model holds.`;
}

/** The track record and the runs under doubt as `chamber --json` gives them. */
export function recordDocument(model: ChamberModel): Record<string, unknown> {
  const record = trackRecord(model);
  const coverage = coverageOf(record);
  const round = (v: number, digits: number) => (Number.isFinite(v) ? Number(v.toFixed(digits)) : null);
  return {
    track_record: coverage && {
      readings: coverage.readings,
      inside_95: round(coverage.inside, 4),
      mean_square: round(coverage.meanSquare, 3),
    },
    doubted_runs: doubtedRuns(record).map((run) => ({
      entry: run.entry,
      bad_measurement: round(run.badMeasurement, 3),
      unlogged_step: round(run.unloggedStep, 3),
    })),
  };
}
