/** Replaying a correction: the corrected entry takes the place of the wrong one, and what rested on it is marked. */
import type { Problem } from "../../engine/index.ts";
import { corrected } from "./corrections.ts";
import type { Entry, EntryData } from "./entries.ts";
import { type About, markCorrected } from "./late.ts";
import type { Ledger } from "./ledger.ts";
import {
  addReading,
  chamberFor,
  dropReading,
  gaugeReading,
  newRun,
  type PlainEntry,
  placeRun,
  plainEvent,
} from "./placing.ts";
import { insertByTime } from "./timeline.ts";

/** Every correction made to the entry so far counts, in order. Returns a problem, and does nothing, where it cannot be. */
export function replayCorrection(ledger: Ledger, entry: Entry<"correct">): Problem | null {
  const target = ledger.entries[entry.data.entry];
  const made = [...(ledger.corrections.get(entry.data.entry) ?? []), entry.seq];
  const fields = made.map((seq) => (ledger.entries[seq] as Entry<"correct">).data.fields);
  const result = corrected(target, entry.data.entry, fields);
  if ("problem" in result) return result.problem;
  const { original, at } = result;
  if (original.kind === "reading" && !ledger.runs.has((result.data as EntryData["reading"]).run)) {
    return { code: "no-such-run", message: `the correction in entry ${entry.seq} names a run that does not exist` };
  }
  ledger.corrections.set(original.seq, made);
  const about: About[] = [];
  const ofRun = (run: number | undefined): void => {
    const known = ledger.runs.get(run ?? -1);
    if (known) about.push({ chamber: known.chamber, atMs: known.atMs, run: known.seq });
  };
  if (original.kind === "reading") {
    ofRun(ledger.laterReadings.get(original.seq));
    dropReading(ledger, original.seq);
    addReading(ledger, { ...original, at }, result.data as EntryData["reading"]);
    ofRun((result.data as EntryData["reading"]).run);
  } else if (original.kind === "gauge") {
    const place = ledger.gaugeReadings.findIndex((reading) => reading.seq === original.seq);
    for (const { atMs } of ledger.gaugeReadings.splice(place, place < 0 ? 0 : 1)) about.push({ chamber: null, atMs });
    insertByTime(ledger.gaugeReadings, gaugeReading(original, result.data as EntryData["gauge"], at));
    about.push({ chamber: null, atMs: Date.parse(at) });
  } else {
    for (const record of ledger.chambers.values()) {
      const index = record.timeline.findIndex((event) => event.seq === original.seq);
      if (index < 0) continue;
      const [{ atMs }] = record.timeline.splice(index, 1);
      about.push({ chamber: record.chamber, atMs, run: original.seq });
    }
    const { chamber } = result.data as { chamber: string };
    about.push({ chamber, atMs: Date.parse(at), run: original.seq });
    if (original.kind === "run") {
      const run = newRun(original, result.data as EntryData["run"], at);
      const { later } = ledger.runs.get(original.seq) ?? run;
      run.later = later;
      run.readings = [...run.data.readings, ...later.map((one) => one.reading)];
      run.correctedBy = made;
      placeRun(ledger, run);
    } else {
      const data = result.data as PlainEntry["data"];
      insertByTime(chamberFor(ledger, chamber).timeline, plainEvent(original, data, at));
    }
  }
  markCorrected(ledger, original.seq, about);
  return null;
}
