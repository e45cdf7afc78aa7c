import { describe, expect, test } from "vitest";
import { coatedWafer, nitrideMemberIndices, random, type WaferSurface } from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";
import { refusalCode } from "../support/refusal.ts";

const surfaces: [string, WaferSurface][] = [
  ["polished", { kind: "polished" }],
  ["pyramids", { kind: "pyramids", facetAngleDeg: 52 }],
];
const range = { fromNm: 300, toNm: 1100, weight: "photons" } as const;

describe.each(surfaces)("the table of a %s wafer", (_, surface) => {
  const wafer = coatedWafer({ surface, seenFrom: "air", ...range });
  const table = wafer.table();

  test("is within 0.005 % absolute of the weighted reflectance, and within 0.3 nm of minima above 510 nm", () => {
    const draw = random(`table ${surface.kind}`);
    let minima = 0;
    for (let i = 0; i < 500; i++) {
      const index = draw.uniform(1.85, 2.28);
      const thicknessNm = draw.uniform(55, 125);
      const because = "what the table promises";
      const percent = wafer.weightedReflectancePercent(index, thicknessNm);
      expectClose(table.weightedReflectancePercent(index, thicknessNm), percent, { absolute: 0.005, because });
      const minimum = wafer.reflectanceMinimumNm(index, thicknessNm);
      if (minimum === null || minimum < 510) continue;
      minima++;
      expectClose(table.reflectanceMinimumNm(index, thicknessNm) ?? Number.NaN, minimum, { absolute: 0.3, because });
    }
    expect(minima).toBeGreaterThan(300);
  });

  test("does not jump where the family's lines join or a new cubic begins", () => {
    const places = [...nitrideMemberIndices().map((index) => [index, 77.7]), [2.05, 80], [2.05, 84]];
    for (const [index, thicknessNm] of places) {
      const tiny = 1e-9;
      const before = table.weightedReflectancePercent(index - tiny, thicknessNm - tiny);
      const after = table.weightedReflectancePercent(index + tiny, thicknessNm + tiny);
      expectClose(after, before, { absolute: 1e-5, because: "1e-9 of index and nanometre apart" });
    }
  });

  test("falls back on the exact answer where there is no minimum nearby, and refuses as it does", () => {
    expect(table.reflectanceMinimumNm(2.09, 5)).toBeNull();
    expect(table.reflectanceMinimumNm(2.09, 200)).toBeNull();
    expect(refusalCode(() => table.weightedReflectancePercent(2.31, 80))).toBe("index-out-of-range");
    expect(refusalCode(() => table.weightedReflectancePercent(2.05, -1))).toBe("film-thickness");
    expect(refusalCode(() => table.reflectanceMinimumNm(Number.NaN, 80))).toBe("not-a-number");
    const bare = wafer.weightedReflectancePercent(2.05, 0);
    expectClose(table.weightedReflectancePercent(2.05, 0), bare, { absolute: 0.01, because: "interpolation" });
  });
});
