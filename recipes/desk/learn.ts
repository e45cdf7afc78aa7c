/**
 * From the book to what calibration learns from: settings in canonical units, film readings with their gauge's covariance,
 * light readings, cleans and services, in the order they happened.
 */
import type { Bias, ChamberEvent, ChamberLog, LearnOptions, Lever, Settings } from "../../calibration/index.ts";
import { canonicalUnit } from "../../engine/index.ts";
import type { FilmOptics } from "../advice/cell-light.ts";
import type { Line, Setting } from "../line/line.ts";
import { goalOf } from "../line/line.ts";
import { fromQuantity } from "../line/settings.ts";
import type { StepSettings } from "../record/entries.ts";
import { chamberRecord, type Ledger } from "../record/ledger.ts";
import { flatSettings } from "../record/steps.ts";
import type { RunRecord, TimelineEvent } from "../record/timeline.ts";
import { filmReading, type GaugeBiases, lightReadings } from "./film-readings.ts";
import { biasThen, gaugeBiases } from "./gauge-readings.ts";

export { filmReading, lightReadings } from "./film-readings.ts";

/** A recipe's settings in canonical units; settings the line no longer declares are left out. */
export function canonicalSettings(line: Line, steps: readonly StepSettings[]): Settings {
  const out = new Map<string, number>();
  if (steps.length !== 1) return out;
  const known = canonicalUnits(line);
  const [step] = steps;
  if (step.name !== undefined) {
    for (const [name, quantity] of flatSettings(steps)) {
      const setting = line.settings.get(name);
      if (setting) out.set(name, fromQuantity(setting, quantity));
    }
    return out;
  }
  const { settings } = step;
  for (const name in settings) {
    const row = known.get(name);
    if (!row) continue;
    const { value, unit } = settings[name];
    out.set(name, unit === row.unit && Number.isFinite(value) ? value : fromQuantity(row.setting, settings[name]));
  }
  return out;
}

const rows = new WeakMap<Line, Map<string, { setting: Setting; unit: string }>>();

/** Settings with the unit in which a value needs no converting: nearly every one of a long history is written in it. */
function canonicalUnits(line: Line): Map<string, { setting: Setting; unit: string }> {
  let known = rows.get(line);
  if (!known) {
    known = new Map();
    for (const [name, setting] of line.settings) known.set(name, { setting, unit: canonicalUnit(setting.dimension) });
    rows.set(line, known);
  }
  return known;
}

function runEvent(line: Line, run: RunRecord, biases: GaugeBiases): ChamberEvent {
  return {
    kind: "run",
    entry: run.seq,
    settings: canonicalSettings(line, run.data.steps),
    count: run.data.count,
    sinceClean: run.data.since_clean ?? null,
    film: filmReading(line, run.readings, biasThen(biases, run.atMs)),
    light: lightReadings(line, run.readings),
  };
}

function eventOf(line: Line, event: TimelineEvent, biases: GaugeBiases): ChamberEvent | null {
  switch (event.kind) {
    case "run":
      return runEvent(line, event, biases);
    case "precoat":
      return { kind: "precoat", entry: event.seq, count: event.count };
    case "clean":
    case "service":
      return { kind: event.kind, entry: event.seq };
    case "version":
      return null;
  }
}

/**
 * Every chamber the line declares, with what the book says of it. Film readings are freed of what their gauge read too high
 * when the run was made, as far as its reference wafer tells.
 */
export function chamberLogs(line: Line, ledger: Ledger, biases: GaugeBiases = gaugeBiases(line, ledger)): ChamberLog[] {
  return [...line.chambers.keys()].map((chamber) => ({
    chamber,
    events: chamberRecord(ledger, chamber)
      .timeline.map((event) => eventOf(line, event, biases))
      .filter((event): event is ChamberEvent => event !== null),
  }));
}

export function leversOf(line: Line): Lever[] {
  return [...line.settings.values()].map((s) => ({
    setting: s.name,
    meaning: s.meaning,
    acts: s.acts,
    low: s.low,
    high: s.high,
  }));
}

/**
 * The recipe all levers are measured from: the first one stated on this line, else the first run with settings. Null when
 * the book has neither.
 */
export function referenceRecipe(line: Line, ledger: Ledger): { settings: Settings; recipe: string } | null {
  let best: { seq: number; steps: readonly StepSettings[]; recipe: string } | null = null;
  for (const chamber of line.chambers.keys())
    for (const event of chamberRecord(ledger, chamber).timeline) {
      if (event.kind !== "version" && event.kind !== "run") continue;
      const steps = event.kind === "version" ? event.steps : event.data.steps;
      // A stated recipe comes before any run, whatever the order they were entered in.
      const rank = event.seq + (event.kind === "run" ? 1e9 : 0);
      if (best && best.seq <= rank) continue;
      const settings = canonicalSettings(line, steps);
      if (
        leversOf(line).some(
          (l) =>
            !settings.has(l.setting) &&
            (l.meaning === "time" || l.meaning === "silane" || l.meaning === "ammonia" || l.meaning === "belt_speed"),
        )
      )
        continue;
      best = { seq: rank, steps, recipe: event.recipe };
    }
  return best ? { settings: canonicalSettings(line, best.steps), recipe: best.recipe } : null;
}

export function learnOptions(
  line: Line,
  reference: { settings: Settings; recipe: string },
  optics: FilmOptics | null,
  gauge: Bias | null = null,
): LearnOptions {
  const goal = goalOf(line, reference.recipe);
  return {
    levers: leversOf(line),
    reference: reference.settings,
    aim: { index: goal.index?.value ?? null, thicknessNm: goal.thicknessNm?.value ?? null },
    facet: line.wafer.facetFactor,
    minimumOf: optics?.minimumOf ?? null,
    weightedOf: optics?.weightedOf ?? null,
    ...(gauge && { gauge }),
    ...(line.priors && { priors: line.priors }),
  };
}
