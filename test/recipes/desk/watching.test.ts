/** Watching a line: what is due, when chambers are usually cleaned, what capability may be told, the most urgent first. */
import { describe, expect, it } from "vitest";
import { watch } from "../../../recipes/desk/watching.ts";
import { capabilityOf } from "../../../recipes/desk/watching-capability.ts";
import { cleanHabit } from "../../../recipes/desk/watching-cleans.ts";
import {
  cleanSentence,
  driftSentence,
  forecastSentence,
  watchDocument,
} from "../../../recipes/desk/watching-document.ts";
import { chamberRecord } from "../../../recipes/record/ledger.ts";
import { demoLine, lineWith, onGoal, play, settled, stepsFor } from "../../support/desk-line.ts";
import { Bench } from "../../support/ledger-bench.ts";

/** A timeline of cycles of so many depositions, a clean after each, and then some more. */
function cycles(lengths: readonly number[], since: number, counter = false) {
  const bench = new Bench();
  let minute = 0;
  const run = (k: number) =>
    bench.run(0, { chamber: "A2", steps: stepsFor(onGoal), ...(counter && { since_clean: k }) }, ++minute);
  for (const length of lengths) {
    for (let i = 1; i <= length; i++) run(i);
    bench.add({ kind: "clean", data: { chamber: "A2" } }, ++minute);
  }
  for (let i = 1; i <= since; i++) run(i);
  return cleanHabit(chamberRecord(bench.ledger, "A2").timeline);
}

describe("the habit of cleaning", () => {
  it("is the median of whole cycles; the one nobody saw begin does not count", () => {
    expect(cycles([7, 25, 24, 26], 10)).toEqual({ usual: 25, least: 24, most: 26, cycles: 3, left: 15 });
  });
  it("is none with fewer than three whole cycles, or where they are irregular", () => {
    expect(cycles([7, 25, 24], 10)).toBeNull();
    expect(cycles([7, 10, 25, 40, 18], 3)).toBeNull();
  });
  it("believes the tool's own counter", () => {
    expect(cycles([7, 20, 20, 20], 4, true)).toMatchObject({ usual: 20, left: 16 });
  });
  it("is said with whether the goal is left before it", () => {
    const habit = { usual: 25, least: 24, most: 26, cycles: 4, left: 8 };
    const f = (half: number | null) => ({
      outNow: 0,
      outBy: { early: 2, half, late: null },
      first: null,
      horizon: 500,
      cannotTell: null,
    });
    expect(cleanSentence(habit, f(5))).toContain("in about 8; likelier out of goal before that");
    expect(cleanSentence(habit, f(50))).toContain("likelier in goal until then");
    expect(cleanSentence({ ...habit, left: -3 }, f(50))).toContain("past it by 3");
    expect(cleanSentence(null, f(5))).toBeNull();
    expect(forecastSentence(f(5))).toBe(
      "Out of goal by 5 depositions from now with 50 % (by 2 with 5 %, not yet by 500 with 95 %).",
    );
    expect(forecastSentence(null)).toContain("no goal can be judged");
  });
});

describe("watching the demo line", async () => {
  const ws = await demoLine();
  const seen = watch(ws);

  it("puts the chambers off goal before the one that is fine", () => {
    expect(seen.chambers.map((c) => [c.chamber, c.urgency])).toEqual([
      ["A2", "out"],
      ["B1", "out"],
      ["A1", "fine"],
    ]);
  });

  it("predicts each chamber at its own recipe in force, the same as asked alone", () => {
    for (const c of seen.chambers) {
      const law = ws.model?.chamber(c.chamber).quick(c.recipes[0].settings);
      expect(c.recipes[0].next.index.mean).toBeCloseTo(law?.index ?? 0, 6);
      expect(c.recipes[0].next.index.low).toBeLessThan(c.recipes[0].next.index.high);
    }
    expect(seen.shared).toEqual(["blue"]);
  });

  it("gives capability only from twenty readings not marked as tuning, with a lower bound below it", () => {
    const at = (name: string) => capabilityOf(ws, name, "blue", ws.goal("blue"));
    expect(at("B1").thicknessNm).toBeNull();
    expect(at("B1").sentence).toMatch(/^no Ppk: .* fewer than 20 promise too little/);
    const { thicknessNm, sentence } = at("A1");
    expect(thicknessNm?.ppkAtLeast).toBeLessThan(thicknessNm?.ppk ?? 0);
    expect(sentence).toContain(
      `at least ${Math.min(thicknessNm?.ppkAtLeast ?? 9, at("A1").index?.ppkAtLeast ?? 9).toFixed(2)}`,
    );
  });

  it("is a document of plain numbers, marks of the forecast in order", () => {
    const document = JSON.parse(JSON.stringify(watchDocument(ws.line.name, seen)));
    for (const c of document.chambers) {
      const f = c.recipes[0].forecast;
      const marks = [f.out_by_5_percent, f.out_by_50_percent, f.out_by_95_percent].map((m: number | null) => m ?? 501);
      expect([...marks].sort((a, b) => a - b)).toEqual(marks);
      expect(c.false_alarms_a_month === null || c.false_alarms_a_month > 0).toBe(true);
    }
    expect(document.side_by_side[0].chambers).toHaveLength(3);
  });
});

describe("what is due", () => {
  it("names readings awaited, and a chamber nothing is known of does not keep the others from being told", async () => {
    const ws = lineWith();
    const a = play(ws, "A1", "due");
    await settled(a, onGoal, 8);
    await ws.book.append({
      kind: "run",
      at: new Date(ws.ports.now()).toISOString(),
      data: { chamber: "A1", recipe: "blue", settings_from: "given", steps: stepsFor(onGoal), count: 1, readings: [] },
    });
    const { chambers } = watch(ws);
    const a1 = chambers.find((c) => c.chamber === "A1");
    expect(a1?.recipes[0].due).toContain("1 run not read since the last reading");
    expect(a1?.recipes[0].awaiting).toBe(1);
    const b1 = chambers.find((c) => c.chamber === "B1");
    expect(b1?.urgency).toBe("unknown");
    expect(b1?.trouble[0].code).toBe("no-recipe");
    expect(chambers.at(-1)?.urgency).toBe("unknown");
  });

  it("says what ten more depositions do, with a drift that was put there inside its interval", async () => {
    const ws = lineWith();
    const a = play(ws, "A1", "still");
    await settled(a, onGoal, 40);
    const [a1] = watch(ws).chambers.filter((c) => c.chamber === "A1");
    const { index, thicknessNm } = a1.recipes[0].drift;
    // The calm world does not drift.
    expect(Math.abs(index.mean)).toBeLessThan(1.5 * index.half);
    expect(Math.abs(thicknessNm.mean)).toBeLessThan(1.5 * thicknessNm.half);
    expect(driftSentence(a1.recipes[0].drift)).toMatch(/^Next 10 depositions: index [+-]0\.00\d\d ±/);
  });
});
