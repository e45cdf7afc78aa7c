/**
 * Alarms in words: the evidence in numbers, since which entry, what to check first, in order, and what an alarm calls for.
 * A person may overrule any of them by its name, for some runs.
 */
import type { CommonMove, Corrected, ReadingMistake, SlowShift, Suspicion } from "../../calibration/index.ts";
import { type AlarmName, firstChecks } from "./alarm-checks.ts";
import { asIndex, asNm, asPercent, list, runsWord } from "./reasons.ts";

export interface Alarm {
  /** The name an override is given for. */
  name: AlarmName;
  /**
   * stop: something is broken likelier than not, so nothing is proposed. ask: one more reading decides. tell: a reading
   * that moves nothing, or a shift that one more reading has confirmed: said, and no more.
   */
  calls: "stop" | "ask" | "tell";
  /** True when it must stop proposals. */
  certain: boolean;
  sentence: string;
  checks: string[];
  /** The run whose reading it speaks of, or the first one it speaks of. */
  entry: number | null;
}

/** What calibration found in one chamber. */
export interface AlarmEvidence {
  suspicions: readonly Suspicion[];
  allMoved: CommonMove | null;
  slowShifts: readonly SlowShift[];
  mistakes: readonly ReadingMistake[];
  /** False alarms a month that slow_shift promises at this chamber's own rate of measured runs; null where that is not known. */
  falseAlarmsAMonth: number | null;
  /** A value read of a run as it was typed, and the entry that holds it: the run's own, or a reading that came later. */
  typed(runEntry: number, field: Corrected["field"]): { entry: number; value: number } | null;
}

/** From this posterior probability on a suspicion stops proposals; from the lower one a further reading is asked for. */
const stopAt = 0.9;
const askAt = 0.3;

const alarm = (
  name: AlarmName,
  calls: Alarm["calls"],
  sentence: string,
  checks: string[],
  entry: number | null,
): Alarm => ({ name, calls, certain: calls === "stop", sentence: `${name}: ${sentence}`, checks, entry });

/** All alarms of a chamber that nobody overruled, those that stop first. */
export function alarmsOf(found: AlarmEvidence, overridden: ReadonlySet<string>): Alarm[] {
  const common = commonAlarm(found.allMoved);
  const blamed = common?.certain === true && !overridden.has(common.name);
  // One reading that a mistake explains better is that mistake, and no fault to ask about.
  const suspected = found.suspicions.filter(
    (s) =>
      s.runsSince > 1 ||
      !found.mistakes.some((m) => m.entry === s.onsetEntry && m.probability > s.probability && !overridden.has(m.name)),
  );
  const out = [
    ...(common ? [common] : []),
    // A cause that all chambers share takes the blame before any of its own.
    ...(blamed ? [] : alarmsFrom(suspected, overridden)),
    ...(blamed ? [] : found.slowShifts.map((shift) => slowAlarm(shift, found.falseAlarmsAMonth))),
    ...found.mistakes.map((mistake) => mistakeAlarm(mistake, found)),
  ];
  const rank: Alarm["calls"][] = ["stop", "ask", "tell"];
  return out.filter((a) => !overridden.has(a.name)).sort((a, b) => rank.indexOf(a.calls) - rank.indexOf(b.calls));
}

/**
 * Shifts of index or rate at once. One reading on its own asks and never stops, but for an index right after a clean or
 * service: a wrong wafer or a slip reads like a rate gone wrong, and nothing is lost by the second reading.
 */
export function alarmsFrom(found: readonly Suspicion[], overridden: ReadonlySet<string>): Alarm[] {
  return found
    .filter((s) => s.probability >= askAt && !overridden.has(s.name))
    .map((s) => {
      const byIndex = s.name === "index_low" || s.name === "index_high";
      const enough = s.runsSince > 1 || (byIndex && s.onsetKind !== "run");
      const sure = s.probability >= stopAt && enough;
      const since =
        s.onsetKind === "run" ? `since entry ${s.onsetEntry}` : `since the ${s.onsetKind} (entry ${s.onsetEntry})`;
      const index = `index ${Math.abs(s.indexMiss).toFixed(3)} ${s.indexMiss < 0 ? "below" : "above"}`;
      const rate = `rate ${asMiss(s.rateMiss)} ${s.rateMiss < 0 ? "below" : "above"}`;
      const evidence = byIndex
        ? `${index} what was expected ${since}, ${rate} it`
        : `${rate} what was expected ${since}, ${index} it`;
      return alarm(
        s.name,
        sure ? "stop" : "ask",
        `${evidence} (${measured(s.runsSince)}), more than cleans do: ${asPercent(s.probability)} a fault rather than an offset.`,
        firstChecks[s.name],
        s.onsetEntry,
      );
    });
}

const asMiss = (ln: number) => `${(100 * Math.abs(Math.expm1(ln))).toFixed(1)} %`;
const measured = (runs: number) => `${runs} measured run${runs === 1 ? "" : "s"}`;

function commonAlarm(move: CommonMove | null): Alarm | null {
  if (!move || move.probability < askAt) return null;
  const { index, lnThickness } = move;
  const chambers = move.chambers.map((c) => `${c.chamber} (${runsWord(c.runs)})`);
  const by = [
    `index ${index.mean < 0 ? "lower" : "higher"} by ${asIndex(Math.abs(index.mean))} (sd ${asIndex(index.sd)})`,
    `thickness ${lnThickness.mean < 0 ? "lower" : "higher"} by ${asMiss(lnThickness.mean)} (sd ${asMiss(lnThickness.sd)})`,
  ].join(", ");
  const every = move.chambers.every((c) => c.runs > 1);
  return alarm(
    "all_moved",
    move.probability >= stopAt ? "stop" : "ask",
    `${list(chambers)} moved together since entry ${move.onsetEntry}: ${by}. ${asPercent(move.probability)} one cause they share, a gauge or the gas supply, rather than the chambers${every ? "" : "; not all of them have two readings yet"}.`,
    firstChecks.all_moved,
    move.onsetEntry,
  );
}

function slowAlarm(shift: SlowShift, aMonth: number | null): Alarm {
  const way = shift.sign < 0 ? "lower" : "higher";
  const promise =
    aMonth === null
      ? ""
      : ` With nothing wrong, such an alarm comes ${aMonth.toFixed(2)} times a month at this chamber's rate of measured runs.`;
  return alarm(
    "slow_shift",
    shift.readingsSinceCrossed === 0 ? "ask" : "tell",
    `${shift.output} has come ${way} than expected since entry ${shift.onsetEntry} (${shift.readings} readings, ${Math.abs(shift.meanSurprise).toFixed(1)} standard deviations on average; cumulative sum ${shift.sum.toFixed(1)}, limit ${shift.limit}): the model no longer fits.${promise}`,
    firstChecks.slow_shift,
    shift.onsetEntry,
  );
}

const mistakeWords: Record<ReadingMistake["name"], (m: ReadingMistake) => string> = {
  unit_slip: () => "a slip of units or of the decimal point",
  swapped_rows: (m) => `exchanged with the reading of entry ${m.other?.entry} (${m.other?.chamber})`,
  wrong_wafer: () => "the wrong kind of wafer, textured for polished or the other way",
};

function mistakeAlarm(m: ReadingMistake, found: AlarmEvidence): Alarm {
  const film = (index: number | null, nm: number | null) =>
    [index === null ? null : `index ${asIndex(index)}`, nm === null ? null : `${asNm(nm)} nm`]
      .filter(Boolean)
      .join(", ");
  const minimum = m.corrected.some((c) => c.field === "reflectanceMinimumNm");
  const evidence = minimum
    ? `the reflectance minimum of entry ${m.entry} lies where no film has one`
    : `entry ${m.entry} reads ${film(m.read.index, m.read.thicknessNm)} where ${film(m.expected.index, m.expected.thicknessNm)} was expected`;
  return alarm(
    m.name,
    "tell",
    `${evidence}: ${asPercent(m.probability)} ${mistakeWords[m.name](m)}. The reading is left aside until it is corrected.`,
    m.name === "wrong_wafer"
      ? [
          `Read the polished witness again and add it: coatwright record reading --run ${m.entry} --index .. --thickness ..`,
          `If the wafer read was a textured one, say so: coatwright correct ${found.typed(m.entry, "thicknessNm")?.entry ?? m.entry} on=cell --reason TEXT`,
        ]
      : ["Compare with the gauge's own record.", ...corrections(m, found)],
    m.entry,
  );
}

const typedName: Record<Corrected["field"], { name: string; unit: string }> = {
  index: { name: "index", unit: "" },
  thicknessNm: { name: "thickness", unit: "nm" },
  reflectanceMinimumNm: { name: "reflectance_minimum", unit: "nm" },
};

/** The commands that would set the values right, one an entry: from what was typed, before any correction for the gauge. */
function corrections(m: ReadingMistake, { typed }: AlarmEvidence): string[] {
  const fields = new Map<number, string[]>();
  for (const { entry, field, value, from, over } of m.corrected) {
    const holder = typed(entry, field)?.entry ?? entry;
    const source = typed(from, field);
    const { name, unit } = typedName[field];
    const words = `${name}=${shortly(source ? source.value / over : value)}${unit}`;
    fields.set(holder, [...(fields.get(holder) ?? []), words]);
  }
  return [...fields].map(([entry, words]) => `coatwright correct ${entry} ${words.join(" ")} --reason TEXT`);
}

/** A value moved between entries or by a power of ten keeps its digits, without those that rounding added. */
const shortly = (v: number) => String(Number(v.toPrecision(7)));
