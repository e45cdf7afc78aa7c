/** The scoreboard's figures by hand, and their errors by drawing worlds again. */
import { describe, expect, it } from "vitest";
import { random } from "../../../engine/index.ts";
import type { Played } from "../../../recipes/rehearsal/closed-loop.ts";
import { gapClosed, quantile, ratioOf, scoreOf } from "../../../recipes/rehearsal/score.ts";

const world = (more: Partial<Played>): Played => ({
  runs: 1,
  reached: true,
  falseDone: false,
  saidDone: null,
  later: { made: 100, hits: 100 },
  measured: 0,
  changes: 0,
  idle: { changes: 0, chances: 0 },
  stated: [],
  advice: {},
  falseStops: 0,
  leakNamedAfter: null,
  leaked: false,
  toldUntold: null,
  ...more,
});

describe("the figures of a practice", () => {
  const score = scoreOf("some", [
    world({ runs: 1, later: { made: 100, hits: 90 }, changes: 10, idle: { changes: 1, chances: 50 } }),
    world({ runs: 2, falseDone: true, later: { made: 100, hits: 70 }, changes: 30, idle: { changes: 3, chances: 30 } }),
    world({ runs: 2, later: { made: 200, hits: 200 }, falseStops: 4 }),
    world({ runs: 20, reached: false, later: { made: 100, hits: 40 } }),
  ]);

  it("are those by hand", () => {
    expect(score.runs).toMatchObject({ median: 2, mean: { value: 25 / 4 } });
    expect(score.runs?.p90).toBeCloseTo(2 + 0.7 * 18, 9);
    expect(score.runs?.within.map((f) => f.value)).toEqual([1 / 4, 3 / 4, 3 / 4]);
    expect(score.runs?.never.value).toBe(1 / 4);
    // Only of tunings that ended with a reading in goal.
    expect(score.falseDone.value).toBeCloseTo(1 / 3, 12);
    expect(score.later.value).toBe(400 / 500);
    expect(score.changesPer100.value).toBe(8);
    expect(score.idlePer100.value).toBe(5);
    expect(score.falseStopsPer100.value).toBeCloseTo(0.8, 12);
    // Shares .9, .7, 1, .4: a tenth of the way up from the lowest, three steps apart.
    expect(score.worstDecile.value).toBeCloseTo(0.4 + 0.3 * 0.3, 12);
    expect(score.leakNamed).toBeNull();
  });

  it("have a share's error by the binomial, but for n - 1", () => {
    expect(score.runs?.never.error).toBeCloseTo(Math.sqrt((0.25 * 0.75) / 3), 12);
  });

  it("keep chances by tenths beside what came", () => {
    const { calibration } = scoreOf("some", [
      world({
        stated: [
          { chance: 0.95, hit: true },
          { chance: 0.85, hit: true },
          { chance: 1, hit: false },
        ],
      }),
      world({ stated: [{ chance: 0.81, hit: false }] }),
    ]);
    expect(calibration.map((c) => [c.from, c.count])).toEqual([
      [0.8, 2],
      [0.9, 2],
    ]);
    expect(calibration[0].stated).toBeCloseTo(0.83, 12);
    expect(calibration.map((c) => c.came.value)).toEqual([0.5, 0.5]);
  });

  it("count leaks among those that came", () => {
    const leaks = [1, 3, null].map((leakNamedAfter) => world({ leaked: true, leakNamedAfter }));
    expect(scoreOf("some", [...leaks, world({})]).leakNamed?.map((f) => f.value)).toEqual([1 / 3, 1 / 3, 2 / 3]);
  });

  it("count what was said, and when, among those that said anything", () => {
    const some = [3, 5, null].map((saidDone) =>
      world({ saidDone, toldUntold: saidDone === null ? null : saidDone === 3 }),
    );
    const { saidDone, toldUntold } = scoreOf("some", some);
    expect(saidDone).toMatchObject({ median: 4, share: { value: 2 / 3 } });
    expect(toldUntold?.value).toBe(0.5);
  });

  it("are nothing where there was nothing to tune", () => {
    const bare = scoreOf("some", [world({ runs: null, reached: false })]);
    expect(bare.runs).toBeNull();
    expect(bare.falseDone.value).toBeNaN();
  });
});

describe("errors", () => {
  it("of a ratio are as wide as it varies when worlds are drawn again", () => {
    const source = random("again");
    const study = () =>
      ratioOf(Array.from({ length: 50 }, () => ({ over: source.uniform(0.5, 1) * 20, by: 10 + source.integer(20) })));
    const studies = Array.from({ length: 400 }, study);
    const values = studies.map((s) => s.value);
    const mean = values.reduce((a, b) => a + b, 0) / 400;
    const sd = Math.sqrt(values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / 399);
    const told = studies.reduce((sum, s) => sum + s.error, 0) / 400;
    // An sd of 400 values is known to 3.5 %; four of those.
    expect(Math.abs(told / sd - 1)).toBeLessThan(0.14);
  });

  it("of the gap rest on the same worlds: what is good luck for all does not count", () => {
    const source = random("luck");
    const some = Array.from({ length: 40 }, () => {
      const hits = source.integer(60);
      return [hits, hits + 20, hits + 40].map((h) => world({ later: { made: 100, hits: h } }));
    });
    const at = (i: number) => some.map((w) => w[i]);
    const gap = gapClosed(at(1), at(0), at(2));
    expect(gap.value).toBeCloseTo(0.5, 12);
    expect(gap.error).toBeLessThan(1e-9);
  });

  it("of a gap that is none is not told", () => {
    const [worse, better] = [50, 60].map((hits) => [world({ later: { made: 100, hits } })]);
    expect(gapClosed(better, better, worse).value).toBeNaN();
  });
});

describe("a quantile", () => {
  it("lies on the line between neighbours, whatever the order given", () => {
    expect(quantile([3, 1, 2], 0.5)).toBe(2);
    expect(quantile([1, 2], 0.9)).toBeCloseTo(1.9, 12);
    expect(quantile([], 0.5)).toBeNaN();
  });
});
