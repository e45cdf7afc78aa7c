import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  coatedWafer,
  filmStack,
  materialByName,
  type SeenFrom,
  siliconNitride,
  type WaferSurface,
} from "../../engine/index.ts";
import { expectAllClose, expectClose } from "../support/close.ts";
import { refusalCode } from "../support/refusal.ts";

const surfaces: WaferSurface[] = [
  { kind: "polished" },
  { kind: "pyramids", facetAngleDeg: 52 },
  { kind: "pyramids", facetAngleDeg: 54.74, arrangement: "regular" },
];
const views: SeenFrom[] = ["air", "glass", { index: 1.49 }];
const range = { fromNm: 300, toNm: 1100, weight: "photons" } as const;

describe("the coated wafer", () => {
  test("agrees with the general stack code on every surface it shares with it", () => {
    for (const surface of surfaces.slice(0, 2)) {
      for (const seenFrom of views) {
        const fast = coatedWafer({ surface, seenFrom, ...range, stepNm: 20 });
        const general = filmStack({
          light: { ...range, stepNm: 20, angleDeg: 0, polarisation: "both" },
          seenFrom,
          film: [{ material: siliconNitride(2.07), thicknessNm: 77.7 }],
          surface: surface.kind === "polished" ? surface : { kind: "pyramids", facetAngleDeg: 52 },
          substrate: materialByName("silicon"),
        });
        const spectrum = fast.nitride(2.07, 77.7);
        const tolerance = { absolute: 1e-12, because: "two ways to the same numbers, rounding" };
        expectAllClose(spectrum.reflectance, general.reflectance, tolerance);
        expectAllClose(spectrum.transmittance, general.transmittance, tolerance);
        expectAllClose(spectrum.absorptance, general.absorptance[0], tolerance);
        const percent = fast.weightedReflectancePercent(2.07, 77.7);
        expectClose(percent, general.weighted_reflectance_percent, { absolute: 1e-10, because: "rounding" });
        const minimum = fast.reflectanceMinimumNm(2.07, 77.7) ?? Number.NaN;
        // Searched from 10 and from 20 nm brackets, each to 0.005 nm.
        const because = "both searches close in to 0.005 nm";
        expectClose(minimum, general.reflectance_minimum_nm ?? Number.NaN, { absolute: 0.02, because });
        const seen = fast.colour(2.07, 77.7);
        expect(seen.hex).toBe(general.colour?.hex);
        const currents = fast.currents(2.07, 77.7);
        expectClose(currents.intoSilicon, general.current_ma_cm2.into_substrate, {
          absolute: 1e-10,
          because: "rounding",
        });
      }
    }
  });

  test("accounts for all the light and all the current", () => {
    const wafers = surfaces.flatMap((surface) =>
      views.map((seenFrom) => ({ seenFrom, wafer: coatedWafer({ surface, seenFrom, ...range }) })),
    );
    fc.assert(
      fc.property(
        fc.constantFrom(...wafers),
        fc.double({ min: 1.8, max: 2.3, noNaN: true }),
        fc.double({ min: 0, max: 300, noNaN: true }),
        ({ seenFrom, wafer }, index, thicknessNm) => {
          const { reflectance, transmittance, absorptance } = wafer.nitride(index, thicknessNm);
          for (let i = 0; i < reflectance.length; i++) {
            const sum = reflectance[i] + transmittance[i] + absorptance[i];
            for (const share of [reflectance[i], transmittance[i], absorptance[i]])
              expect(share).toBeGreaterThanOrEqual(0);
            if (seenFrom === "glass") expect(sum).toBeLessThan(1);
            else expectClose(sum, 1, { absolute: 1e-12, because: "conservation, rounding" });
          }
          const c = wafer.currents(index, thicknessNm);
          const parts = c.reflected + c.absorbedInFilm + c.intoSilicon + c.absorbedInCover;
          expectClose(parts, c.available, { absolute: 1e-9, because: "rounding" });
          expect(c.absorbedInCover).toBeGreaterThanOrEqual(0);
          expectClose((100 * c.reflected) / c.available, wafer.weightedReflectancePercent(index, thicknessNm), {
            absolute: 1e-9,
            because: "the same average twice",
          });
        },
      ),
      { numRuns: 60, seed: 5 },
    );
  });

  test("has its minimum where the spectrum on a fine grid is lowest", () => {
    for (const surface of surfaces) {
      const coarse = coatedWafer({ surface, seenFrom: "air", ...range });
      const fine = coatedWafer({ surface, seenFrom: "air", ...range, stepNm: 0.5 });
      for (const thicknessNm of [66, 78.3, 95]) {
        const { reflectance } = fine.nitride(2.09, thicknessNm);
        // From 400 nm on: on pyramids the ultraviolet can be lower still, but is not the film's doing.
        const visible = Array.from(reflectance, (r, i) => (fine.wavelengthNm[i] < 400 ? 1 : r));
        const lowest = fine.wavelengthNm[visible.indexOf(Math.min(...visible))];
        const minimum = coarse.reflectanceMinimumNm(2.09, thicknessNm) ?? Number.NaN;
        expectClose(minimum, lowest, {
          absolute: 0.3,
          because: "half a step of the fine grid, and the search's 0.005 nm",
        });
      }
    }
  });

  test("has no minimum when the quarter wave lies outside the range", () => {
    const wafer = coatedWafer({ surface: { kind: "polished" }, seenFrom: "air", ...range });
    expect(wafer.reflectanceMinimumNm(2.09, 0)).toBeNull();
    expect(wafer.reflectanceMinimumNm(2.09, 15)).toBeNull();
    expect(wafer.reflectanceMinimumNm(2.09, 150)).toBeNull();
    // Third-order dips of thicker films are not the main minimum.
    expect(wafer.reflectanceMinimumNm(2.09, 220)).toBeNull();
  });

  test("looks blue at 75 to 80 nm, and a bare wafer grey (common practice)", () => {
    const wafer = coatedWafer({ surface: { kind: "polished" }, seenFrom: "air", ...range });
    expect(wafer.colour(2.09, 76).words).toMatch(/blue/);
    expect(wafer.colour(2.09, 0).words).toMatch(/grey/);
    expect(wafer.colour(2.09, 50).words).toMatch(/brown/);
    expect(wafer.colour(2.09, 62).words).toMatch(/purple/);
  });

  test("under glass reflects at least the glass's own 4 %, and less of the coated silicon's UV", () => {
    const bare = coatedWafer({ surface: { kind: "polished" }, seenFrom: "glass", ...range });
    const { reflectance } = bare.nitride(2.05, 76);
    for (const r of reflectance) expect(r).toBeGreaterThan(0.0395);
    // EVA with ultraviolet absorber lets nothing of 320 nm through, so what is left is the glass front: ((n-1)/(n+1))^2.
    const front = ((materialByName("glass").at(320).n - 1) / (materialByName("glass").at(320).n + 1)) ** 2;
    expectClose(reflectance[2], front, { absolute: 1e-4, because: "glass to encapsulant reflects under 1e-4" });
  });

  test("says when the nitride is extrapolated, and refuses what it cannot know", () => {
    const wafer = coatedWafer({ surface: { kind: "polished" }, seenFrom: "air", ...range });
    expect(wafer.extrapolated(2.05)).toBe(false);
    expect(wafer.extrapolated(2.2)).toBe(true);
    expect(refusalCode(() => wafer.nitride(2.4, 80))).toBe("index-out-of-range");
    expect(refusalCode(() => wafer.nitride(2.05, -1))).toBe("film-thickness");
    expect(refusalCode(() => wafer.weightedReflectancePercent(2.05, Number.NaN))).toBe("film-thickness");
    const make = (change: object) => () =>
      coatedWafer({ surface: { kind: "polished" }, seenFrom: "air", ...range, ...change });
    expect(refusalCode(make({ toNm: 1290 }))).toBe("outside-table");
    expect(refusalCode(make({ fromNm: 290, seenFrom: "glass" }))).toBe("outside-table");
    expect(refusalCode(make({ surface: { kind: "pyramids", facetAngleDeg: 45 } }))).toBe("facet-angle");
    expect(refusalCode(make({ seenFrom: { index: -1 } }))).toBe("stack-value");
  });
});
