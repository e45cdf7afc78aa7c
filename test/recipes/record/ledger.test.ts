/** What the book adds up to: orders, recipes in force, late entries, corrections, the basis of proposals. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { correctDraft } from "../../../recipes/record/change-steps.ts";
import { chamberRecord, emptyLedger, extend, proposalOn, replay } from "../../../recipes/record/ledger.ts";
import { overridesInForce } from "../../../recipes/record/overrides.ts";
import { runsOf } from "../../../recipes/record/timeline.ts";
import { lastQualified, recipeInForce, recipesOf } from "../../../recipes/record/versions.ts";
import { Bench, NOON, steps } from "../../support/ledger-bench.ts";

const at = (minutes: number): number => NOON + minutes * 60_000;

describe("the order of a chamber's life", () => {
  it("is that of when things happened, then of the book, whatever the order of entering", () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 0, max: 12 }), { maxLength: 40 }), (minutes) => {
        const bench = new Bench();
        for (const minute of minutes) bench.run(800, {}, minute);
        const seen = chamberRecord(bench.ledger, "A2").timeline.map((event) => [event.atMs, event.seq]);
        const sorted = minutes.map((minute, seq) => [at(minute), seq]).sort(([a, i], [b, j]) => a - b || i - j);
        expect(seen).toEqual(sorted);
      }),
    );
  });

  it("replaying one by one gives the same as replaying all at once", () => {
    const bench = new Bench();
    bench.recipe(800);
    const run = bench.run(805, {}, 1);
    bench.add({ kind: "clean", data: { chamber: "A2" } }, -5);
    bench.add({ kind: "reading", data: { run, reading: { gauge: "r", on: "cell", reflectance_minimum_nm: 604 } } });
    bench.add(correctDraft(bench.ledger, { entry: run, fields: { index: 2.1 }, reason: "typo" }));
    expect(replay(bench.entries)).toEqual(bench.ledger);
    expect(bench.ledger.problems).toEqual([]);
  });

  it("a reading that came later is with its run", () => {
    const bench = new Bench();
    const run = bench.run(800);
    bench.add({ kind: "reading", data: { run, reading: { gauge: "r", on: "cell", reflectance_minimum_nm: 604 } } });
    expect(bench.ledger.runs.get(run)?.readings.map((one) => one.gauge)).toEqual(["ellipsometer", "r"]);
  });

  it("a reading of a run that does not exist is told, and has no effect", () => {
    const bench = new Bench();
    bench.add({ kind: "reading", data: { run: 7, reading: { gauge: "r", on: "cell" } } });
    expect(bench.ledger.problems).toEqual([expect.objectContaining({ code: "no-such-run", row: 1 })]);
  });
});

describe("the recipe in force", () => {
  it("is the one stated last before the time asked about, and a late statement takes its place", () => {
    const bench = new Bench();
    bench.recipe(800, 10);
    bench.recipe(820, 30);
    bench.recipe(810, 20);
    const silaneAt = (minute: number) =>
      recipeInForce(bench.ledger, "A2", "blue", at(minute))?.steps[0].settings["silane"].value ?? null;
    expect([9, 10, 19, 20, 29, 30, 99].map(silaneAt)).toEqual([null, 800, 800, 810, 810, 820, 820]);
  });

  it("falls back to the latest run under that name, and says that nobody stated it", () => {
    const bench = new Bench();
    bench.run(801, {}, 1);
    bench.run(802, { recipe: "dark" }, 2);
    bench.run(803, {}, 3);
    expect(recipeInForce(bench.ledger, "A2", "blue", at(2))).toMatchObject({
      entry: 0,
      stated: false,
      steps: steps(801),
    });
    expect(recipeInForce(bench.ledger, "A2", "blue", at(9))).toMatchObject({ entry: 2, stated: false });
    expect(recipeInForce(bench.ledger, "A2", "grey", at(9))).toBe(null);
    expect(recipesOf(bench.ledger, "A2")).toEqual(["blue", "dark"]);
    bench.recipe(900, 4);
    expect(recipeInForce(bench.ledger, "A2", "blue", at(9))).toMatchObject({ entry: 3, stated: true });
  });

  it("of sisters is their own", () => {
    const bench = new Bench();
    bench.recipe(800, 1);
    bench.recipe(700, 2, "A1");
    expect(recipeInForce(bench.ledger, "A2", "blue", at(9))?.steps).toEqual(steps(800));
  });

  it("the anchor is the last one a person stated, not what changes made of it", () => {
    const bench = new Bench();
    bench.run(790, {}, 0);
    expect(lastQualified(bench.ledger, "A2", "blue")).toMatchObject({ stated: false, steps: steps(790) });
    const proposal = bench.propose(795, 830);
    const predicted = {};
    const change = bench.add({
      kind: "adopt",
      data: { proposal, chamber: "A2", recipe: "blue", reason: "r", before: steps(795), after: steps(830), predicted },
    });
    bench.add({ kind: "enter", data: { change, read_back: steps(831) } });
    expect(recipeInForce(bench.ledger, "A2", "blue", bench.nowMs)?.steps).toEqual(steps(831));
    expect(lastQualified(bench.ledger, "A2", "blue")).toMatchObject({ stated: false, steps: steps(795) });
    bench.recipe(840);
    expect(lastQualified(bench.ledger, "A2", "blue")).toMatchObject({ stated: true, steps: steps(840) });
  });
});

describe("the basis of a proposal", () => {
  const changes: [string, (bench: Bench) => void, boolean][] = [
    ["a run", (bench) => bench.run(1), true],
    ["a run of a sister", (bench) => bench.run(1, { chamber: "A1" }), true],
    [
      "a reading",
      (bench) => bench.add({ kind: "reading", data: { run: 0, reading: { gauge: "r", on: "cell" } } }),
      true,
    ],
    ["a recipe", (bench) => bench.recipe(1), true],
    ["a clean", (bench) => bench.add({ kind: "clean", data: { chamber: "A1" } }), true],
    ["a precoat", (bench) => bench.add({ kind: "precoat", data: { chamber: "A2", count: 2 } }), true],
    ["a service", (bench) => bench.add({ kind: "service", data: { chamber: "A2", what: "seal" } }), true],
    [
      "a reference reading",
      (bench) => bench.add({ kind: "gauge", data: { gauge: "e", reference: true, index: 2 } }),
      true,
    ],
    [
      "a correction",
      (bench) => bench.add({ kind: "correct", data: { entry: 0, fields: { index: 2 }, reason: "r" } }),
      true,
    ],
    [
      "an override",
      (bench) => bench.add({ kind: "note", data: { text: "t", override: { alarm: "a", runs: 1, chamber: "A2" } } }),
      true,
    ],
    ["a note", (bench) => bench.add({ kind: "note", data: { text: "t" } }), false],
    ["a proposal", (bench) => bench.propose(1, 2), false],
    ["a torn tail", (bench) => bench.add({ kind: "torn", data: { file: "f", bytes: 1 } }), false],
  ];
  it.each(changes)("with %s", (_, change, moves) => {
    const bench = new Bench();
    bench.run(800);
    const before = bench.basis;
    change(bench);
    expect(bench.basis !== before).toBe(moves);
  });

  it("the same question on the same basis finds the proposal made then, another question none", () => {
    const bench = new Bench();
    bench.run(800);
    const number = bench.propose(800, 830);
    bench.add({ kind: "note", data: { text: "coffee" } });
    expect(proposalOn(bench.ledger, bench.basis)?.seq).toBe(number);
    bench.run(800);
    expect(proposalOn(bench.ledger, bench.basis)).toBe(null);
  });
});

describe("corrections", () => {
  it("replace the entry in place, also its time, and the book keeps what was written", () => {
    const bench = new Bench();
    bench.run(800, {}, 1);
    const wrong = bench.run(801, {}, 2);
    bench.run(802, {}, 3);
    const fields = {
      index: 2.1,
      silane: { value: 901, unit: "sccm" },
      at: new Date(at(0)).toISOString(),
      note: "typo",
    };
    bench.add(correctDraft(bench.ledger, { entry: wrong, fields, reason: "misread" }));
    expect(runsOf(chamberRecord(bench.ledger, "A2").timeline).map((run) => run.seq)).toEqual([1, 0, 2]);
    const run = bench.ledger.runs.get(wrong);
    expect(run?.readings[0].index).toBe(2.1);
    expect(run?.data.steps[0].settings["silane"].value).toBe(901);
    expect(run?.correctedBy).toEqual([3]);
    expect(bench.ledger.entries[wrong]).toMatchObject({ data: { readings: [{ index: 2.04 }] } });
  });

  it("keep the order of runs of the same minute", () => {
    const bench = new Bench();
    for (const silane of [800, 801, 802]) bench.run(silane, {}, 5);
    bench.add(correctDraft(bench.ledger, { entry: 1, fields: { index: 2.2 }, reason: "r" }));
    expect(runsOf(chamberRecord(bench.ledger, "A2").timeline).map((run) => run.seq)).toEqual([0, 1, 2]);
  });

  it("add up, the later one wins, and null takes a value away", () => {
    const bench = new Bench();
    const run = bench.run(800);
    for (const fields of [{ index: 2.1, count: 3 }, { index: 2.2 }, { thickness_nm: null }]) {
      bench.add(correctDraft(bench.ledger, { entry: run, fields, reason: "r" }));
    }
    expect(bench.ledger.runs.get(run)?.readings).toEqual([{ gauge: "ellipsometer", on: "polished", index: 2.2 }]);
    expect(bench.ledger.runs.get(run)?.data.count).toBe(3);
  });

  it("of a later reading reach its run, and can move it to another", () => {
    const bench = new Bench();
    const first = bench.run(800);
    const second = bench.run(801);
    const data = { run: first, reading: { gauge: "r", on: "cell" as const, reflectance_minimum_nm: 604 } };
    const reading = bench.add({ kind: "reading", data });
    bench.add(
      correctDraft(bench.ledger, { entry: reading, fields: { run: second, reflectance_minimum_nm: 610 }, reason: "r" }),
    );
    expect(bench.ledger.runs.get(first)?.readings).toHaveLength(1);
    expect(bench.ledger.runs.get(second)?.readings[1]).toMatchObject({ reflectance_minimum_nm: 610 });
    // and a correction of the run afterwards keeps it
    bench.add(correctDraft(bench.ledger, { entry: second, fields: { index: 2.2 }, reason: "r" }));
    expect(bench.ledger.runs.get(second)?.readings).toHaveLength(2);
  });

  it("can move a clean to another chamber", () => {
    const bench = new Bench();
    const clean = bench.add({ kind: "clean", data: { chamber: "A1" } });
    bench.add(correctDraft(bench.ledger, { entry: clean, fields: { chamber: "A2" }, reason: "r" }));
    expect(chamberRecord(bench.ledger, "A1").timeline).toEqual([]);
    expect(chamberRecord(bench.ledger, "A2").timeline).toHaveLength(1);
  });

  it("mark the proposals that were made on the old value, and only those", () => {
    const bench = new Bench();
    const early = bench.propose(1, 2);
    const run = bench.run(800);
    const late = bench.propose(3, 4);
    bench.add(correctDraft(bench.ledger, { entry: run, fields: { index: 2.2 }, reason: "r" }));
    const after = bench.propose(5, 6);
    expect([early, late, after].map((seq) => bench.ledger.proposals.get(seq)?.restsOnCorrected)).toEqual([
      [],
      [run],
      [],
    ]);
  });

  it.each([
    ["an entry that does not exist", 99, { index: 2 }, "no-such-entry"],
    ["a kind that cannot be corrected", 1, { steps: 1 }, "cannot-correct"],
    ["a field that a run does not have", 0, { colour: "blue" }, "no-such-field"],
    ["a value that is not valid", 0, { count: 0 }, "bad-entry"],
    ["a setting without a unit", 0, { silane: 812 }, "bad-entry"],
    ["a time that is none", 0, { at: "yesterday" }, "bad-entry"],
    ["taking away what must be there", 0, { chamber: null }, "bad-entry"],
    ["nothing", 0, {}, "no-such-field"],
  ])("refuse %s", (_, entry, fields, code) => {
    const bench = new Bench();
    bench.run(800);
    bench.recipe(800);
    expect(() => correctDraft(bench.ledger, { entry, fields, reason: "r" })).toThrow(expect.objectContaining({ code }));
    expect(() => correctDraft(bench.ledger, { entry, fields, reason: " " })).toThrow(
      expect.objectContaining({ code: "no-reason" }),
    );
  });
});

describe("an override", () => {
  const override = { alarm: "index low", runs: 3, chamber: "A2" };
  it("holds for its runs, counted in depositions, in its chamber", () => {
    const bench = new Bench();
    bench.add({ kind: "note", data: { text: "leak test passed", override } });
    const holds = () => overridesInForce(bench.ledger, "A2", bench.nowMs).length;
    expect([holds(), overridesInForce(bench.ledger, "A1", bench.nowMs).length]).toEqual([1, 0]);
    bench.run(800, { chamber: "A1" });
    bench.run(800, { count: 2 });
    expect(holds()).toBe(1);
    bench.run(800);
    expect(holds()).toBe(0);
  });
  it("ends at the next clean", () => {
    const bench = new Bench();
    bench.add({ kind: "note", data: { text: "leak test passed", override } });
    bench.add({ kind: "clean", data: { chamber: "A2" } });
    expect(overridesInForce(bench.ledger, "A2", bench.nowMs)).toEqual([]);
  });
});

describe("a long book", () => {
  it("of 2,000 entries is replayed in well under a second", () => {
    const bench = new Bench();
    for (let i = 0; i < 2000; i++) bench.run(800 + (i % 50), {}, i % 7 === 0 ? i - 30 : i);
    const began = performance.now();
    const ledger = emptyLedger();
    for (const entry of bench.entries) extend(ledger, entry);
    // a few ms on an idle core; the bound only catches a quadratic step
    expect(performance.now() - began).toBeLessThan(1000);
    expect(ledger.runs.size).toBe(2000);
  });
});
