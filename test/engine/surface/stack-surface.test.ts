import { describe, expect, test } from "vitest";
import {
  type FilmLayer,
  filmStack,
  materialByName,
  onGrid,
  type SeenFrom,
  StackSurface,
  siliconNitride,
  wavelengthGrid,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const film: FilmLayer[] = [
  { material: materialByName("silica"), thicknessNm: 80 },
  { material: siliconNitride(2.11), thicknessNm: 62 },
];
const grid = wavelengthGrid(320, 1100, 60);
const surfaces = [
  ["polished, straight down", { kind: "polished" as const }, 0, "both" as const],
  ["polished, aslant, unpolarised", { kind: "polished" as const }, 50, "both" as const],
  ["polished, aslant, p", { kind: "polished" as const }, 50, "p" as const],
  ["random pyramids", { kind: "pyramids" as const, facetAngleDeg: 53.2 }, 0, "both" as const],
  [
    "regular pyramids",
    { kind: "pyramids" as const, facetAngleDeg: 55, arrangement: "regular" as const },
    0,
    "both" as const,
  ],
] as const;
const views: [string, SeenFrom][] = [
  ["air", "air"],
  ["glass", "glass"],
  ["index 1.5", { index: 1.5 }],
];
const cases = surfaces.flatMap((surface) => views.map((view) => [surface[0], view[0], surface, view[1]] as const));

const make = ([, surface, angleDeg, polarisation]: (typeof surfaces)[number], seenFrom: SeenFrom) =>
  new StackSurface({
    wavelengthNm: grid,
    seenFrom,
    surface,
    angleRad: (angleDeg * Math.PI) / 180,
    polarisation,
    film: film.map((layer) => onGrid(layer.material, grid)),
    substrate: onGrid(materialByName("silicon"), grid),
  });
const thicknesses = film.map((layer) => layer.thicknessNm);

describe("a stack on a surface", () => {
  test.each(cases)("%s, seen from %s, is what the plain route gives", (_, __, surface, seenFrom) => {
    const fast = make(surface, seenFrom);
    fast.evaluate(thicknesses);
    const answer = filmStack({
      light: { fromNm: 320, toNm: 1100, stepNm: 60, angleDeg: surface[2], polarisation: surface[3], weight: "photons" },
      seenFrom,
      film,
      surface: surface[1],
      substrate: materialByName("silicon"),
    });
    const tolerance = { absolute: 1e-12, because: "some hundred roundings of numbers near 1" };
    fast.reflectance.forEach((value, i) => {
      expectClose(value, answer.reflectance[i], tolerance);
      expectClose(fast.transmittance[i], answer.transmittance[i], tolerance);
    });
  });

  test.each(cases)("%s, seen from %s, has the slopes of finite differences", (_, __, surface, seenFrom) => {
    const at = make(surface, seenFrom);
    at.slopes(thicknesses);
    const moved = make(surface, seenFrom);
    const count = grid.length;
    const value = (parameter: number, by: number) => {
      const layer = parameter % 2;
      const constants = onGrid(film[layer].material, grid);
      const shift = (values: Float64Array) => values.map((v) => v + by);
      moved.setLayer(
        layer,
        parameter < 2
          ? constants
          : parameter < 4
            ? { n: shift(constants.n), k: constants.k }
            : { n: constants.n, k: shift(constants.k) },
      );
      moved.evaluate(thicknesses.map((d, j) => (parameter === j ? d + by : d)));
      moved.setLayer(layer, constants);
      return { r: moved.reflectance.slice(), t: moved.transmittance.slice() };
    };
    for (let parameter = 0; parameter < 6; parameter++) {
      const step = parameter < 2 ? 0.02 : 2e-4;
      const [m2, m1, p1, p2] = [-2, -1, 1, 2].map((c) => value(parameter, c * step));
      const tolerance = { absolute: 1e-9, because: "rounding and truncation of the difference" };
      for (let i = 0; i < count; i++) {
        const slope = (pick: "r" | "t") =>
          (8 * (p1[pick][i] - m1[pick][i]) - (p2[pick][i] - m2[pick][i])) / (12 * step);
        expectClose(at.reflectanceSlopes[parameter * count + i], slope("r"), tolerance);
        expectClose(at.transmittanceSlopes[parameter * count + i], slope("t"), tolerance);
      }
    }
  });

  test("without its cover keeps the medium that touches the film", () => {
    const input = {
      wavelengthNm: grid,
      surface: { kind: "polished" as const },
      film: film.map((layer) => onGrid(layer.material, grid)),
      substrate: onGrid(materialByName("silicon"), grid),
    };
    const bare = new StackSurface({ ...input, seenFrom: "glass", coverOff: true });
    const encapsulant = materialByName("encapsulant");
    bare.evaluate(thicknesses);
    grid.forEach((wavelengthNm, i) => {
      const inMedium = new StackSurface({ ...input, seenFrom: { index: encapsulant.at(wavelengthNm).n } });
      inMedium.evaluate(thicknesses);
      expectClose(bare.reflectance[i], inMedium.reflectance[i], { absolute: 1e-14, because: "rounding" });
    });
  });

  test("refuses light aslant on pyramids", () => {
    expect(refusalCode(() => make(["", surfaces[3][1], 10, "both"] as never, "air"))).toBe("angle-on-pyramids");
  });
});
