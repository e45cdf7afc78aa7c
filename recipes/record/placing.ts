/** Where the events of a chamber's life go in the ledger: runs, readings that came later, cleans, precoats, services. */
import type { Problem } from "../../engine/index.ts";
import type { Entry, EntryData, Reading } from "./entries.ts";
import { markDecided } from "./late.ts";
import type { ChamberRecord, GaugeReading, Ledger } from "./ledger.ts";
import { insertByTime, type RunRecord, type TimelineEvent } from "./timeline.ts";

/** A chamber's record, made when it is first met. */
export function chamberFor(ledger: Ledger, chamber: string): ChamberRecord {
  const record = ledger.chambers.get(chamber) ?? { chamber, timeline: [], versions: new Map() };
  ledger.chambers.set(chamber, record);
  return record;
}

export function newRun(entry: Entry<"run">, data: EntryData["run"], at: string): RunRecord {
  return {
    kind: "run",
    seq: entry.seq,
    at,
    atMs: Date.parse(at),
    by: entry.by,
    chamber: data.chamber,
    recipe: data.recipe,
    data,
    readings: [...data.readings],
    later: [],
    correctedBy: [],
  };
}

export function placeRun(ledger: Ledger, run: RunRecord): void {
  ledger.runs.set(run.seq, run);
  insertByTime(chamberFor(ledger, run.chamber).timeline, run);
}

export type PlainEntry = Entry<"clean"> | Entry<"precoat"> | Entry<"service">;

export function plainEvent(entry: PlainEntry, data: PlainEntry["data"], at: string): TimelineEvent {
  const common = { seq: entry.seq, at, atMs: Date.parse(at), by: entry.by };
  if (entry.kind === "precoat") return { kind: "precoat", ...common, count: (data as EntryData["precoat"]).count };
  const { what } = data as EntryData["clean"];
  return entry.kind === "clean"
    ? { kind: "clean", ...common, what: what ?? null }
    : { kind: "service", ...common, what: what ?? "" };
}

/** A reading joins its run, wherever that stands in time; what was decided before it was there is marked. */
export function addReading(
  ledger: Ledger,
  entry: Entry<"reading">,
  data: { run: number; reading: Reading },
): Problem | null {
  const run = ledger.runs.get(data.run);
  if (!run) {
    return { code: "no-such-run", message: `entry ${entry.seq} is a reading of run ${data.run}, which does not exist` };
  }
  run.later.push({ seq: entry.seq, at: entry.at, atMs: Date.parse(entry.at), by: entry.by, reading: data.reading });
  run.later.sort((a, b) => a.seq - b.seq);
  run.readings = [...run.data.readings, ...run.later.map((one) => one.reading)];
  ledger.laterReadings.set(entry.seq, data.run);
  markDecided(ledger, entry.seq, run.chamber, run.atMs, run.seq);
  return null;
}

export function dropReading(ledger: Ledger, seq: number): void {
  const run = ledger.runs.get(ledger.laterReadings.get(seq) ?? -1);
  if (!run) return;
  run.later = run.later.filter((one) => one.seq !== seq);
  run.readings = [...run.data.readings, ...run.later.map((one) => one.reading)];
}

export function gaugeReading(entry: Entry<"gauge">, data: EntryData["gauge"], at: string): GaugeReading {
  const { gauge, index = null, thickness_nm: thicknessNm = null } = data;
  return { seq: entry.seq, at, atMs: Date.parse(at), by: entry.by, gauge, index, thicknessNm };
}
