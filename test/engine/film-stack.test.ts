import { describe, expect, test } from "vitest";
import {
  constantMaterial,
  extrapolated,
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
      "extrapolated",
    ]);
    expect(Object.keys(answer.current_ma_cm2)).toEqual([
      "available",
      "reflected",
      "absorbed_in_cover",
      "absorbed_in_cover_layers",
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

  test("under any list of thick layers accounts for all the current, layer by layer", () => {
    const thick = [
      { material: materialByName("glass"), thicknessMm: 4 },
      { material: constantMaterial(1.48, 3e-7), thicknessMm: 0.6 },
      { material: constantMaterial(1.52, 0), thicknessMm: 1 },
    ];
    const seenFrom = { thick };
    const cases = [
      under({}, { seenFrom }),
      under({ angleDeg: 55 }, { seenFrom }),
      under({ angleDeg: 55, polarisation: "p" }, { seenFrom }),
      under({}, { seenFrom, surface: { kind: "pyramids", facetAngleDeg: 55 } }),
      under({}, { seenFrom, surface: { kind: "pyramids", facetAngleDeg: 55, arrangement: "regular" } }),
    ];
    for (const { current_ma_cm2: c } of cases) {
      expect(c.absorbed_in_cover_layers).toHaveLength(3);
      expect(c.absorbed_in_cover_layers[0]).toBeGreaterThan(0.05);
      expect(c.absorbed_in_cover_layers[1]).toBeGreaterThan(0.05);
      expect(c.absorbed_in_cover_layers[2]).toBe(0);
      const parts = [...c.absorbed_in_cover_layers, ...c.absorbed_in_film, c.reflected, c.into_substrate];
      expectClose(
        parts.reduce((a, b) => a + b, 0),
        c.available,
        { relative: 1e-12, because: "each part comes from its own sum: conservation, rounding" },
      );
      expectClose(c.absorbed_in_cover, c.available - parts.slice(3).reduce((a, b) => a + b, 0), {
        absolute: 1e-10,
        because: "rounding",
      });
    }
  });

  test("says what a quantum efficiency collects of the light in the substrate, and only where one is given", () => {
    const flat = { wavelengthNm: [300, 1100], efficiency: [0.8, 0.8] };
    const step = { wavelengthNm: [250, 700, 700.001, 1200], efficiency: [0, 0, 1, 1] };
    const { current_ma_cm2: photons } = under({});
    const { current_ma_cm2: some } = under({ weight: flat });
    expect(photons).not.toHaveProperty("collected");
    expect(under({ weight: "power" }).current_ma_cm2).toEqual(photons);
    expect({ ...some, collected: undefined }).toEqual({ ...photons, collected: undefined });
    expectClose(some.collected ?? 0, 0.8 * photons.into_substrate, { relative: 1e-12, because: "rounding" });
    // All photons beyond 700 nm and none before: what enters in that range alone.
    const { current_ma_cm2: half } = under({ weight: step });
    const { current_ma_cm2: red } = under({ fromNm: 700 });
    expectClose(half.collected ?? 0, red.into_substrate, {
      relative: 2e-3,
      because: "half an interval of sunlight at the step, 0.5 nm of 0.07 mA/cm2/nm beside 22.5 mA/cm2",
    });
  });

  test("names what was used beyond its known wavelengths, once each", () => {
    const rows: [number, number, number][] = [
      [350, 2, 0],
      [1000, 2, 0],
    ];
    const known = tabulated({ name: "my film", source: "test", rows });
    const film = [1, 2].map(() => ({ material: extrapolated(known), thicknessNm: 40 }));
    expect(under({}).extrapolated).toEqual([]);
    expect(under({}, { film }).extrapolated).toEqual([expect.stringContaining("my film is known from 350 to 1000 nm")]);
    expect(under({ fromNm: 400, toNm: 900 }, { film }).extrapolated).toEqual([]);
    const front = { thick: [{ material: extrapolated(materialByName("glass")), thicknessMm: 3 }] };
    expect(under({ fromNm: 290 }, { seenFrom: front }).extrapolated).toHaveLength(1);
  });

  test("with a nitride beyond the measured ones says so", () => {
    const film = [{ material: siliconNitride(2.28), thicknessNm: 60 }];
    expect(under({}, { film }).extrapolated).toEqual([expect.stringContaining("2.28")]);
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
    const front = { thick: [{ material: infrared, thicknessMm: 3 }] };
    expect(under({ fromNm: 600 }, { seenFrom: front }).colour).toBeNull();
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
