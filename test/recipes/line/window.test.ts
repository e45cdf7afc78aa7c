import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { anchorUse, bindingLimits, outside } from "../../../recipes/line/window.ts";
import { lineOf } from "./given.ts";

const line = lineOf();
const a2 = line.chambers.get("A2")!;
const b1 = line.chambers.get("B1")!;
const recipe = (silane: number, ammonia: number, time = 560) => new Map(Object.entries({ silane, ammonia, time }));

describe("the window", () => {
  it("holds a recipe inside it, edges included", () => {
    expect(outside(recipe(780, 7020), a2, line)).toEqual([]);
    // 500 x 14 = 7000, 1100 at most, 1100 + 8400 = 9500: all exactly on their limits
    expect(outside(recipe(500, 7000, 200), a2, line)).toEqual([]);
    expect(outside(recipe(1100, 8400, 900), a2, line)).toEqual([]);
  });

  it("names every range and limit that is broken, with value and limit in the declared unit", () => {
    const found = outside(recipe(1150, 9010, 199), b1, line);
    expect(found.map(({ text, from }) => `${from} ${text}`)).toEqual([
      "range silane",
      "range ammonia",
      "range time",
      "window silane",
      "window silane+ammonia",
    ]);
    expect(found[0].sentence).toBe("silane 1150 sccm is outside the range of B1, 300 sccm to 1000 sccm.");
    expect(found[4]).toMatchObject({ value: 10_160, high: 9500 });
    expect(outside(recipe(600, 8500), a2, line)[0].sentence).toBe(
      "ammonia/silane 14.17 is outside the qualified window, 5 to 14.",
    );
  });

  it("counts a value that is not a number as outside", () => {
    expect(outside(recipe(Number.NaN, 7000), a2, line).map(({ text }) => text)).toContain("silane");
  });

  it("is not broken by the dust of adding decimals", () => {
    // 0.1 + 0.2 is 0.30000000000000004 in doubles
    const sum = { text: "a+b", kind: "sum" as const, settings: ["a", "b"], low: 0, high: 0.3 };
    const chamber = { name: "X", settings: new Map() };
    expect(outside(new Map(Object.entries({ a: 0.1, b: 0.2 })), chamber, { window: [sum] })).toEqual([]);
    expect(outside(new Map(Object.entries({ a: 0.1, b: 0.201 })), chamber, { window: [sum] })).toHaveLength(1);
  });

  it("judges only the settings that are given", () => {
    expect(outside(new Map([["silane", 780]]), a2, line)).toEqual([]);
  });

  it("binds where one more step would break it, and says on which side", () => {
    const found = bindingLimits(recipe(1100, 8400, 200), a2, line);
    expect(found.map(({ text, from, side }) => `${from} ${text} ${side}`)).toEqual([
      "range time low",
      "window silane high",
      "window silane+ammonia high",
    ]);
    expect(bindingLimits(recipe(780, 7020), a2, line)).toEqual([]);
    // 6990/500 = 13.98: one sccm less of silane gives 14.008, outside; from 6900/500 = 13.8 no single step leaves
    expect(bindingLimits(recipe(500, 6990), a2, line)).toMatchObject([{ text: "ammonia/silane", side: "high" }]);
    expect(bindingLimits(recipe(500, 6900), a2, line)).toEqual([]);
    expect(bindingLimits(recipe(500, 7000), a2, line).map(({ text }) => text)).toEqual(["ammonia/silane"]);
  });

  it("never both holds and breaks: broken limits are not among the binding ones", () => {
    const flow = fc.integer({ min: 250, max: 1300 });
    fc.assert(
      fc.property(flow, fc.integer({ min: 2900, max: 9100 }), (silane, ammonia) => {
        const settings = recipe(silane, ammonia);
        const broken = new Set(outside(settings, a2, line).map(({ text, from }) => from + text));
        for (const { text, from } of bindingLimits(settings, a2, line)) expect(broken.has(from + text)).toBe(false);
        // an independent reading of the example's window
        const fine =
          silane >= 300 &&
          silane <= 1100 &&
          ammonia >= 3000 &&
          ammonia <= 9000 &&
          ammonia >= 5 * silane &&
          ammonia <= 14 * silane &&
          silane + ammonia <= 9500;
        expect(broken.size === 0).toBe(fine);
      }),
    );
  });
});

describe("the anchor", () => {
  it("counts corrections from the last qualified recipe, signed, and is passed only beyond its limit", () => {
    const anchor = recipe(780, 7020, 560);
    const [ratio, time] = anchorUse(anchor, recipe(835, 7020, 616), line);
    // 7020/835 over 7020/780 = 780/835 = 0.93413
    expect(ratio.used).toBeCloseTo(780 / 835 - 1, 12);
    expect(ratio).toMatchObject({ text: "ammonia/silane", limit: 0.06, past: true });
    expect(ratio.sentence).toContain("6.59 % below");
    expect(time).toMatchObject({ limit: 0.1, past: false });
    expect(anchorUse(anchor, recipe(780, 7020, 617), line)[1].past).toBe(true);
  });

  it("says so when nothing has moved, and leaves out what it cannot compare", () => {
    const anchor = recipe(780, 7020);
    expect(anchorUse(anchor, anchor, line).map(({ used }) => used)).toEqual([0, 0]);
    expect(anchorUse(anchor, anchor, line)[0].sentence).toContain("where it was last qualified");
    expect(anchorUse(new Map(), anchor, line)).toEqual([]);
    expect(anchorUse(recipe(780, 0, 0), anchor, line)).toEqual([]);
  });
});
