/** The charts of standardised surprises: what they promise, that they keep it, and that they find a creep. */
import { describe, expect, it } from "vitest";
import { falseAlarmsPerMonth, slowShifts, surprisesOf, type TrackedRun, trackRecord } from "../../calibration/index.ts";
import { normalCdf, random } from "../../engine/index.ts";
import { runAndLog, type VirtualLine, virtualLine } from "./virtual-line.ts";

/** A record whose readings fall where standard normal values say. */
function recordOf(index: readonly number[], suspect: (i: number) => number = () => 0): TrackedRun[] {
  return index.map((z, i) => ({
    entry: i,
    k: i,
    index: 2,
    thicknessNm: null,
    expectedIndex: { mean: 2, sd: 0.01 },
    expectedThickness: { mean: 80, sd: 1 },
    surpriseIndex: z,
    surpriseThickness: null,
    rankIndex: normalCdf(z),
    rankThickness: null,
    suspect: suspect(i),
    step: 0,
  }));
}

const line = virtualLine("slow", [{ name: "A1", runs: 60 }], { cycle: 30 });
/** The model only says where services lie; 60 entries from 0 on belong to it. */
const model = (() => {
  const renumbered = virtualLine("slow", [{ name: "A1", runs: 1 }]);
  const [chamber] = renumbered.chambers;
  const [run] = chamber.events;
  chamber.events.splice(0, 1, ...Array.from({ length: 60 }, (_, entry) => ({ ...run, entry })));
  return renumbered.model().chamber("A1");
})();

describe("the cumulative sum", () => {
  it("promises two outputs' worth of one alarm in some 370 values a run", () => {
    // Average run length of the two-sided sum with k 0.5, h 4.77: 370, from tables of D. M. Hawkins (1993), from memory.
    expect(falseAlarmsPerMonth(1)).toBeCloseTo(2 / 370, 4);
    expect(falseAlarmsPerMonth(90)).toBeCloseTo(90 * falseAlarmsPerMonth(1), 12);
  });

  it("finds a shift of one standard deviation, with its onset, its way and the reading that took it past the limit", () => {
    const record = recordOf([...Array(10).fill(-0.4), ...Array(10).fill(-1)]);
    const [found] = slowShifts(model, record);
    // -1 adds 0.5 a reading: past 4.77 with the tenth.
    expect(found).toMatchObject({ output: "index", sign: -1, onsetEntry: 10, crossedEntry: 19, readings: 10 });
    expect(found.sum).toBeCloseTo(5, 9);
    expect(found.readingsSinceCrossed).toBe(0);
    expect(found.meanSurprise).toBeCloseTo(-1, 9);
    expect(slowShifts(model, record.slice(0, 19))).toEqual([]);
  });

  it("leaves doubted readings out, and ends when the readings come back", () => {
    expect(
      slowShifts(
        model,
        recordOf(Array(20).fill(1), () => 0.9),
      ),
    ).toEqual([]);
    const back = recordOf([...Array(11).fill(1), ...Array(4).fill(0)]);
    expect(slowShifts(model, back.slice(0, 11))).toHaveLength(1);
    expect(slowShifts(model, back)).toEqual([]);
  });

  it("starts anew at a service", () => {
    const [chamber] = line.chambers;
    const creep: VirtualLine["chambers"][number]["events"] = [...chamber.events];
    const record = recordOf(Array(60).fill(1)).map((r, i) => ({
      ...r,
      entry: creep.filter((e) => e.kind === "run")[i].entry,
    }));
    expect(slowShifts(line.model().chamber("A1"), record)).toHaveLength(1);
    chamber.events.splice(-3, 0, { kind: "service", entry: -1 });
    expect(slowShifts(line.model().chamber("A1"), record)).toEqual([]);
    chamber.events.splice(0, chamber.events.length, ...creep);
  });

  it("keeps its promise on independent values", () => {
    const source = random("in control");
    let alarms = 0;
    let values = 0;
    // Chains of 60, as the memory is, and whether the alarm is on at their end.
    for (let i = 0; i < 400; i++) {
      const found = slowShifts(model, recordOf(Array.from({ length: 60 }, () => source.normal())));
      alarms += found.length;
      values++;
    }
    // 0.8 % of 4000 such chains when written; 400 of them: 3 expected, 12 would be four standard deviations more.
    expect(alarms / values).toBeLessThan(0.03);
  });

  it("finds a time base that creeps by 0.4 % a run on a virtual chamber", () => {
    const creeping = virtualLine("creep", [{ name: "A1", runs: 40 }], { cycle: 100 });
    const [chamber] = creeping.chambers;
    const { start } = creeping.world;
    for (let i = 1; i <= 25; i++) {
      runAndLog(chamber, new Map(start).set("time", (start.get("time") as number) * (1 - 0.004 * i)));
      const run = chamber.events.at(-1);
      if (run?.kind === "run") chamber.events[chamber.events.length - 1] = { ...run, settings: start };
    }
    const found = slowShifts(creeping.model().chamber("A1"));
    expect(found.map((f) => [f.output, f.sign])).toEqual([["thickness", -1]]);
  });
});

describe("the band", () => {
  it("counts readings outside three standard deviations of their own law beside what it promises", () => {
    const found = surprisesOf(recordOf([0, 2.9, 3.1, -4, 1]));
    expect(found.readings).toBe(5);
    expect(found.outside.map((o) => o.entry)).toEqual([2, 3]);
    // Two tails of the standard normal law beyond 3: 0.0026998.
    expect(found.expected).toBeCloseTo(5 * 0.0026998, 6);
  });

  it("counts a gross slip on a virtual chamber and little else", () => {
    const record = trackRecord(line.model().chamber("A1"));
    expect(surprisesOf(record).outside.length).toBeLessThan(3);
    expect(surprisesOf(record).readings).toBe(120);
  });
});
