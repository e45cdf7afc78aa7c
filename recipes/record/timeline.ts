/** A chamber's life as a list of events in the order they happened, and how an event that was entered late gets in. */
import type { EntryData, Reading } from "./entries.ts";
import type { RecipeVersion } from "./versions.ts";

interface EventHead {
  /** Number of the entry. */
  seq: number;
  at: string;
  atMs: number;
  by: string;
}

export interface LaterReading extends EventHead {
  reading: Reading;
}

/** A run with everything read of it since, corrections applied. */
export interface RunRecord extends EventHead {
  kind: "run";
  chamber: string;
  recipe: string;
  /** The entry's data, corrections applied. */
  data: EntryData["run"];
  /** All readings: those entered with the run, then those that came later, in the order entered. */
  readings: Reading[];
  later: LaterReading[];
  /** The entries that corrected this one. */
  correctedBy: number[];
}

export type TimelineEvent =
  | RunRecord
  | (EventHead & { kind: "clean"; what: string | null })
  | (EventHead & { kind: "precoat"; count: number })
  | (EventHead & { kind: "service"; what: string })
  | ({ kind: "version" } & RecipeVersion);

/** Puts an event into a list ordered by (atMs, seq), looking from the end, where it nearly always belongs. */
export function insertByTime<T extends { atMs: number; seq: number }>(list: T[], event: T): void {
  let place = list.length;
  while (place > 0) {
    const before = list[place - 1];
    if (before.atMs < event.atMs || (before.atMs === event.atMs && before.seq < event.seq)) break;
    place--;
  }
  list.splice(place, 0, event);
}

/** Runs of a timeline, in order. */
export function runsOf(timeline: readonly TimelineEvent[]): RunRecord[] {
  return timeline.filter((event) => event.kind === "run");
}

/** Was anything measured of this run? A spectrum kept without a value read from it tells nothing yet. */
export function wasMeasured(run: RunRecord): boolean {
  return run.readings.some(
    (reading) =>
      reading.index !== undefined ||
      reading.thickness_nm !== undefined ||
      reading.reflectance_minimum_nm !== undefined ||
      reading.weighted_reflectance_percent !== undefined,
  );
}
