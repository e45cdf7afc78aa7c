import { describe, expect, test } from "vitest";
import { labOf } from "../../../engine/colour/lab.ts";
import { colourWavelengthNm, type Triple, tristimulus } from "../../../engine/colour/observer.ts";
import { colourOfLayer, filmColours, filmStack, labOfHex } from "../../../engine/index.ts";
import { colourDifferenceSlopes, labSlopes } from "../../../engine/inverse/colour-slopes.ts";
import { type Scanned, spread, valleysOf } from "../../../engine/inverse/starts.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";
import { nitride, silica, stackOf } from "./stacks.ts";

describe("the scan", () => {
  test("is the same each time, inside the box, and leaves no large hole", () => {
    for (const dimensions of [2, 3, 8]) {
      const points = spread(256, dimensions);
      expect(points).toEqual(spread(256, dimensions));
      for (const point of points) for (const one of point) expect(one >= 0 && one < 1).toBe(true);
      // each half of each axis gets its share to a few points; 256 random points would be off by 8 on average
      for (let j = 0; j < dimensions; j++)
        expect(Math.abs(points.filter((point) => point[j] < 0.5).length - 128)).toBeLessThan(6);
    }
    expect(Array.from(spread(5, 1), ([one]) => one)).toEqual([0, 0.25, 0.5, 0.75, 1]);
  });

  test("keeps one point of each valley, lowest first", () => {
    // two valleys, at 0.2 (depth 1) and 0.8 (depth 2)
    const f = (x: number) => -Math.exp(-(((x - 0.2) / 0.1) ** 2)) - 2 * Math.exp(-(((x - 0.8) / 0.1) ** 2));
    const points = spread(41, 1).map((values): Scanned => ({ values, missed: 0, lossMaCm2: f(values[0]) }));
    const kept = valleysOf(points, [1], (a, b) => a.lossMaCm2 < b.lossMaCm2, 9).map(({ values }) => values[0]);
    expect(kept).toEqual([0.8, 0.2]);
    expect(valleysOf(points, [1], (a, b) => a.lossMaCm2 < b.lossMaCm2, 1).length).toBe(1);
  });
});

describe("colour", () => {
  test("moves with reflectance as the chain rule through CIELAB says", () => {
    const spectrum = Float64Array.from(colourWavelengthNm, (nm) => 0.02 + 0.3 * ((nm - 580) / 200) ** 2);
    const xyz = tristimulus(spectrum);
    for (const [axis, per] of [
      [0, [1, 0, 0]],
      [1, [0, 1, 0]],
      [2, [0, 0, 1]],
    ] as [number, Triple][]) {
      const slopes = labSlopes(xyz, per);
      for (const i of [3, 30, 45, 70]) {
        const moved = (by: number) =>
          labOf(tristimulus(spectrum.map((value, at) => (at === i ? value + by : value))))[axis];
        expectClose(slopes[i], (moved(1e-5) - moved(-1e-5)) / 2e-5, {
          relative: 1e-6,
          absolute: 1e-8,
          because: "central difference",
        });
      }
    }
  });

  test("moves with very dark reflectance, too, where CIELAB is straight", () => {
    const spectrum = new Float64Array(colourWavelengthNm.length).fill(0.002);
    const [slope] = labSlopes(tristimulus(spectrum), [1, 0, 0]);
    const moved = (by: number) => labOf(tristimulus(spectrum.map((value, at) => (at === 0 ? value + by : value))))[0];
    expectClose(slope, (moved(1e-4) - moved(-1e-4)) / 2e-4, {
      relative: 1e-6,
      because: "central difference on a straight line",
    });
  });

  test("differs from a grey by its lightness alone, as CIEDE2000's own weight says", () => {
    // on the grey axis dE = dL / S_L with S_L = 1 + 0.015 (L - 50)^2 / sqrt(20 + (L - 50)^2), L the mean (Sharma et al. 2005)
    const [perL] = colourDifferenceSlopes([60, 0, 0], [50, 0, 0]);
    const difference = (L: number) =>
      (L - 50) / (1 + (0.015 * ((L + 50) / 2 - 50) ** 2) / Math.sqrt(20 + ((L + 50) / 2 - 50) ** 2));
    expectClose(perL, (difference(60.001) - difference(59.999)) / 0.002, {
      relative: 1e-6,
      because: "central differences",
    });
  });

  test("of a screen colour is that of the sRGB standard", () => {
    // IEC 61966-2-1: white is L = 100; #808080 has linear 0.21586, so L = 116 cbrt(0.21586) - 16 = 53.585
    expectClose(labOfHex("#ffffff")[0], 100, { absolute: 1e-3, because: "rounding of the matrix in the standard" });
    expectClose(labOfHex("#808080")[0], 53.585, { absolute: 1e-3, because: "printed to three places" });
    for (const bad of ["#12345", "20305f", "#20305g", "blue"])
      expect(refusalCode(() => labOfHex(bad))).toBe("bad-colour");
  });

  test("of a stack whose layer grows is the film verb's for each thickness", () => {
    const stack = stackOf([silica(70), nitride(2.1, 66)]);
    const { rows } = filmColours(colourOfLayer(stack, 1), { fromNm: 50, toNm: 80, stepNm: 15 });
    expect(rows.map((row) => row.thicknessNm)).toEqual([50, 65, 80]);
    for (const { thicknessNm, hex, lab } of rows) {
      const { colour } = filmStack(stackOf([silica(70), nitride(2.1, thicknessNm)]));
      expect(hex).toBe(colour?.hex);
      lab.forEach((value, i) => {
        expectClose(value, colour?.lab[i] ?? Number.NaN, {
          absolute: 1e-9,
          because: "two routes through the same optics",
        });
      });
    }
    expect(refusalCode(() => colourOfLayer(stack, 2))).toBe("unknown-layer");
  });
});
