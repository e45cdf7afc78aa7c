/**
 * Weighted reflectance against values measured and published by others: K. C. Sahoo et al., Fabrication of antireflective
 * sub-wavelength structures on silicon nitride, Nanoscale Research Letters 4, 680 (2009), doi 10.1007/s11671-009-9297-7, table 1:
 * bare polished silicon 35.61 %, 69.1 nm of silicon nitride on it 11.22 %, 56 nm of magnesium fluoride on that 7.64 %.
 *
 * The table gives neither the films' index nor the range and weight of the average. Photons from 300 to 1200 nm are assumed,
 * the range of the spectrum that silicon uses; the indices are those of common films. So these are checks to about half a
 * per cent, and they say which assumption each tolerance rests on.
 */
import { describe, expect, test } from "vitest";
import {
  coatedWafer,
  materialByName,
  siliconNitride,
  stackLight,
  wavelengthGrid,
  weightedAverage,
} from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";

const [fromNm, toNm] = [300, 1200];
const wafer = coatedWafer({ surface: { kind: "polished" }, seenFrom: "air", fromNm, toNm, weight: "photons" });

describe("69.1 nm of silicon nitride on polished silicon", () => {
  test("reflects 11.2 % when its index is 1.905, that of a measured film of the family", () => {
    expectClose(wafer.weightedReflectancePercent(1.905, 69.1), 11.22, {
      absolute: 0.1,
      because: "0.1 is what 0.5 nm of film or 0.01 of index change; light from the rear is not in ours",
    });
  });

  test("and at any index a nitride may have, 1.87 to 2.1, lies within 0.9 % of it", () => {
    for (let index = 1.87; index <= 2.1; index += 0.01) {
      const because = "the index is not stated: 0.9 spans the family";
      expectClose(wafer.weightedReflectancePercent(index, 69.1), 11.22, { absolute: 0.9, because });
    }
  });

  test("the measured bare wafer reflects more than ours, by no more than light from its rear may add", () => {
    const bare = wafer.weightedReflectancePercent(2, 0);
    expect(35.61).toBeGreaterThan(bare);
    expectClose(bare, 35.61, {
      absolute: 0.8,
      because: "18 % of the photons lie beyond 1000 nm; some percent of them come back from the rear of a wafer",
    });
  });
});

describe("magnesium fluoride, 56 nm, on 69.1 nm of silicon nitride", () => {
  const grid = wavelengthGrid(fromNm, toNm, 5);
  const silicon = materialByName("silicon");
  // n 1.38 in the visible (handbooks, from memory); it falls by about 0.01 from 400 to 1000 nm.
  const percent = (index: number, fluorideNm: number) => {
    const nitride = siliconNitride(index);
    const reflectance = grid.map((wavelengthNm) => {
      const layers = [
        { n: 1.38, k: 0, thicknessNm: fluorideNm },
        { ...nitride.at(wavelengthNm), thicknessNm: 69.1 },
      ];
      const substrate = silicon.at(wavelengthNm);
      return stackLight({ wavelengthNm, angleRad: 0, incidenceIndex: 1, layers, substrate, polarisation: "s" })
        .reflectance;
    });
    return 100 * weightedAverage(grid, reflectance, fromNm, toNm);
  };

  test("reflects 7.6 %, between what nitride of 1.905 and of 2.0 gives", () => {
    expect(percent(1.905, 56)).toBeGreaterThan(7.64);
    expect(percent(2.0, 56)).toBeLessThan(7.64);
    expectClose(percent(1.905, 56), 7.64, {
      absolute: 0.6,
      because: "index not stated, rear not in ours, n 1.38 rounded",
    });
  });

  test("a layer of no thickness leaves the single film, by the other route through the engine", () => {
    expectClose(percent(1.905, 0), wafer.weightedReflectancePercent(1.905, 69.1), {
      absolute: 0.02,
      because: "5 and 10 nm grids",
    });
  });
});

describe("polished silicon by other measurements of its index (M. A. Green and M. J. Keevers, Prog. Photovolt. 3, 189 (1995))", () => {
  // Their n; k adds under 1e-4 to reflectance from 500 nm on.
  const rows: readonly (readonly [number, number])[] = [
    [500, 4.293],
    [550, 4.077],
    [600, 3.939],
    [650, 3.844],
    [700, 3.774],
    [800, 3.681],
    [900, 3.62],
    [1000, 3.57],
    [1100, 3.541],
  ];
  test.each(rows)("at %f nm, n %f, reflects the same within 0.1 %", (wavelengthNm, n) => {
    const substrate = materialByName("silicon").at(wavelengthNm);
    const question = { wavelengthNm, angleRad: 0, incidenceIndex: 1, layers: [], substrate };
    const { reflectance } = stackLight({ ...question, polarisation: "s" });
    expectClose(reflectance, ((n - 1) / (n + 1)) ** 2, {
      absolute: 1e-3,
      because: "n of the two sources differs by up to 0.0063",
    });
  });
});
