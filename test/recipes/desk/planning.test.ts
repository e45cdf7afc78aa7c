/** Plans of runs on line folders: typed values inside the window, what confounded histories lack, lines with no run at all. */
import { describe, expect, it } from "vitest";
import { plan } from "../../../recipes/desk/planning.ts";
import type { Workspace } from "../../../recipes/index.ts";
import { snap } from "../../../recipes/line/settings.ts";
import { outside } from "../../../recipes/line/window.ts";
import { demoLine, lineWith, onGoal, play, settled } from "../../support/desk-line.ts";

/** The refusal's code, or "" where nothing was refused. */
const codeOf = (act: () => unknown): string => {
  try {
    act();
    return "";
  } catch (error) {
    return (error as { problems?: { code: string }[] }).problems?.[0].code ?? String(error);
  }
};
const planned = (ws: Workspace, chamber: string, runs: number, levers: string[] | null = null) =>
  plan(ws, { chamber, runs, levers }).plan;

describe("a plan on the demo line", async () => {
  const ws = await demoLine();

  it("is made of values that can be typed in, inside range and window, and narrows the goal with every run", () => {
    for (const chamber of ["A1", "A2", "B1"]) {
      const found = planned(ws, chamber, 3);
      let before = found.meanVarianceBefore;
      for (const run of found.runs) {
        expect(outside(run.settings, ws.chamber(chamber), ws.line)).toEqual([]);
        for (const { name, setting } of found.levers)
          if (run.moves.length > 0) {
            const value = run.settings.get(name) as number;
            expect(Math.abs(value - snap(value, setting))).toBeLessThan(1e-9 * value);
          }
        expect(run.meanVariance).toBeLessThan(before);
        before = run.meanVariance;
      }
      const last = found.runs[2].atGoal;
      const width = (v: { low: number; high: number }) => v.high - v.low;
      expect(width(last.index)).toBeLessThan(width(found.before.index));
      expect(width(last.thicknessNm)).toBeLessThan(width(found.before.thicknessNm));
    }
  });

  it("teaches more with more runs, and says the same when asked again", () => {
    const few = planned(ws, "B1", 2);
    const many = planned(ws, "B1", 4);
    expect(many.runs[3].meanVariance).toBeLessThan(few.runs[1].meanVariance);
    expect(plan(ws, { chamber: "B1", runs: 2, levers: null }).document).toEqual(
      plan(ws, { chamber: "B1", runs: 2, levers: null }).document,
    );
  });

  it("moves what the line tunes, and other settings only when they are named", () => {
    expect(planned(ws, "A1", 3).levers.map((l) => l.name)).toEqual(["silane", "ammonia", "time"]);
    const found = planned(ws, "A1", 4, ["power", "pressure"]);
    const moved = new Set(found.runs.flatMap((r) => r.moves.map((m) => m.split(" ")[0])));
    expect([...moved].sort()).toEqual(["power", "pressure"]);
    expect(found.runs[0].purpose).toContain("never moved here before");
  });

  it("says which run would pass the anchor, and repeats the cautions for the highest flows it asks for", () => {
    const found = planned(ws, "B1", 6);
    const past = found.runs.filter((r) => r.pastAnchor.length > 0);
    expect(past.length).toBeGreaterThan(0);
    for (const { pastAnchor } of past) expect(pastAnchor[0]).toMatch(/Passes the anchor: .* a person must look first/);
    const most = Math.max(...found.runs.map((r) => r.settings.get("silane") as number));
    expect(found.cautions.join(" ")).toContain(`to ${most} sccm: see that abatement`);
  });

  it("refuses what it cannot do, each with its code", () => {
    expect(codeOf(() => planned(ws, "B1", 0))).toBe("bad-runs");
    expect(codeOf(() => planned(ws, "B1", 13))).toBe("bad-runs");
    expect(codeOf(() => planned(ws, "B1", 2, []))).toBe("no-levers");
    expect(codeOf(() => planned(ws, "B1", 2, ["silan"]))).toBe("unknown-setting");
    expect(codeOf(() => planned(ws, "Z9", 2))).toBe("unknown-chamber");
  });
});

describe("a plan for a line whose history is short", () => {
  it("needs no run at all where a recipe is stated, and says so where none is", async () => {
    const ws = lineWith();
    expect(codeOf(() => planned(ws, "A1", 3))).toBe("no-recipe");
    await play(ws, "A1", "new").recipe(onGoal);
    const found = planned(ws, "A1", 3);
    expect(found.runs).toHaveLength(3);
    // Nothing is known but priors: three runs must halve what is not, in sd a quarter of the variance.
    expect(found.runs[2].meanVariance).toBeLessThan(0.25 * found.meanVarianceBefore);
  });

  it("moves ammonia first where only silane ever moved", async () => {
    const ws = lineWith();
    const a = play(ws, "A1", "confounded");
    await a.recipe(onGoal);
    for (let i = 0; i < 12; i++) await a.run(new Map(onGoal).set("silane", 808 + (i % 2 ? 30 : -30)));
    const found = planned(ws, "A1", 2);
    expect(found.cannotTell.join(" ")).toContain("Only silane moved, never ammonia");
    expect(found.runs[0].settings.get("ammonia")).not.toBe(onGoal.get("ammonia"));
  });

  it("stays at the window's edge where the recipe stands beside it", async () => {
    const ws = lineWith({ "silane+ammonia: at most 9500 sccm": "silane+ammonia: at most 7850 sccm" });
    const a = play(ws, "A1", "edge");
    await settled(a, onGoal, 6);
    const found = planned(ws, "A1", 6);
    for (const run of found.runs) {
      const total = (run.settings.get("silane") as number) + (run.settings.get("ammonia") as number);
      expect(total).toBeLessThanOrEqual(7850);
    }
  });
});
