/**
 * Two charts of what the model did not expect. Every reading is turned into a standard normal value by the model's own
 * predictive law (its quantile in the whole mixture, not a distance in one Gaussian's sd): independent and standard normal
 * while the model holds, even under feedback. On these: a two-sided cumulative sum an output, the alarm that the model no
 * longer fits; and the band of +-3, counted as plain information. A doubted reading counts in neither sum.
 */
import { cusum, falseAlarmsPerRun, normalQuantile, SLOW_SHIFT, SURPRISE_BAND } from "../../engine/index.ts";
import type { ChamberModel } from "../chamber-model.ts";
import { type TrackedRun, trackRecord } from "../track-record.ts";

export type Output = "index" | "thickness";

export interface SlowShift {
  name: "slow_shift";
  output: Output;
  /** -1: readings come lower than expected. */
  sign: -1 | 1;
  /** The first reading of the sum, the one that took it past the limit, and how many since that one. */
  onsetEntry: number;
  crossedEntry: number;
  readings: number;
  readingsSinceCrossed: number;
  /** The sum after the last reading, in standard deviations, and the limit it is past. */
  sum: number;
  limit: number;
  /** Mean standardised surprise since the onset. */
  meanSurprise: number;
}

/** The sums start so many measured runs back, or at the last service: from there they are as good as old. */
export const slowShiftMemory = 60;
const doubted = 0.5;
const outputs: readonly Output[] = ["index", "thickness"];

/** A reading as a standard normal value if the model holds; null where it was not read. */
export function standardised(run: TrackedRun, output: Output): number | null {
  const rank = output === "index" ? run.rankIndex : run.rankThickness;
  // The ends are where the law's tail has no digits left: 1e-15 is 7.9 standard deviations.
  return rank === null ? null : normalQuantile(Math.min(Math.max(rank, 1e-15), 1 - 1e-15));
}

/** Sums past their limit after the last reading, one an output at most. `record` is the model's, of slowShiftMemory runs or more. */
export function slowShifts(model: ChamberModel, record = trackRecord(model, slowShiftMemory)): SlowShift[] {
  const kept = new Set(entriesSinceService(model));
  const runs = record.slice(-slowShiftMemory).filter((run) => kept.has(run.entry) && run.suspect <= doubted);
  return outputs.flatMap((output) => {
    const read = runs.flatMap((run) => {
      const z = standardised(run, output);
      return z === null ? [] : [{ entry: run.entry, z }];
    });
    if (read.length === 0) return [];
    const values = read.map((r) => r.z);
    const { up, down } = cusum(values, { target: 0, ...SLOW_SHIFT });
    const last = values.length - 1;
    const [sums, sign] = up[last] >= down[last] ? ([up, 1] as const) : ([down, -1] as const);
    if (sums[last] <= SLOW_SHIFT.h) return [];
    let first = last;
    while (first > 0 && sums[first - 1] > 0) first--;
    let crossed = last;
    while (crossed > first && sums[crossed - 1] > SLOW_SHIFT.h) crossed--;
    const since = values.slice(first);
    return [
      {
        name: "slow_shift" as const,
        output,
        sign,
        onsetEntry: read[first].entry,
        crossedEntry: read[crossed].entry,
        readings: since.length,
        readingsSinceCrossed: last - crossed,
        sum: sums[last],
        limit: SLOW_SHIFT.h,
        meanSurprise: since.reduce((a, b) => a + b, 0) / since.length,
      },
    ];
  });
}

function entriesSinceService(model: ChamberModel): number[] {
  const { events } = model.log;
  const service = events.findLastIndex((e) => e.kind === "service");
  return events.slice(service + 1).map((e) => e.entry);
}

/** False alarms of slow_shift a month in one chamber, index and thickness each with a sum, at so many measured runs a month. */
export function falseAlarmsPerMonth(runsPerMonth: number): number {
  perRun ??= outputs.length * falseAlarmsPerRun(SLOW_SHIFT);
  return perRun * runsPerMonth;
}

let perRun: number | null = null;

export interface Surprises {
  /** Readings counted, index and thickness each one. */
  readings: number;
  /** Those outside +-3, in order. */
  outside: { entry: number; output: Output; standardised: number }[];
  /** How many were to be expected outside if the model holds. */
  expected: number;
}

/** Readings outside the band of +-3 of their own predictive law. Bad ones count: the law knows that some readings are bad. */
export function surprisesOf(record: readonly TrackedRun[]): Surprises {
  const outside: Surprises["outside"] = [];
  let readings = 0;
  for (const run of record)
    for (const output of outputs) {
      const z = standardised(run, output);
      if (z === null) continue;
      readings++;
      if (Math.abs(z) > SURPRISE_BAND.width) outside.push({ entry: run.entry, output, standardised: z });
    }
  return { readings, outside, expected: readings * falseAlarmsPerRun(SURPRISE_BAND) };
}
