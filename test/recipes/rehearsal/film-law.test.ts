/** The virtual chamber's laws against the published form of the index and against the slopes the tube-like line declares. */
import { describe, expect, it } from "vitest";
import { aim, TUBE_STEPS, typed } from "../../../recipes/rehearsal/aim.ts";
import { filmLaw, indexOfComposition, indexSlopePerLogRatio, shiftRatio } from "../../../recipes/rehearsal/film-law.ts";
import { type ChamberSettings, TUBE_BOUNDS, TUBE_LIKE, TUBE_START } from "../../../recipes/rehearsal/worlds.ts";

const IGNITION_S = 4;

function film(settings: ChamberSettings) {
  const { index, rateNmPerS } = filmLaw(TUBE_LIKE, settings);
  return { index, thicknessNm: rateNmPerS * (settings.get("time")! - IGNITION_S) };
}

function withOnePercentMore(name: string) {
  return film(new Map([...TUBE_START, [name, TUBE_START.get(name)! * 1.01]]));
}

describe("the index law", () => {
  it("runs from amorphous silicon to Si3N4 as Bustarret et al. (1988) have it: 3.3 at x = 0, 1.9 at x = 4/3", () => {
    expect(indexOfComposition(0)).toBe(3.3);
    // (3.3 + 0.5) / 2, exact but for rounding.
    expect(indexOfComposition(4 / 3)).toBeCloseTo(1.9, 14);
  });

  it("refuses a composition that no film has", () => {
    expect(() => indexOfComposition(-0.1)).toThrow(/composition/);
    expect(() => indexOfComposition(Number.NaN)).toThrow(/composition/);
  });
});

describe("the tube-like line", () => {
  it("lays index 2.04 and 73 nm at its start recipe", () => {
    const start = film(TUBE_START);
    // Declared to two decimals.
    expect(Math.abs(start.index - 2.04)).toBeLessThan(0.005);
    expect(start.thicknessNm).toBeCloseTo(73, 9);
  });

  // The declared effects of one per cent more; half a unit of the last declared digit is allowed.
  it.each([
    ["silane", 0.0022, 0.62],
    ["ammonia", -0.0018, null],
    ["time", 0, 0.73],
    ["power", null, 0.25],
    ["pressure", null, 0.29],
  ] as const)("answers one per cent more %s as declared", (name, index, thicknessNm) => {
    const start = film(TUBE_START);
    const more = withOnePercentMore(name);
    if (index !== null) expect(Math.abs(more.index - start.index - index)).toBeLessThan(0.00005);
    if (thicknessNm !== null) expect(Math.abs(more.thicknessNm - start.thicknessNm - thicknessNm)).toBeLessThan(0.0055);
  });

  it("has a slope against the logarithm of the gas ratio that agrees with the derivative of the law by hand", () => {
    // dn/dlnR = dn/dx * x * steepness * (1 - x/xMost), dn/dx = -2.1 / (1 + 0.75 x)^2.
    const x = TUBE_LIKE.xMost / (1 + TUBE_LIKE.ratioHalf / 9);
    const byHand = (-2.1 / (1 + 0.75 * x) ** 2) * x * (1 - x / TUBE_LIKE.xMost);
    // The central difference over 0.2 % errs by its square times the third derivative, well under 1e-6.
    expect(Math.abs(indexSlopePerLogRatio(TUBE_LIKE, TUBE_START) - byHand)).toBeLessThan(1e-6);
  });

  it("refuses a missing setting and one that is not a positive number, by name", () => {
    const without = new Map(TUBE_START);
    without.delete("power");
    expect(() => filmLaw(TUBE_LIKE, without)).toThrow(/power/);
    expect(() => filmLaw(TUBE_LIKE, new Map([...TUBE_START, ["silane", 0]]))).toThrow(/silane/);
    expect(() => filmLaw(TUBE_LIKE, new Map([...TUBE_START, ["ammonia", Number.NaN]]))).toThrow(/ammonia/);
  });
});

describe("the move of somebody who knows the truth", () => {
  it("lands on the goal at the same total flow", () => {
    const goal = { index: 2.08, thicknessNm: 88 };
    const settings = aim(film, TUBE_START, goal, { bounds: TUBE_BOUNDS })!;
    const got = film(settings);
    // Bisection and a linear solve: only rounding is left.
    expect(got.index).toBeCloseTo(goal.index, 12);
    expect(got.thicknessNm).toBeCloseTo(goal.thicknessNm, 9);
    expect(settings.get("silane")! + settings.get("ammonia")!).toBeCloseTo(7800, 9);
  });

  it("answers in values that can be typed in, still near the goal", () => {
    const goal = { index: 2.08, thicknessNm: 88 };
    const settings = aim(film, TUBE_START, goal, { bounds: TUBE_BOUNDS, steps: TUBE_STEPS })!;
    for (const [name, step] of TUBE_STEPS) expect(settings.get(name)! % step).toBe(0);
    // Half a second is 0.07 nm; 5 sccm of ammonia are 0.07 % or 0.0002 in index.
    expect(Math.abs(film(settings).thicknessNm - goal.thicknessNm)).toBeLessThan(0.08);
    expect(Math.abs(film(settings).index - goal.index)).toBeLessThan(0.0004);
  });

  it("says when the goal is out of reach, in index or in time", () => {
    expect(aim(film, TUBE_START, { index: 2.6, thicknessNm: 88 }, { bounds: TUBE_BOUNDS })).toBeNull();
    expect(aim(film, TUBE_START, { index: 1.7, thicknessNm: 88 }, { bounds: TUBE_BOUNDS })).toBeNull();
    expect(aim(film, TUBE_START, { index: 2.06, thicknessNm: 160 }, { bounds: TUBE_BOUNDS })).toBeNull();
  });

  it("keeps the total flow when only the ratio moves, and rounds to the smallest steps", () => {
    const moved = shiftRatio(TUBE_START, 1.1);
    expect(moved.get("ammonia")! / moved.get("silane")!).toBeCloseTo(9.9, 12);
    expect(moved.get("ammonia")! + moved.get("silane")!).toBeCloseTo(7800, 9);
    const rounded = typed(
      new Map([
        ["silane", 715.6],
        ["ammonia", 7084.4],
      ]),
    );
    expect([...rounded.values()]).toEqual([716, 7080]);
  });
});
