import { describe, expect, test } from "vitest";
import { coatedWafer, improveStack, opticsChoice, type WaferDescription } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";
import { index, nitride, polished, pyramids, stackOf, thickness } from "./stacks.ts";

const wafers: [string, WaferDescription][] = [
  ["polished in air", { surface: polished, seenFrom: "air", fromNm: 300, toNm: 1100, weight: "photons" }],
  ["pyramids in air", { surface: pyramids, seenFrom: "air", fromNm: 300, toNm: 1100, weight: "photons" }],
  ["pyramids under glass", { surface: pyramids, seenFrom: "glass", fromNm: 320, toNm: 1100, weight: "photons" }],
];

describe("what optics alone would choose", () => {
  test.each(wafers)("on %s is no worse than any film of a grid, asked of the coated wafer", (_, wafer) => {
    const ranges = { indexRange: [1.85, 2.2], thicknessRange: [50, 110] } as const;
    const { free, held, costMaCm2 } = opticsChoice(wafer, { ...ranges, heldIndex: 2.06 });
    const coated = coatedWafer(wafer);
    const loss = (n: number, nm: number): number => {
      const { available, intoSilicon } = coated.currents(n, nm);
      return available - intoSilicon;
    };
    expectClose(free.lossMaCm2, loss(free.index, free.thicknessNm), {
      absolute: 1e-9,
      because: "two routes through the same optics",
    });
    for (let n = 1.85; n <= 2.2; n += 0.05) {
      for (let nm = 50; nm <= 110; nm += 4) expect(loss(n, nm)).toBeGreaterThanOrEqual(free.lossMaCm2 - 1e-9);
    }
    for (let nm = 50; nm <= 110; nm += 1) expect(loss(2.06, nm)).toBeGreaterThanOrEqual((held?.lossMaCm2 ?? 99) - 1e-9);
    expectClose(costMaCm2 ?? Number.NaN, (held?.lossMaCm2 ?? 0) - free.lossMaCm2, {
      absolute: 1e-12,
      because: "a difference",
    });
    expect(costMaCm2).toBeGreaterThan(0);
  });

  test("is what the thorough search finds", () => {
    const { free, held } = opticsChoice(wafers[0][1], {
      indexRange: [1.85, 2.2],
      thicknessRange: [40, 120],
      heldIndex: 2.06,
    });
    const stack = stackOf([nitride(2.06)], {}, 10);
    const thorough = improveStack(stack, [thickness(0, 40, 120), index(0, 1.85, 2.2, 2.06)]);
    const tolerance = { absolute: 1e-4, because: "both end where the slope is below 1e-6 mA/cm2 over the range" };
    expectClose(free.thicknessNm, thorough.unknowns[0].value, tolerance);
    expectClose(free.index, thorough.unknowns[1].value, tolerance);
    expectClose(held?.thicknessNm ?? Number.NaN, thorough.held?.optimum.values[0] ?? Number.NaN, tolerance);
  });

  test("finds the thin film among thicker ones that also have a valley", () => {
    const { free } = opticsChoice(wafers[0][1], { indexRange: [1.9, 2.1], thicknessRange: [20, 500] });
    expect(free.thicknessNm).toBeLessThan(100);
  });

  test("says where it would go further", () => {
    const { free, indexAtBound, thicknessAtBound, held, costMaCm2 } = opticsChoice(wafers[0][1], {
      indexRange: [2.0, 2.1],
      thicknessRange: [40, 120],
    });
    expect([free.index, indexAtBound, thicknessAtBound, held, costMaCm2]).toEqual([2.0, true, false, null, null]);
  });

  test("is refused outside the nitride family", () => {
    const ask = (indexRange: [number, number], heldIndex?: number) => () =>
      opticsChoice(wafers[0][1], { indexRange, thicknessRange: [40, 120], heldIndex });
    expect(refusalCode(ask([1.5, 2]))).toBe("index-out-of-range");
    expect(refusalCode(ask([2.1, 2]))).toBe("range-order");
    expect(refusalCode(ask([1.9, 2.1], 2.6))).toBe("index-out-of-range");
  });
});
