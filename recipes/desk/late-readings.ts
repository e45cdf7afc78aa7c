/** A reading that came later: joins the run it is of, wherever that stands in the chamber's life. */
import { trackRecord } from "../../calibration/index.ts";
import { Refusal, refuse } from "../../engine/index.ts";
import { formatWhen } from "../line/zoned-time.ts";
import type { AnyEntry, Draft, Reading } from "../record/entries.ts";
import { chamberRecord, extend, type Ledger, replay } from "../record/ledger.ts";
import { keepSpectrum } from "../record/spectra.ts";
import { type RunRecord, runsOf } from "../record/timeline.ts";
import { filmReading } from "./film-readings.ts";
import { type Given, type ReadingGiven, readingsOf } from "./readings-given.ts";
import { one, type Recorded } from "./recording.ts";
import type { Workspace } from "./workspace.ts";
import { type Stamp, write } from "./writing.ts";

export interface LateReadingGiven extends ReadingGiven {
  /** Number of the entry of the run: 118, "118" or "#118". */
  run: Given;
  note?: string;
}

/** The run that `given` names. Refuses `no-such-run`, `not-a-run`, each with what would do. */
export function runNamed(ledger: Ledger, given: Given): RunRecord {
  const text = String(given).trim();
  if (!/^#?\d{1,9}$/.test(text))
    refuse("no-such-run", `"${text}" is not the number of an entry`, { hint: "as in --run 118" });
  const number = Number(text.replace("#", ""));
  const run = ledger.runs.get(number);
  if (run) return run;
  const entry = ledger.entries[number];
  if (!entry)
    return refuse("no-such-run", `there is no entry ${number}`, {
      hint: ledger.entries.length === 0 ? "the book is empty" : `the book ends with entry ${ledger.entries.length - 1}`,
    });
  return refuse("not-a-run", `entry ${number} is a ${entry.kind}, not a run`, { hint: runInstead(ledger, entry) });
}

/** The run somebody probably meant who named another entry. */
function runInstead(ledger: Ledger, entry: AnyEntry): string {
  if (entry.kind === "reading") return `it is a reading of run ${entry.data.run}`;
  if (entry.kind === "correct") return `it corrects entry ${entry.data.entry}`;
  const { chamber } = entry.data as { chamber?: unknown };
  const runs = typeof chamber === "string" ? runsOf(chamberRecord(ledger, chamber).timeline).slice(-3) : [];
  if (runs.length === 0) return "name the entry of the run: recording it printed the number";
  return `the latest runs of ${chamber} are ${runs.map(({ seq }) => seq).join(", ")}`;
}

/**
 * The entries of readings that came later, one a reading, to be made on the ledger as it is under the lock; importing makes
 * them with this too. Refuses `no-such-run`, `not-a-run`, `nothing-read`, and `reading-before-run` when `at` is before it.
 */
export function lateReadingDrafts(
  ledger: Ledger,
  given: { run: Given; readings: readonly Reading[]; note?: string; timeZone: string } & Stamp,
): Draft<"reading">[] {
  const run = runNamed(ledger, given.run);
  const { readings, note, at, by, timeZone } = given;
  if (readings.length === 0)
    refuse("nothing-read", "nothing that was read is given", {
      hint: "--index 2.043 --thickness 84.1nm, --reflectance-minimum 604nm, --weighted-reflectance 2.3%, --sites or --spectrum FILE",
    });
  if (at !== undefined && Date.parse(at) < run.atMs)
    refuse(
      "reading-before-run",
      `the reading is from ${formatWhen(Date.parse(at), timeZone)}, before run ${run.seq} (${formatWhen(run.atMs, timeZone)})`,
      { hint: "--at is when it was read; left out it is now" },
    );
  return readings.map((reading) => ({
    kind: "reading",
    at,
    by,
    data: { run: run.seq, reading, ...(note ? { note } : {}) },
  }));
}

/**
 * Records readings of a run that came later. Refuses what `lateReadingDrafts` and `readingsOf` refuse, and `unknown-chamber`
 * for a run of a chamber that line.yaml no longer declares.
 */
export async function recordReading(
  ws: Workspace,
  given: LateReadingGiven,
  how: Stamp & { dryRun?: boolean },
): Promise<Recorded> {
  const readings = readingsOf(ws, given);
  const { run: named, note, spectrum } = given;
  const { timeZone } = ws.line;
  const before = runNamed(ws.ledger, named);
  ws.chamber(before.chamber);
  const known = before.readings;
  const drafts = lateReadingDrafts(ws.ledger, { run: named, readings, note, timeZone, ...how });
  if (spectrum && !how.dryRun) keepSpectrum(ws.folder, ws.ports, spectrum);
  const written = await write(
    ws,
    (ledger) => lateReadingDrafts(ledger, { run: named, readings, note, timeZone, at: how.at, by: how.by }),
    how,
  );
  if (readings.some((reading) => known.some((other) => same(reading, other))))
    written.notices.push(
      `Run ${before.seq} already had just this reading; both count now. If it was entered twice, take one away: coatwright correct.`,
    );
  const ledger = how.dryRun ? withDrafts(ws, drafts) : ws.ledger;
  return one(ws, written, sentenceOf(ws, ledger, before.seq, readings));
}

const values = [
  "gauge",
  "on",
  "index",
  "thickness_nm",
  "weighted_reflectance_percent",
  "reflectance_minimum_nm",
] as const;
const same = (a: Reading, b: Reading): boolean =>
  values.every((name) => a[name] === b[name]) && a.spectrum === b.spectrum;

/** The ledger as it would be with these entries. */
function withDrafts(ws: Workspace, drafts: readonly Draft<"reading">[]): Ledger {
  const ledger = replay(ws.ledger.entries);
  const now = new Date(ws.ports.now()).toISOString();
  for (const draft of drafts) {
    const seq = ledger.entries.length;
    const at = draft.at ?? now;
    extend(ledger, {
      v: 1,
      seq,
      at,
      entered: now,
      by: "",
      kind: "reading",
      data: draft.data,
      prev: "",
      hash: `${seq}`,
    });
  }
  return ledger;
}

/** "Run 118 of A2: 84.1 nm, 1.2 below what was expected of it: within noise." */
function sentenceOf(ws: Workspace, ledger: Ledger, number: number, readings: readonly Reading[]): string {
  const run = ledger.runs.get(number);
  const whose = `Run ${number} of ${run?.chamber}`;
  const film = readings.some((one) => one.on === "polished" && (one.index ?? one.thickness_nm) !== undefined);
  if (!run || !film) return `${whose}: kept with it; no film was measured on a witness.`;
  const together = filmReading(ws.line, run.readings);
  const count = (key: "index" | "thickness_nm") =>
    run.readings.filter((one) => one.on === "polished" && one[key] !== undefined).length;
  const said = [
    word(together?.index ?? null, "index", count("index"), expectedOf(ws, ledger, run)?.index),
    word(together?.thicknessNm ?? null, "nm", count("thickness_nm"), expectedOf(ws, ledger, run)?.thickness),
  ].filter((one) => one !== null);
  const judged = said.filter((one) => one.within !== null);
  const verdict =
    judged.length === 0
      ? "; nothing was expected of it yet."
      : judged.every((one) => one.within)
        ? ": within noise."
        : ": outside the 95 % interval, a surprise.";
  return `${whose}: ${said.map((one) => one.text).join("; ")}${verdict}`;
}

interface Expected {
  /** Read minus expected, and the sd of that. */
  miss: number;
  sd: number;
}

function word(value: number | null, unit: "index" | "nm", count: number, expected: Expected | undefined) {
  if (value === null || count === 0) return null;
  const digits = unit === "nm" ? 1 : 3;
  const shown = unit === "nm" ? `${value.toFixed(digits)} nm` : `index ${value.toFixed(digits)}`;
  const mean = count > 1 ? ` (mean of ${count} readings)` : "";
  if (!expected) return { text: `${shown}${mean}`, within: null };
  const { miss, sd } = expected;
  const side = `${Math.abs(miss).toFixed(digits)} ${miss < 0 ? "below" : "above"} what was expected of it`;
  return { text: `${shown}${mean}, ${side}`, within: Math.abs(miss) <= 1.96 * sd };
}

/** What the runs before it had led to expect of a run, beside what all its readings say now. */
function expectedOf(ws: Workspace, ledger: Ledger, run: RunRecord): { index?: Expected; thickness?: Expected } | null {
  try {
    const model = (ledger === ws.ledger ? ws.model : ws.learn(ledger))?.chamber(run.chamber);
    if (!model) return null;
    const at = model.runs.findIndex((one) => one.entry === run.seq);
    if (at < 0 || (at === 0 && model.context.sisters.length === 0)) return null;
    const [row] = trackRecord(model, model.runs.length - at);
    const beside = (read: number | null, { mean, sd }: { mean: number; sd: number }) =>
      read === null ? undefined : { miss: read - mean, sd };
    return {
      index: beside(row.index, row.expectedIndex),
      thickness: beside(row.thicknessNm, row.expectedThickness),
    };
  } catch (error) {
    if (error instanceof Refusal) return null; // settings the model cannot use: the reading is still worth keeping
    throw error;
  }
}
