/** The replay knows, before each reading, what had been entered by then and nothing else; and its verdict follows its numbers. */
import { beforeAll, describe, expect, it } from "vitest";
import { random } from "../../../engine/index.ts";
import { replayDocument, summaryOf } from "../../../recipes/desk/replay-words.ts";
import { type Replay, type ReplayedRun, replayable, replayChamber } from "../../../recipes/desk/replaying.ts";
import type { Workspace } from "../../../recipes/index.ts";
import { demoLine, lineWith, onGoal, play } from "../../support/desk-line.ts";
import { refusalCode } from "../../support/refusal.ts";

const filmOnly = {
  "  weighted_reflectance: at most 2.5 %\n": "",
  "  reflectance_minimum: 600 nm within 15 nm\n": "",
};

const RUNS = 11;

/** A chamber with moved settings, a clean in the middle, and so many measured runs. */
async function lived(ws: Workspace, runs: number): Promise<void> {
  // A rate 8 % above what the line takes it for: at first nobody can know.
  const played = play(ws, "A1", "replayed", { given: { lnRate: 0.08 } });
  const source = random("moves");
  await played.recipe(onGoal);
  for (let i = 0; i < runs; i++) {
    if (i === Math.round(runs / 2)) await played.clean();
    const settings = new Map(onGoal);
    for (const name of ["silane", "ammonia", "time"])
      settings.set(name, Math.round((onGoal.get(name) ?? 0) * (1 + 0.015 * source.normal())));
    await played.run(settings);
  }
}

const correct = (ws: Workspace, entry: number, index: number) =>
  ws.book.append({ kind: "correct", data: { entry, fields: { index }, reason: "misread" } });

describe("a replay", () => {
  let ws: Workspace;
  let whole: Replay;
  beforeAll(async () => {
    ws = lineWith(filmOnly);
    await lived(ws, RUNS);
    whole = replayChamber(ws, "A1");
  });

  it("takes every measured run, the rival's expectation beside ours", () => {
    expect(whole.runs).toHaveLength(RUNS);
    expect(whole.leftOut).toBe(0);
    for (const run of whole.runs) {
      expect(run.rival).not.toBeNull();
      expect(Math.abs(run.ours.index - (run.read.index ?? 0))).toBeLessThan(0.1);
      expect(Math.abs((run.rival?.thicknessNm ?? 0) - (run.read.thicknessNm ?? 0))).toBeLessThan(15);
    }
    expect(replayable(ws)).toEqual(["A1"]);
  });

  it("learns: the rate nobody could know at first is known after some runs", () => {
    const low = (runs: readonly ReplayedRun[]) =>
      runs.reduce((sum, { read, ours }) => sum + (read.thicknessNm ?? 0) - ours.thicknessNm, 0) / runs.length;
    // 8 % of 88 nm are 7 nm, of which the fading transient after the first event hides a part.
    expect(low(whole.runs.slice(0, 2))).toBeGreaterThan(2);
    expect(Math.abs(low(whole.runs.slice(3)))).toBeLessThan(1);
  });

  it("says of a run the same whatever was entered after it", async () => {
    const shorter = lineWith(filmOnly);
    await lived(shorter, RUNS);
    // Everything from the ninth run on is tampered with, later: nothing before it may change.
    const last = [...shorter.ledger.runs.values()].slice(8);
    for (const run of last) await correct(shorter, run.seq, 2.2);
    await play(shorter, "A1", "more").run(onGoal, 3);
    const again = replayChamber(shorter, "A1");
    const first = (replay: Replay) => replay.runs.filter((run) => run.entry < last[0].seq);
    expect(first(again)).toHaveLength(8);
    expect(first(again)).toEqual(first(whole));
  });

  it("holds a reading corrected later against what was expected, but learns from what stood there at the time", async () => {
    const corrected = lineWith(filmOnly);
    await lived(corrected, RUNS);
    const run = [...corrected.ledger.runs.values()][6];
    await correct(corrected, run.seq, 2.111);
    const again = replayChamber(corrected, "A1");
    expect(again.runs[6].read.index).toBeCloseTo(2.111, 9);
    expect(again.runs.map((r) => r.ours.index)).toEqual(whole.runs.map((r) => r.ours.index));
  });

  it("is refused under ten measured runs, and where no chamber has so many", async () => {
    const young = lineWith(filmOnly);
    await play(young, "A1", "young").run(onGoal, 9);
    expect(refusalCode(() => replayChamber(young, "A1"))).toBe("too-few-runs");
    expect(refusalCode(() => replayable(young))).toBe("too-few-runs");
    expect(refusalCode(() => replayChamber(young, "Z9"))).toBe("unknown-chamber");
  });

  it("counts its figures over the runs it shows", () => {
    const summary = summaryOf(whole);
    expect(summary.coverage.readings).toBe(2 * RUNS);
    expect(summary.coverage.inside).toBe(
      whole.runs.filter((r) => r.ours.insideIndex).length + whole.runs.filter((r) => r.ours.insideThickness).length,
    );
    expect(summary.chances?.runs).toBe(RUNS);
    expect(Object.values(summary.advice).reduce((a, b) => a + b, 0)).toBe(RUNS);
    const document = replayDocument(whole, summary);
    expect(document["runs"]).toHaveLength(RUNS);
    expect(JSON.parse(JSON.stringify(document))).toEqual(document);
  });

  it("takes the rival's chances on the demo line, whose readings it was not made for", async () => {
    const demo = await demoLine();
    expect(replayable(demo)).toEqual(["A1", "A2"]);
  });
});

describe("the verdict", () => {
  const run = (ours: number, rival: number | null): ReplayedRun => ({
    entry: 1,
    recipe: "blue",
    read: { index: 2.06, thicknessNm: 88 },
    ours: {
      index: 2.06,
      thicknessNm: 88,
      insideIndex: true,
      insideThickness: true,
      chance: 0.9,
      inGoal: true,
      advice: "keep",
    },
    rival: rival === null ? null : { index: 2.06, thicknessNm: 88, moves: false },
    miss: { ours, rival },
  });
  const says = (better: Replay["better"], verdict: Replay["verdict"]) =>
    summaryOf({ chamber: "A1", measured: 12, leftOut: 0, runs: [run(0.1, 0.2)], better, verdict }).says;

  it("is worded as its numbers are", () => {
    expect(says({ mean: 0.1, error: 0.02, runs: 12 }, "earns_its_keep")).toContain(
      "earns its keep: it missed the readings by less than the tuned EWMA, by 0.100 tolerances a run (standard error 0.020, 12 runs)",
    );
    expect(says({ mean: -0.1, error: 0.02, runs: 12 }, "worse")).toContain("does not earn its keep");
    expect(says({ mean: -0.01, error: 0.02, runs: 12 }, "no_better")).toContain("by more, by 0.010 tolerances");
    expect(says(null, "no_rival")).toContain("no rival");
  });
});
