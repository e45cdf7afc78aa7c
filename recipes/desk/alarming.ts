/** What calibration finds amiss in one chamber, gathered for the advice: with moments, run rates and typed values from the book. */
import {
  allMoved,
  type ChamberModel,
  falseAlarmsPerMonth,
  readingMistakes,
  slowShifts,
  suspicions,
} from "../../calibration/index.ts";
import { type Alarm, type AlarmEvidence, alarmsOf } from "../advice/alarms.ts";
import type { Reading } from "../record/entries.ts";
import { chamberRecord } from "../record/ledger.ts";
import { overridesInForce } from "../record/overrides.ts";
import { runsOf, wasMeasured } from "../record/timeline.ts";
import type { Workspace } from "./workspace.ts";

/** Names of the alarms overruled in a chamber now. */
export function overruled(ws: Workspace, chamber: string): Set<string> {
  return new Set(overridesInForce(ws.ledger, chamber, ws.ports.now()).map((o) => o.alarm));
}

export function alarmEvidence(ws: Workspace, model: ChamberModel): AlarmEvidence {
  const { chamber } = model;
  const line = ws.model;
  const aMonth = measuredPerMonth(ws, chamber);
  return {
    suspicions: suspicions(model),
    allMoved: line ? allMoved(line, chamber, (entry) => ws.ledger.runs.get(entry)?.atMs ?? entry) : null,
    slowShifts: slowShifts(model),
    mistakes: line ? readingMistakes(line, chamber) : [],
    falseAlarmsAMonth: aMonth === null ? null : falseAlarmsPerMonth(aMonth),
    typed: (entry, field) => typedValue(ws, entry, field),
  };
}

/** The alarms of a chamber that nobody overruled, but for those that only the wish for a change brings about. */
export function alarmsNow(ws: Workspace, model: ChamberModel): Alarm[] {
  return alarmsOf(alarmEvidence(ws, model), overruled(ws, model.chamber));
}

const dayMs = 86_400_000;
/** The latest stretch a run rate is counted over, and the fewest runs it is told from. */
const countedDays = 90;
const fewestRuns = 10;

/** Measured runs of a chamber a month of 30 days, over its latest 90 days; null with under ten of them. */
export function measuredPerMonth(ws: Workspace, chamber: string): number | null {
  const measured = runsOf(chamberRecord(ws.ledger, chamber).timeline).filter(wasMeasured);
  const last = measured.at(-1);
  if (!last) return null;
  const lately = measured.filter((run) => last.atMs - run.atMs <= countedDays * dayMs);
  const days = (last.atMs - lately[0].atMs) / dayMs;
  return lately.length < fewestRuns || days <= 0 ? null : (30 * (lately.length - 1)) / days;
}

const bookName = {
  index: "index",
  thicknessNm: "thickness_nm",
  reflectanceMinimumNm: "reflectance_minimum_nm",
} as const;

/** The last value of a kind read of a run, as typed, and the entry it is corrected in. */
function typedValue(ws: Workspace, entry: number, field: keyof typeof bookName): ReturnType<AlarmEvidence["typed"]> {
  const run = ws.ledger.runs.get(entry);
  if (!run) return null;
  const name = bookName[field];
  const reads = (r: Reading) => field === "reflectanceMinimumNm" || r.on === "polished";
  const later = run.later.findLast(({ reading }) => reading[name] !== undefined && reads(reading));
  const value = later?.reading[name];
  if (later && value !== undefined) return { entry: later.seq, value };
  const own = run.readings.findLast((reading) => reading[name] !== undefined && reads(reading))?.[name];
  return own === undefined ? null : { entry, value: own };
}
