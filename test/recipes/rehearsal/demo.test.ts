/** The demo line's invented book: in order, in the line's own terms, and telling the story it is meant to tell. */
import { describe, expect, it } from "vitest";
import { toCanonical } from "../../../engine/index.ts";
import { lineWafer } from "../../../recipes/line/line-wafer.ts";
import { readLine } from "../../../recipes/line/read-line.ts";
import { DEMO_LINE } from "../../../recipes/line/template.ts";
import { checkData } from "../../../recipes/record/entry-schema.ts";
import { DEMO_GOAL, demoEntries, playDemo } from "../../../recipes/rehearsal/demo.ts";
import type { DemoEntry } from "../../../recipes/rehearsal/demo-diary.ts";

/** A quarter wave in the film: near enough to place the minimum of a real cell, and it needs no optics. */
const quarterWave = {
  reflectanceMinimumNm: (index: number, facetNm: number) => 4 * index * facetNm,
  weightedReflectancePercent: () => 2,
};

const demo = playDemo(quarterWave);
type RunEntry = Extract<DemoEntry, { kind: "run" }>;
const runsOf = (name: string) =>
  demo.entries.filter((entry): entry is RunEntry => entry.kind === "run" && entry.data.chamber === name);
const measuredOf = (name: string) => runsOf(name).filter((entry) => entry.data.readings.length > 0);
const now = (name: string) => {
  const { chamber, settings } = demo.chambers.get(name)!;
  return chamber.expected(settings);
};

describe("the demo's book", () => {
  it("is the same every time", () => {
    expect(demoEntries(quarterWave)).toEqual(demo.entries);
  });

  it("is in the order things happened, early in 2026", () => {
    const times = demo.entries.map((entry) => entry.at);
    expect([...times].sort()).toEqual(times);
    for (const at of times) expect(at).toMatch(/^2026-0[1-3]-\d\dT\d\d:\d\d:00\.000Z$/);
  });

  it("gives every chamber its first recipe before its first run", () => {
    for (const name of ["A1", "A2", "B1"]) {
      const own = demo.entries.filter((entry) => "chamber" in entry.data && entry.data.chamber === name);
      expect(own[0].kind).toBe("recipe");
    }
  });

  it("never lets a chamber do two things at once", () => {
    for (const name of ["A1", "A2", "B1"]) {
      const times = runsOf(name).map((entry) => entry.at);
      expect(new Set(times).size).toBe(times.length);
    }
  });

  it("holds only values that can be typed in, inside the window of ratio and total flow", () => {
    for (const entry of demo.entries) {
      if (entry.kind !== "run" && entry.kind !== "recipe") continue;
      const { silane, ammonia, time } = entry.data.steps[0].settings;
      expect(silane.value % 1).toBe(0);
      expect(ammonia.value % 10).toBe(0);
      expect(time.value % 1).toBe(0);
      expect(ammonia.value / silane.value).toBeGreaterThan(5);
      expect(ammonia.value / silane.value).toBeLessThan(14);
      expect(silane.value + ammonia.value).toBeLessThanOrEqual(9500);
    }
  });

  it("moves ratio, time and total flow apart in A1 and A2, so that their effects can be told apart", () => {
    for (const name of ["A1", "A2"]) {
      const seen = measuredOf(name).map((entry) => entry.data.steps[0].settings);
      const spread = (values: number[]) => Math.max(...values) / Math.min(...values) - 1;
      expect(spread(seen.map((s) => s.ammonia.value / s.silane.value))).toBeGreaterThan(0.05);
      expect(spread(seen.map((s) => s.time.value))).toBeGreaterThan(0.04);
      expect(spread(seen.map((s) => s.ammonia.value + s.silane.value))).toBeGreaterThan(0.02);
    }
  });
});

describe("the demo's story", () => {
  it("has 40 measured runs of A1, 36 of A2 and three of B1, and a minimum with about every fifth", () => {
    expect(measuredOf("A1")).toHaveLength(40);
    expect(measuredOf("A2")).toHaveLength(36);
    expect(measuredOf("B1")).toHaveLength(3);
    for (const name of ["A1", "A2"]) {
      const withLight = measuredOf(name).filter((entry) => entry.data.readings.length === 2);
      expect(withLight.length).toBeGreaterThanOrEqual(7);
      expect(withLight.length).toBeLessThanOrEqual(8);
    }
  });

  it("leaves A1 in goal: its film lies within 0.3 of the tolerances 0.02 and 2 nm", () => {
    expect(Math.abs(now("A1").index - DEMO_GOAL.index)).toBeLessThan(0.3 * 0.02);
    expect(Math.abs(now("A1").thicknessNm - DEMO_GOAL.thicknessNm)).toBeLessThan(0.3 * 2);
  });

  it("leaves A2 four runs after a clean, about 3 nm thin and a little low in index", () => {
    const own = demo.entries.filter((entry) => "chamber" in entry.data && entry.data.chamber === "A2");
    expect(own.slice(-5).map((entry) => entry.kind)).toEqual(["clean", "run", "run", "run", "run"]);
    expect(now("A2").thicknessNm - DEMO_GOAL.thicknessNm).toBeGreaterThan(-3.5);
    expect(now("A2").thicknessNm - DEMO_GOAL.thicknessNm).toBeLessThan(-2.5);
    expect(now("A2").index - DEMO_GOAL.index).toBeGreaterThan(-0.02);
    expect(now("A2").index - DEMO_GOAL.index).toBeLessThan(-0.01);
  });

  it("starts B1 on A1's recipe, which there gives a film too thick and too low in index", () => {
    expect([...demo.chambers.get("B1")!.settings]).toEqual([...demo.chambers.get("A1")!.settings]);
    expect(now("B1").thicknessNm - DEMO_GOAL.thicknessNm).toBeGreaterThan(3);
    expect(now("B1").thicknessNm - DEMO_GOAL.thicknessNm).toBeLessThan(5);
    expect(now("B1").index - DEMO_GOAL.index).toBeGreaterThan(-0.03);
    expect(now("B1").index - DEMO_GOAL.index).toBeLessThan(-0.006);
  });

  it("hides one reading taken on the wrong wafer in A2's book", () => {
    // The facet carries 0.85 of the witness's film; no honest run of A2 comes near that.
    const thin = measuredOf("A2").filter(
      (entry) => entry.data.readings[0].thickness_nm! < 0.91 * DEMO_GOAL.thicknessNm,
    );
    expect(thin).toHaveLength(1);
    expect(thin[0].data.note).toBeUndefined();
  });

  it("keeps every correction inside the anchor: 6 % in ratio and 10 % in time from the first recipe", () => {
    for (const name of ["A1", "A2"]) {
      const stated = demo.entries.flatMap((entry) =>
        entry.kind === "recipe" && entry.data.chamber === name ? [entry.data.steps[0].settings] : [],
      );
      const [first] = stated;
      for (const later of stated) {
        const ratio = later.ammonia.value / later.silane.value / (first.ammonia.value / first.silane.value);
        expect(Math.abs(ratio - 1)).toBeLessThan(0.06);
        expect(Math.abs(later.time.value / first.time.value - 1)).toBeLessThan(0.1);
      }
    }
  });
});

describe("the demo's book under the demo's line file", () => {
  const line = readLine(DEMO_LINE, "line.yaml");
  const wafer = lineWafer(line);

  it("has every entry in the form that the book accepts", () => {
    for (const { kind, data } of playDemo(wafer).entries) expect(checkData(kind, data)).toBeNull();
  });

  it("speaks the line's own words: its chambers, gauges, settings and units, each value within its range", () => {
    expect(line.goal.index?.value).toBe(DEMO_GOAL.index);
    expect(line.goal.thicknessNm?.value).toBe(DEMO_GOAL.thicknessNm);
    expect([...demo.chambers.keys()].sort()).toEqual([...line.chambers.keys()].sort());
    for (const entry of demo.entries) {
      if (entry.kind === "run") {
        for (const { gauge, on } of entry.data.readings) expect(line.gauges.get(gauge)?.on).toBe(on);
      }
      if (entry.kind !== "run" && entry.kind !== "recipe") continue;
      const declared = line.chambers.get(entry.data.chamber)!.settings;
      const { settings } = entry.data.steps[0];
      expect(Object.keys(settings)).toEqual([...declared.keys()]);
      for (const [name, { value, unit }] of Object.entries(settings)) {
        const { unit: own, low, high } = declared.get(name)!;
        expect(unit).toBe(own);
        expect(toCanonical(value, unit)).toBeGreaterThanOrEqual(low);
        expect(toCanonical(value, unit)).toBeLessThanOrEqual(high);
      }
    }
  });

  it("has A1's reflectance minimum on the line's own wafer in goal and A2's below it", () => {
    const minimum = (name: string) => {
      const { index, thicknessNm } = now(name);
      return wafer.reflectanceMinimumNm(index, line.wafer.facetFactor.mean * thicknessNm)!;
    };
    const { value, within } = line.goal.reflectanceMinimumNm!;
    expect(Math.abs(minimum("A1") - value)).toBeLessThan(0.3 * within);
    expect(minimum("A2")).toBeLessThan(value - within);
  });
});
