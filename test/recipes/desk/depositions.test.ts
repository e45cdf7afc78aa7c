/** k counts depositions; precoats, services and late entries take their place in a chamber's life. */
import { describe, expect, it } from "vitest";
import { type ChamberModel, LineModel } from "../../../calibration/index.ts";
import { chamberLogs, learnOptions, referenceRecipe } from "../../../recipes/desk/learn.ts";
import type { EntryData, Kind } from "../../../recipes/record/entries.ts";
import { decidedBefore } from "../../../recipes/record/late.ts";
import { chamberRecord, type Ledger, replay } from "../../../recipes/record/ledger.ts";
import { lineWith, onGoal, stepsFor } from "../../support/desk-line.ts";
import { Bench, steps } from "../../support/ledger-bench.ts";

const { line } = lineWith();
const reading = (index = 2.06, thickness_nm = 88) => [
  { gauge: "ellipsometer", on: "polished" as const, index, thickness_nm },
];

class Life extends Bench {
  constructor() {
    super();
    this.add({ kind: "recipe", data: { chamber: "A2", recipe: "blue", steps: stepsFor(onGoal) } }, -10);
  }
  deposit(more: Partial<EntryData["run"]> = {}, at?: number): number {
    return this.run(0, { steps: stepsFor(onGoal), readings: reading(), ...more }, at);
  }
  event<K extends Extract<Kind, "clean" | "precoat" | "service">>(kind: K, data: EntryData[K], at?: number): number {
    return this.add({ kind, data } as never, at);
  }
}

function modelOf(ledger: Ledger): ChamberModel {
  const reference = referenceRecipe(line, ledger);
  if (!reference) throw new Error("a recipe was stated");
  return new LineModel(chamberLogs(line, ledger), learnOptions(line, reference, null)).chamber("A2");
}
/** Depositions before each measured run since the clean, and after all of them. */
const counted = (life: Life) => {
  const model = modelOf(life.ledger);
  return [...model.runs.map(({ k }) => k), model.k];
};

describe("k", () => {
  it("counts one deposition a run, from the clean on", () => {
    const life = new Life();
    life.deposit();
    life.deposit();
    life.event("clean", { chamber: "A2" });
    life.deposit();
    life.deposit();
    expect(counted(life)).toEqual([0, 1, 0, 1, 2]);
  });

  it("counts --count depositions nobody measured, and gives the reading of a counted entry to its last one", () => {
    const life = new Life();
    life.deposit({ count: 24, readings: [] });
    life.deposit();
    life.deposit({ count: 5 });
    expect(counted(life)).toEqual([24, 29, 30]);
  });

  it("takes the tool's own counter where it is given, and counts on from there", () => {
    const life = new Life();
    life.deposit({ since_clean: 37 });
    life.deposit();
    life.deposit({ since_clean: 100, count: 3 });
    expect(counted(life)).toEqual([36, 37, 99, 100]);
  });

  it("takes the tool's counter from runs without a reading too", () => {
    const life = new Life();
    life.deposit({ since_clean: 50, readings: [] });
    life.deposit();
    expect(counted(life)).toEqual([50, 51]);
  });

  it("counts precoats, which age the chamber, and is not set back by a service", () => {
    const life = new Life();
    life.event("clean", { chamber: "A2" });
    life.event("precoat", { chamber: "A2", count: 3 });
    life.deposit();
    life.event("service", { chamber: "A2", what: "seal" });
    life.deposit();
    expect(counted(life)).toEqual([3, 4, 5]);
  });

  it("ages the chamber as surely by depositions counted as by depositions logged one by one", () => {
    const [one, many] = [new Life(), new Life()];
    for (const life of [one, many]) for (let i = 0; i < 6; i++) life.deposit();
    one.deposit({ count: 30, readings: [] });
    for (let i = 0; i < 30; i++) many.deposit({ readings: [] });
    const [a, b] = [one, many].map((life) => modelOf(life.ledger).quick(onGoal));
    expect(a.index).toBeCloseTo(b.index, 10);
    a.covariance.forEach((v, i) => {
      expect(v).toBeCloseTo(b.covariance[i], 12);
    });
  });
});

describe("a service", () => {
  const sd = (life: Life) => Math.sqrt(modelOf(life.ledger).quick(onGoal).covariance[0]);
  const settled = () => {
    const life = new Life();
    for (let i = 0; i < 20; i++) life.deposit();
    return life;
  };

  it("loosens the chamber's own offset for good, where a clean gives it back", () => {
    const [plain, cleaned, serviced, both] = [settled(), settled(), settled(), settled()];
    cleaned.event("clean", { chamber: "A2" });
    serviced.event("service", { chamber: "A2", what: "silane controller" });
    both.event("service", { chamber: "A2", what: "silane controller" });
    both.event("clean", { chamber: "A2" });
    expect(sd(cleaned)).toBeGreaterThan(sd(plain));
    expect(sd(serviced)).toBeGreaterThan(sd(cleaned));
    // The clean resets the step, never what the service opened: 0.015 in index (calibration/priors.ts).
    expect(sd(both) ** 2 - sd(cleaned) ** 2).toBeGreaterThan(0.8 * 0.015 ** 2);
  });

  it("lets the runs after it say where the chamber is, across the next clean", () => {
    const [kept, opened] = [settled(), settled()];
    opened.event("service", { chamber: "A2", what: "lid" });
    for (const life of [kept, opened]) {
      for (let i = 0; i < 8; i++) life.deposit({ readings: reading(2.09) });
      life.event("clean", { chamber: "A2" });
    }
    const [a, b] = [kept, opened].map((life) => modelOf(life.ledger).quick(onGoal).index);
    expect(b).toBeGreaterThan(a + 0.008);
  });
});

describe("what is entered late", () => {
  it("a clean entered after the runs that followed it makes the book that would have been kept in time", () => {
    const [late, inTime] = [new Life(), new Life()];
    for (let i = 0; i < 6; i++) late.deposit({}, i);
    late.event("clean", { chamber: "A2" }, 2.5);
    for (let i = 0; i < 3; i++) inTime.deposit({}, i);
    inTime.event("clean", { chamber: "A2" }, 2.5);
    for (let i = 3; i < 6; i++) inTime.deposit({}, i);
    expect(counted(late)).toEqual([0, 1, 2, 0, 1, 2, 3]);
    expect(modelOf(late.ledger).quick(onGoal)).toEqual(modelOf(inTime.ledger).quick(onGoal));
  });

  it("so does a service, a precoat, a run", () => {
    const life = new Life();
    life.deposit({}, 1);
    life.deposit({}, 9);
    life.event("precoat", { chamber: "A2", count: 2 }, 5);
    life.event("service", { chamber: "A2", what: "x" }, 4);
    life.deposit({}, 6);
    const kinds = chamberRecord(life.ledger, "A2").timeline.map(({ kind }) => kind);
    expect(kinds).toEqual(["version", "run", "service", "precoat", "run", "run"]);
    expect(counted(life)).toEqual([0, 3, 4, 5]);
  });

  it("marks the proposals and the verdict made on the old history of that chamber, and only those", () => {
    const bench = new Bench();
    bench.run(800, {}, -30);
    const early = bench.propose(800, 820);
    const change = adopted(bench, early);
    bench.add({ kind: "enter", data: { change, read_back: steps(820) } });
    const run = bench.run(820);
    bench.add({ kind: "close", data: { change, verdict: "as expected", expected: {}, got: {}, runs: [run] } });
    const decided = bench.propose(820, 830);
    const text = JSON.stringify(bench.ledger.changes.get(change)?.closed?.got);

    const elsewhere = bench.add({ kind: "clean", data: { chamber: "A1" } }, -20);
    expect(decidedBefore(bench.ledger, [elsewhere])).toEqual([]);
    const present = bench.add({ kind: "clean", data: { chamber: "A2" } });
    expect(decidedBefore(bench.ledger, [present])).toEqual([]);
    const before = bench.add({ kind: "clean", data: { chamber: "A2" } }, -20);
    expect(decidedBefore(bench.ledger, [before])).toEqual([name("p", early), name("p", decided)]);
    const between = bench.add({ kind: "clean", data: { chamber: "A2" } }, 4.5);
    expect(decidedBefore(bench.ledger, [between])).toEqual([name("p", decided), `the verdict on ${name("c", change)}`]);
    const read = bench.add({
      kind: "reading",
      data: { run, reading: { gauge: "ellipsometer", on: "polished", index: 2.05 } },
    });
    expect(decidedBefore(bench.ledger, [read])).toEqual([name("p", decided), `the verdict on ${name("c", change)}`]);
    expect(JSON.stringify(bench.ledger.changes.get(change)?.closed?.got)).toBe(text);
    expect(replay(bench.entries)).toEqual(bench.ledger);
  });

  it("a correction of a run marks the verdict that had looked at it", () => {
    const bench = new Bench();
    bench.run(800, {}, -30);
    const change = adopted(bench, bench.propose(800, 820));
    bench.add({ kind: "enter", data: { change, read_back: steps(820) } });
    const run = bench.run(820);
    bench.add({ kind: "close", data: { change, verdict: "as expected", expected: {}, got: {}, runs: [run] } });
    bench.add({ kind: "correct", data: { entry: run, fields: { index: 2.1 }, reason: "typo" } });
    expect(bench.ledger.changes.get(change)?.closed?.restsOnCorrected).toEqual([run]);
    bench.add({ kind: "correct", data: { entry: 0, fields: { index: 2.1 }, reason: "typo" } });
    expect(bench.ledger.changes.get(change)?.closed?.restsOnCorrected).toEqual([run]);
  });
});

const name = (kind: "p" | "c", seq: number): string => `${kind}-${String(seq).padStart(6, "0")}`;
function adopted(bench: Bench, proposal: number): number {
  return bench.add({
    kind: "adopt",
    data: {
      proposal,
      chamber: "A2",
      recipe: "blue",
      reason: "r",
      before: steps(800),
      after: steps(820),
      predicted: {},
    },
  });
}
