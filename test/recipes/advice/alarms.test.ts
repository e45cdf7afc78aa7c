/** Alarms in words: evidence, onset, checks, what each calls for, who takes the blame, and that each can be overruled by name. */
import { describe, expect, it } from "vitest";
import type { CommonMove, ReadingMistake, SlowShift, Suspicion } from "../../../calibration/index.ts";
import { alarmNames, firstChecks } from "../../../recipes/advice/alarm-checks.ts";
import { type AlarmEvidence, alarmsFrom, alarmsOf } from "../../../recipes/advice/alarms.ts";

const suspicion = (over: Partial<Suspicion> = {}): Suspicion => ({
  name: "rate_low",
  probability: 0.97,
  onsetEntry: 41,
  onsetKind: "run",
  runsSince: 2,
  indexMiss: 0.002,
  rateMiss: Math.log(0.88),
  ...over,
});
const common = (over: Partial<CommonMove> = {}): CommonMove => ({
  name: "all_moved",
  probability: 0.98,
  onsetEntry: 50,
  chambers: [
    { chamber: "A1", runs: 2 },
    { chamber: "A2", runs: 3 },
  ],
  index: { mean: -0.021, sd: 0.002 },
  lnThickness: { mean: 0.012, sd: 0.004 },
  ...over,
});
const slow = (over: Partial<SlowShift> = {}): SlowShift => ({
  name: "slow_shift",
  output: "thickness",
  sign: -1,
  onsetEntry: 30,
  crossedEntry: 40,
  readings: 11,
  readingsSinceCrossed: 0,
  sum: 5.2,
  limit: 4.77,
  meanSurprise: -0.97,
  ...over,
});
const slip: ReadingMistake = {
  name: "unit_slip",
  probability: 0.999,
  entry: 44,
  other: null,
  read: { index: 2.061, thicknessNm: 882 },
  expected: { index: 2.06, thicknessNm: 88 },
  corrected: [{ entry: 44, field: "thicknessNm", value: 88.31, from: 44, over: 10 }],
};
const swapped: ReadingMistake = {
  ...slip,
  name: "swapped_rows",
  entry: 45,
  other: { chamber: "A2", entry: 46 },
  corrected: [
    { entry: 45, field: "index", value: 2.05, from: 46, over: 1 },
    { entry: 45, field: "thicknessNm", value: 80.1, from: 46, over: 1 },
    { entry: 46, field: "thicknessNm", value: 88.2, from: 45, over: 1 },
  ],
};
const wrong: ReadingMistake = { ...slip, name: "wrong_wafer", entry: 47, corrected: [] };

const found = (over: Partial<AlarmEvidence> = {}): AlarmEvidence => ({
  suspicions: [],
  allMoved: null,
  slowShifts: [],
  mistakes: [],
  falseAlarmsAMonth: 0.163,
  typed: () => null,
  ...over,
});
const nobody: ReadonlySet<string> = new Set();
const names = (evidence: AlarmEvidence, overruled = nobody) => alarmsOf(evidence, overruled).map((a) => a.name);

describe("a shift at once", () => {
  it("stops with two readings, and says by how much both outputs are off, since which entry, and how sure it is", () => {
    const [alarm] = alarmsFrom([suspicion()], nobody);
    expect(alarm).toMatchObject({ name: "rate_low", calls: "stop", certain: true, entry: 41 });
    expect(alarm.sentence).toBe(
      "rate_low: rate 12.0 % below what was expected since entry 41, index 0.002 above it (2 measured runs), more than cleans do: 97 % a fault rather than an offset.",
    );
    expect(alarm.checks[0]).toMatch(/generator/);
    expect(alarm.checks[1]).toMatch(/pressure gauge/);
    expect(alarm.checks[2]).toMatch(/time base/);
    expect(alarm.checks[3]).toMatch(/boat/);
  });

  it("asks for another reading where one is all there is, but stops for an index right after a clean", () => {
    const calls = (over: Partial<Suspicion>) => alarmsFrom([suspicion({ runsSince: 1, ...over })], nobody)[0].calls;
    expect(calls({})).toBe("ask");
    expect(calls({ onsetKind: "clean" })).toBe("ask");
    expect(calls({ name: "index_low" })).toBe("ask");
    expect(calls({ name: "index_low", onsetKind: "clean" })).toBe("stop");
  });

  it("is not asked about where a mistake explains its only reading better", () => {
    const one = suspicion({ runsSince: 1, onsetEntry: 47, probability: 0.6 });
    expect(names(found({ suspicions: [one], mistakes: [wrong] }))).toEqual(["wrong_wafer"]);
    expect(names(found({ suspicions: [one], mistakes: [wrong] }), new Set(["wrong_wafer"]))).toEqual(["rate_low"]);
    expect(names(found({ suspicions: [{ ...one, runsSince: 2 }], mistakes: [wrong] }))).toContain("rate_low");
  });
});

describe("all chambers at once", () => {
  it("take the blame before the chamber's own alarms, with the shared shift and the reference wafer first", () => {
    const alarms = alarmsOf(found({ suspicions: [suspicion()], allMoved: common(), slowShifts: [slow()] }), nobody);
    expect(alarms.map((a) => [a.name, a.calls])).toEqual([["all_moved", "stop"]]);
    expect(alarms[0].sentence).toMatch(/A1 \(2 runs\) and A2 \(3 runs\) moved together since entry 50/);
    expect(alarms[0].sentence).toMatch(/index lower by 0\.021 \(sd 0\.002\), thickness higher by 1\.2 %/);
    expect(alarms[0].checks[0]).toMatch(/reference wafer/);
  });

  it("leave the blame where it was while they are only suspected, and when a person has overruled them", () => {
    const evidence = found({ suspicions: [suspicion()], allMoved: common({ probability: 0.5 }) });
    expect(names(evidence)).toEqual(["rate_low", "all_moved"]);
    const sure = found({ suspicions: [suspicion()], allMoved: common() });
    expect(names(sure, new Set(["all_moved"]))).toEqual(["rate_low"]);
  });
});

describe("a slow shift", () => {
  it("asks when it is new, is told once a reading has confirmed it, and promises its false alarms", () => {
    const [alarm] = alarmsOf(found({ slowShifts: [slow()] }), nobody);
    expect(alarm.calls).toBe("ask");
    expect(alarm.sentence).toMatch(
      /thickness has come lower than expected since entry 30 \(11 readings, 1\.0 standard/,
    );
    expect(alarm.sentence).toMatch(/sum 5\.2, limit 4\.77/);
    expect(alarm.sentence).toMatch(/0\.16 times a month/);
    expect(alarmsOf(found({ slowShifts: [slow({ readingsSinceCrossed: 1 })] }), nobody)[0].calls).toBe("tell");
  });
});

describe("a mistake of reading", () => {
  it("never stops nor asks, and gives the command that sets right what was typed, in the entry that holds it", () => {
    // The reading came later, as entry 52, and was typed 883.1; the gauge's correction is no part of what to type.
    const typed: AlarmEvidence["typed"] = (entry) => (entry === 44 ? { entry: 52, value: 883.1 } : null);
    const [alarm] = alarmsOf(found({ mistakes: [slip], typed }), nobody);
    expect(alarm.calls).toBe("tell");
    expect(alarm.sentence).toMatch(/entry 44 reads index 2\.061, 882\.0 nm where index 2\.060, 88\.0 nm was expected/);
    expect(alarm.checks).toContain("coatwright correct 52 thickness=88.31nm --reason TEXT");
  });

  it("gives one command an entry where two were exchanged, and none where the value cannot be known", () => {
    const [alarm] = alarmsOf(found({ mistakes: [swapped] }), nobody);
    expect(alarm.checks.slice(1)).toEqual([
      "coatwright correct 45 index=2.05 thickness=80.1nm --reason TEXT",
      "coatwright correct 46 thickness=88.2nm --reason TEXT",
    ]);
    const [other] = alarmsOf(found({ mistakes: [wrong] }), nobody);
    expect(other.checks.join(" ")).toMatch(/record reading --run 47.*correct 47 on=cell/);
  });
});

describe("every alarm", () => {
  const shifts = (["index_low", "index_high", "rate_low", "rate_high"] as const).map((name) => suspicion({ name }));
  const everything = found({
    suspicions: shifts,
    allMoved: common({ probability: 0.5 }),
    slowShifts: [slow()],
    mistakes: [slip, swapped, wrong],
  });

  it("is overruled by its own name and by no other", () => {
    const all = names(everything);
    // past_anchor comes about only where a change is wished for: decide.test.ts and alarms-desk.test.ts.
    expect([...all, "past_anchor"].sort()).toEqual([...alarmNames].sort());
    for (const name of all)
      expect(names(everything, new Set([name])).sort()).toEqual(all.filter((n) => n !== name).sort());
  });

  it("starts its sentence with its name, tells its entry, and has checks", () => {
    for (const alarm of alarmsOf(everything, nobody)) {
      expect(alarm.sentence.startsWith(`${alarm.name}: `)).toBe(true);
      expect(alarm.checks.length).toBeGreaterThan(1);
      expect(alarm.entry).not.toBeNull();
      expect(alarm.certain).toBe(alarm.calls === "stop");
    }
    expect(Object.keys(firstChecks)).toHaveLength(alarmNames.length - 3);
  });

  it("comes in the order of what it calls for", () => {
    const calls = alarmsOf(everything, nobody).map((a) => a.calls);
    expect(calls).toEqual([...calls].sort((a, b) => order.indexOf(a) - order.indexOf(b)));
  });
  const order = ["stop", "ask", "tell"];
});
