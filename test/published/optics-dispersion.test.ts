/**
 * Dispersion formulas against the values that go with them. Fused silica: I. H. Malitson, J. Opt. Soc. Am. 55, 1205 (1965); his
 * index at the lines below is quoted in every glass table, here from memory (the d line 1.45846 was looked up). Abbe's number
 * follows from three of them.
 */
import { describe, expect, test } from "vitest";
import { materialByName, sellmeierMaterial } from "../../engine/index.ts";
import { nitridePhilipp1973 } from "../../engine/materials/data/sellmeier.ts";
import { expectClose } from "../support/close.ts";

const silica = materialByName("silica");

describe("fused silica (Malitson 1965)", () => {
  test.each([
    ["mercury, 253.652 nm", 253.652, 1.50551],
    ["h, 404.656 nm", 404.6561, 1.46962],
    ["F, 486.133 nm", 486.1327, 1.46313],
    ["e, 546.074 nm", 546.074, 1.46008],
    ["d, 587.562 nm", 587.5618, 1.45846],
    ["helium-neon, 632.8 nm", 632.801, 1.45702],
    ["C, 656.273 nm", 656.2725, 1.45637],
    ["mercury, 1013.98 nm", 1013.98, 1.45024],
    ["neodymium, 1064 nm", 1064, 1.44963],
    ["1550 nm", 1550, 1.44402],
  ])("%s", (_, wavelengthNm, n) => {
    expectClose(silica.at(wavelengthNm).n, n, { absolute: 6e-6, because: "printed to 5 decimals" });
    expect(silica.at(wavelengthNm).k).toBe(0);
  });

  test("has the Abbe number 67.8 (glass tables, from memory)", () => {
    const n = (wavelengthNm: number) => silica.at(wavelengthNm).n;
    expectClose((n(587.5618) - 1) / (n(486.1327) - n(656.2725)), 67.8, { absolute: 0.06, because: "printed to 0.1" });
  });
});

describe("silicon nitride (Philipp 1973, formula of Baak 1982)", () => {
  const nitride = sellmeierMaterial(nitridePhilipp1973);
  test("follows n^2 = 1 + 2.8939 l^2/(l^2 - 0.13967^2), l in um, where the fraction is 4/3 and 9/8 exactly", () => {
    expectClose(nitride.at(279.34).n, Math.sqrt(1 + (2.8939 * 4) / 3), { relative: 1e-12, because: "rounding" });
    expectClose(nitride.at(3 * 139.67).n, Math.sqrt(1 + (2.8939 * 9) / 8), { relative: 1e-12, because: "rounding" });
  });
});
