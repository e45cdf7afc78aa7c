import { describe, expect, test } from "vitest";
import {
  cauchyMaterial,
  constantMaterial,
  extrapolated,
  extrapolationSentence,
  materialByName,
  mixtureMaterial,
  onGrid,
  siliconNitride,
  tabulated,
} from "../../../engine/index.ts";
import { refusalCode } from "../../support/refusal.ts";

const film = tabulated({
  name: "film.csv",
  source: "film.csv",
  rows: [
    [400, 2.2, 0.1],
    [500, 2.1, 0.01],
    [600, 2.05, 0],
  ],
});

describe("a table asked beyond its ends", () => {
  const wide = extrapolated(film);

  test("holds the n and k of its end rows, and is itself inside", () => {
    expect(wide.at(300)).toEqual(film.at(400));
    expect(wide.at(900)).toEqual(film.at(600));
    expect(wide.at(470)).toEqual(film.at(470));
    const { n, k } = onGrid(wide, [300, 470, 900]);
    expect([n[0], n[2]]).toEqual([film.at(400).n, film.at(600).n]);
    expect(n[1]).toBe(film.at(470).n);
    expect(k[0]).toBe(film.at(400).k);
    expect(onGrid(extrapolated(siliconNitride(2.05)), [200, 1300]).n[1]).toBe(siliconNitride(2.05).at(1240).n);
  });

  test("keeps name and source, and says what was done where it was done", () => {
    expect([wide.name, wide.source]).toEqual(["film.csv", "film.csv"]);
    expect(wide.extrapolations).toEqual([{ name: "film.csv", knownNm: [400, 600], how: "held" }]);
    const said = "film.csv is known from 400 to 600 nm; beyond, its last value is held";
    expect(extrapolationSentence(wide, 300, 600)).toBe(said);
    expect(extrapolationSentence(wide, 400, 601)).toBe(said);
    expect(extrapolationSentence(wide, 400, 600)).toBeNull();
    expect(extrapolationSentence(film, 300, 600)).toBeNull();
  });

  test("still refuses what is no wavelength, and as it was it refuses to go beyond", () => {
    for (const bad of [0, -5, Number.NaN, Number.POSITIVE_INFINITY])
      expect(refusalCode(() => wide.at(bad))).toBe("outside-table");
    expect(refusalCode(() => film.at(601))).toBe("outside-table");
  });
});

describe("a formula asked beyond its range", () => {
  test("is carried on", () => {
    const cauchy = extrapolated(cauchyMaterial({ a: 1.9, bNm2: 2e4, rangeNm: [300, 1200], name: "my film" }));
    expect(cauchy.at(2000).n).toBe(1.9 + 2e4 / 4e6);
    expect(extrapolationSentence(cauchy, 300, 1300)).toBe(
      "my film is known from 300 to 1200 nm; beyond, its formula is carried on",
    );
    expect(extrapolated(materialByName("silica")).at(2200).n).toBeGreaterThan(1.42);
  });

  test("is refused where it is not physical", () => {
    const falling = extrapolated(cauchyMaterial({ a: 1.9, bNm2: -5e4, rangeNm: [300, 1200] }));
    expect(falling.at(250).n).toBeCloseTo(1.9 - 0.8, 12);
    expect(refusalCode(() => falling.at(150))).toBe("material-value");
    expect(refusalCode(() => falling.at(Number.POSITIVE_INFINITY))).toBe("outside-table");
    // Malitson's nearest pole in the ultraviolet lies at 116 nm
    expect(refusalCode(() => extrapolated(materialByName("silica")).at(110))).toBe("material-value");
  });
});

describe("extrapolation elsewhere", () => {
  test("is nothing for a constant, and is not done twice", () => {
    const constant = constantMaterial(1.64);
    expect(extrapolated(constant)).toBe(constant);
    expect(extrapolated(extrapolated(film)).extrapolations).toHaveLength(1);
  });

  test("of a component is said by the mixture, and a mixture is held as a whole", () => {
    const silica = materialByName("silica");
    const parts = [
      { material: extrapolated(film), share: 0.5 },
      { material: silica, share: 0.5 },
    ];
    const mixed = mixtureMaterial(parts);
    expect(mixed.rangeNm).toEqual(silica.rangeNm);
    expect(extrapolationSentence(mixed, 300, 1100)).toBe(
      "film.csv is known from 400 to 600 nm; beyond, its last value is held",
    );
    const wide = extrapolated(mixed);
    expect(wide.at(2500)).toEqual(mixed.at(2000));
    expect(extrapolationSentence(wide, 300, 2500)).toContain("mixture of film.csv 50 %, silica 50 % is known from 210");
  });
});
