import { describe, expect, test } from "vitest";
import { coatedWafer, type SeenFrom, type WaferSurface } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const indices = [1.85, 1.98, 2.06, 2.2];
const surfaces: [string, WaferSurface, SeenFrom][] = [
  ["polished, air", { kind: "polished" }, "air"],
  ["polished, glass", { kind: "polished" }, "glass"],
  ["random pyramids, air", { kind: "pyramids", facetAngleDeg: 55.5 }, "air"],
  ["random pyramids, glass", { kind: "pyramids", facetAngleDeg: 52 }, "glass"],
  ["regular pyramids, index 1.5", { kind: "pyramids", facetAngleDeg: 54.74, arrangement: "regular" }, { index: 1.5 }],
];

describe("the weighted reflectance of a whole plane of films", () => {
  test.each(surfaces)(
    "on %s is that of film by film, read between coarse thicknesses or not",
    (_, surface, seenFrom) => {
      const wafer = coatedWafer({ surface, seenFrom, fromNm: 300, toNm: 1100, weight: "photons" });
      for (const [thickness, absolute, because] of [
        [{ fromNm: 0, stepNm: 0.4, columns: 301 }, 5e-9, "sixteen nodes 2 nm apart, percent"],
        [{ fromNm: 0, stepNm: 7, columns: 20 }, 1e-11, "rounding, percent"],
        [{ fromNm: 90, stepNm: -0.3, columns: 140 }, 5e-9, "sixteen nodes 1.8 nm apart, percent"],
        [{ fromNm: 80, stepNm: 0, columns: 2 }, 1e-11, "rounding, percent"],
      ] as const) {
        const map = wafer.weightedReflectanceMap(indices, thickness);
        expect(map).toHaveLength(indices.length * thickness.columns);
        for (let row = 0; row < indices.length; row++) {
          for (let column = 0; column < thickness.columns; column += 1 + Math.floor(thickness.columns / 19)) {
            const thicknessNm = thickness.fromNm + column * thickness.stepNm;
            const one = wafer.weightedReflectancePercent(indices[row], thicknessNm);
            expectClose(map[row * thickness.columns + column], one, { absolute, because });
          }
        }
      }
    },
  );

  test("refuses thicknesses that are none", () => {
    const wafer = coatedWafer({ surface: surfaces[0][1], seenFrom: "air", fromNm: 300, toNm: 1100, weight: "photons" });
    const ask = (fromNm: number, stepNm: number, columns: number) => () =>
      wafer.weightedReflectanceMap([2], { fromNm, stepNm, columns });
    for (const ask1 of [ask(-1, 1, 5), ask(10, -3, 5), ask(10, 1, 0), ask(10, 1, 2.5), ask(Number.NaN, 1, 3)])
      expect(refusalCode(ask1)).toBe("film-thickness");
  });
});
