/**
 * The coated wafer against numbers from outside: the standard's photon currents, and values of an independent program for
 * the same published silicon and nitride data, which was written for this project in another language.
 */
import { describe, expect, test } from "vitest";
import {
  coatedWafer,
  crystalFacetAngleDeg,
  materialByName,
  minimise,
  type SeenFrom,
  type WaferSurface,
  wavelengthGrid,
  weightedAverage,
} from "../../engine/index.ts";
import { sunlightPower, sunlightWavelengthNm } from "../../engine/sunlight/spectrum.ts";
import { expectClose } from "../support/close.ts";

const polished: WaferSurface = { kind: "polished" };
const pyramids = (facetAngleDeg: number): WaferSurface => ({ kind: "pyramids", facetAngleDeg });
const wafer = (surface: WaferSurface, fromNm = 300, toNm = 1100, seenFrom: SeenFrom = "air") =>
  coatedWafer({ surface, seenFrom, fromNm, toNm, weight: "photons" });

describe("sunlight of ASTM G173-03, trapezoid on its own points", () => {
  test("holds 879.137 W/m2 from 280 to 1300 nm", () => {
    let sum = 0;
    for (let i = 1; i < sunlightPower.length; i++) {
      const width = sunlightWavelengthNm[i] - sunlightWavelengthNm[i - 1];
      sum += (width * (sunlightPower[i] + sunlightPower[i - 1])) / 2;
    }
    expectClose(sum, 879.137, { absolute: 0.001, because: "quoted to 3 decimals" });
  });

  test.each([
    [300, 1200, 46.456],
    [300, 1107, 43.811],
    [300, 1100, 43.518],
  ])("gives from %d to %d nm a photon current of %f mA/cm2", (fromNm, toNm, current) => {
    const { available } = wafer(polished, fromNm, toNm).currents(2, 0);
    expectClose(available, current, { absolute: 0.0006, because: "quoted to 3 decimals" });
  });
});

describe("bare silicon of Green (2008), photons", () => {
  test.each([
    [300, 1200, 34.98],
    [300, 1100, 35.24],
    [400, 1100, 34.59],
  ])("polished, from %d to %d nm reflects %f %%", (fromNm, toNm, percent) => {
    // A film of zero thickness, and the Fresnel formula written out, agree with the independent program.
    const { n, k } = { n: [] as number[], k: [] as number[] };
    const grid = wavelengthGrid(fromNm, toNm, 10);
    for (const wavelengthNm of grid) {
      const here = materialByName("silicon").at(wavelengthNm);
      n.push(here.n);
      k.push(here.k);
    }
    const fresnel = n.map((index, i) => ((1 - index) ** 2 + k[i] ** 2) / ((1 + index) ** 2 + k[i] ** 2));
    const bare = wafer(polished, fromNm, toNm).weightedReflectancePercent(2, 0);
    expectClose(bare, percent, { absolute: 0.02, because: "stated +-0.02 for other fine choices of rule" });
    expectClose(bare, 100 * weightedAverage(grid, fresnel, fromNm, toNm), { absolute: 1e-9, because: "rounding" });
  });

  test.each([
    [crystalFacetAngleDeg, 300, 1200, 9.9],
    [crystalFacetAngleDeg, 300, 1100, 10.06],
    [52, 300, 1200, 10.6],
    [50, 300, 1200, 11.1],
  ])("with random pyramids of %f deg, from %d to %d nm reflects %f %%", (facetAngleDeg, fromNm, toNm, percent) => {
    const bare = wafer(pyramids(facetAngleDeg), fromNm, toNm).weightedReflectancePercent(2, 0);
    expectClose(bare, percent, {
      absolute: 0.07,
      because: "printed to 0.1; a few patches of texture more or less move it by 0.02",
    });
  });
});

describe("the best thickness, 300 to 1100 nm, photons", () => {
  test.each([
    ["polished", polished, 1.905, 83, 83],
    ["polished", polished, 2.05, 77, 77],
    ["pyramids", pyramids(crystalFacetAngleDeg), 1.905, 79, 79],
    ["pyramids", pyramids(crystalFacetAngleDeg), 2.05, 73, 73],
  ])("%s %j n %f: %d nm for reflection, %d nm with absorption", (_, surface, index, reflected, lost) => {
    const on = wafer(surface);
    const tolerance = { absolute: 1, because: "printed to 1 nm, and k between the members differs by rule" };
    const forReflection = minimise((d) => on.weightedReflectancePercent(index, d), 60, 100, 1e-4).x;
    expectClose(forReflection, reflected, tolerance);
    const loss = (d: number): number => {
      const current = on.currents(index, d);
      return current.reflected + current.absorbedInFilm;
    };
    expectClose(minimise(loss, 60, 100, 1e-4).x, lost, tolerance);
  });
});

describe("what one nanometre does, n 2.09 in air", () => {
  const flat = wafer(polished);
  const textured = wafer(pyramids(crystalFacetAngleDeg));
  const at = (on: typeof flat, index: number, thicknessNm: number): number =>
    on.reflectanceMinimumNm(index, thicknessNm) ?? Number.NaN;

  test("the minimum moves 7.6 to 7.8 nm per nm of film on average", () => {
    for (const on of [flat, textured]) {
      const slope = (at(on, 2.09, 95) - at(on, 2.09, 65)) / 30;
      expectClose(slope, 7.7, { absolute: 0.25, because: "printed as 7.6-7.8, an average over an unstated range" });
    }
  });

  test("and 2.7 nm per 0.01 of index", () => {
    for (const on of [flat, textured]) {
      const slope = (at(on, 2.12, 78) - at(on, 2.06, 78)) / 6;
      expectClose(slope, 2.7, { absolute: 0.25, because: "printed to 0.1, surface and thickness not stated" });
    }
  });

  test("it lies 10 to 17 nm lower on pyramids than on a polished surface", () => {
    for (let thicknessNm = 66; thicknessNm <= 90; thicknessNm += 4) {
      const lower = at(flat, 2.09, thicknessNm) - at(textured, 2.09, thicknessNm);
      expect(lower).toBeGreaterThan(9);
      expect(lower).toBeLessThan(17);
    }
  });

  test("and moves evenly: no jerks from rounded tables", () => {
    const steps: number[] = [];
    for (let thicknessNm = 65; thicknessNm < 100; thicknessNm += 0.5) {
      steps.push(2 * (at(flat, 2.09, thicknessNm + 0.5) - at(flat, 2.09, thicknessNm)));
    }
    // Straight through the printed digits the steps scatter from 6.2 to 10.9 nm per nm.
    expect(Math.min(...steps)).toBeGreaterThan(7.4);
    expect(Math.max(...steps)).toBeLessThan(8.2);
  });
});
