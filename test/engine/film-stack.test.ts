import { describe, expect, test } from "vitest";
import {
  constantMaterial,
  type FilmStackDescription,
  filmStack,
  materialByName,
  siliconNitride,
  tabulated,
} from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";
import { refusalCode } from "../support/refusal.ts";

const nitride = { material: siliconNitride(2.09), thicknessNm: 60 };
const silica = { material: materialByName("silica"), thicknessNm: 90 };
const base: FilmStackDescription = {
  light: { fromNm: 300, toNm: 1100, stepNm: 20, angleDeg: 0, polarisation: "both", weight: "photons" },
  seenFrom: "air",
  film: [silica, nitride],
  surface: { kind: "polished" },
  substrate: materialByName("silicon"),
};
const under = (light: Partial<FilmStackDescription["light"]>, more: Partial<FilmStackDescription> = {}) =>
  filmStack({ ...base, ...more, light: { ...base.light, ...light } });

describe("a stack of films", () => {
  test("answers in the shape the film verb prints, and survives JSON", () => {
    const answer = filmStack(base);
    expect(Object.keys(answer)).toEqual([
      "wavelength_nm",
      "reflectance",
      "transmittance",
      "absorptance",
      "weighted_reflectance_percent",
      "reflectance_minimum_nm",
      "current_ma_cm2",
      "colour",
    ]);
    expect(Object.keys(answer.current_ma_cm2)).toEqual([
      "available",
      "reflected",
      "absorbed_in_cover",
      "absorbed_in_film",
      "into_substrate",
    ]);
    expect(Object.keys(answer.colour ?? {})).toEqual(["xyz", "lab", "hex", "illuminant", "observer"]);
    expect(answer.wavelength_nm).toHaveLength(41);
    expect(answer.absorptance.map((layer) => layer.length)).toEqual([41, 41]);
    expect(JSON.parse(JSON.stringify(answer))).toEqual(answer);
  });

  test("accounts for all the light at every angle and polarisation, on every surface", () => {
    const cases = [
      under({}),
      under({ angleDeg: 60, polarisation: "s" }),
      under({ angleDeg: 60, polarisation: "p" }),
      under({ angleDeg: 60 }),
      under({}, { surface: { kind: "pyramids", facetAngleDeg: 52 } }),
      under({}, { seenFrom: { index: 1.5 }, film: [] }),
    ];
    for (const { reflectance, transmittance, absorptance, current_ma_cm2: current } of cases) {
      reflectance.forEach((r, i) => {
        const sum = absorptance.reduce((total, layer) => total + layer[i], r + transmittance[i]);
        expectClose(sum, 1, { absolute: 1e-12, because: "conservation" });
      });
      const parts = current.absorbed_in_film.reduce((a, b) => a + b, current.reflected + current.into_substrate);
      expectClose(parts, current.available, { absolute: 1e-9, because: "rounding" });
    }
  });

  test("is the mean of s and p for unpolarised light aslant, in air and under glass", () => {
    for (const seenFrom of ["air", "glass"] as const) {
      const [s, p, both] = (["s", "p", "both"] as const).map((polarisation) =>
        under({ angleDeg: 50, polarisation }, { seenFrom }),
      );
      both.reflectance.forEach((r, i) => {
        expectClose(r, (s.reflectance[i] + p.reflectance[i]) / 2, { absolute: 1e-15, because: "rounding" });
      });
      expect(s.weighted_reflectance_percent).toBeGreaterThan(p.weighted_reflectance_percent);
    }
  });

  test("reflects less with silica on nitride than with nitride alone (two-layer coating, common practice)", () => {
    const single = under({}, { film: [{ ...nitride, thicknessNm: 75 }] });
    expect(filmStack(base).weighted_reflectance_percent).toBeLessThan(single.weighted_reflectance_percent);
  });

  test("under glass leaves in the cover what is in none of the four currents", () => {
    const { current_ma_cm2: c, reflectance, transmittance, absorptance } = under({}, { seenFrom: "glass" });
    const rest = c.available - c.reflected - c.into_substrate - c.absorbed_in_film[0] - c.absorbed_in_film[1];
    expect(rest).toBeGreaterThan(0.1);
    expect(rest).toBeLessThan(2);
    // 600 nm: glass and encapsulant are clear, so almost all light is accounted for.
    const i = 15;
    expectClose(reflectance[i] + transmittance[i] + absorptance[1][i], 1, {
      absolute: 0.01,
      because: "k of 1e-7 over 3.65 mm",
    });
  });

  test("has no minimum without a film, and no colour where a material is not known over the visible", () => {
    expect(under({}, { film: [] }).reflectance_minimum_nm).toBeNull();
    const rows: [number, number, number][] = [
      [500, 2, 0],
      [1200, 2, 0],
    ];
    const infrared = tabulated({ name: "infrared film", source: "test", rows });
    const answer = under({ fromNm: 600 }, { film: [{ material: infrared, thicknessNm: 100 }] });
    expect(answer.colour).toBeNull();
    // A quarter wave of index 2, 800 nm.
    expectClose(answer.reflectance_minimum_nm ?? 0, 800, {
      absolute: 25,
      because: "silicon's own phase moves it a little",
    });
  });

  test("takes constant films and substrates", () => {
    const quarter = { material: constantMaterial(2), thicknessNm: 75 };
    const answer = under({ fromNm: 400 }, { film: [quarter], substrate: constantMaterial(4) });
    expectClose(answer.reflectance_minimum_nm ?? 0, 600, {
      absolute: 0.02,
      because: "the search closes in to 0.005 nm",
    });
    expectClose(answer.reflectance[10], 0, { absolute: 1e-30, because: "sqrt(1 * 4) = 2 at a quarter wave of 600 nm" });
  });

  test("refuses light aslant on pyramids, and wavelengths nobody knows", () => {
    const pyramids = { surface: { kind: "pyramids", facetAngleDeg: 54.74 } } as const;
    expect(refusalCode(() => under({ angleDeg: 10 }, pyramids))).toBe("angle-on-pyramids");
    expect(refusalCode(() => under({ angleDeg: 90 }))).toBe("stack-value");
    expect(refusalCode(() => under({ angleDeg: Number.NaN }))).toBe("not-a-number");
    expect(refusalCode(() => under({ toNm: 1300 }))).toBe("outside-table");
    expect(refusalCode(() => under({ stepNm: 0 }))).toBe("range-step");
    expect(refusalCode(() => under({ fromNm: 1100, toNm: 300 }))).toBe("range-order");
    expect(refusalCode(() => under({}, { film: [{ ...nitride, thicknessNm: -1 }] }))).toBe("stack-value");
  });
});
