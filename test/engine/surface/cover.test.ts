import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  coatedWafer,
  constantMaterial,
  coverLight,
  filmStack,
  innermostIndex,
  materialByName,
  pathSum,
  pyramidPaths,
  type SeenFrom,
  siliconNitride,
  thickLayersOf,
  uncovered,
  wavelengthGrid,
} from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { walkPhotons } from "../../support/photon-walk.ts";
import { refusalCode } from "../../support/refusal.ts";

const grid = wavelengthGrid(300, 1100, 50);
const rounding = { absolute: 1e-14, because: "rounding" };
const range = { fromNm: 300, toNm: 1100, weight: "photons" } as const;
const pyramids = { kind: "pyramids", facetAngleDeg: 54.74 } as const;
const clear = (n: number, thicknessMm = 1) => ({ material: constantMaterial(n), thicknessMm });

/** Sines of the exit angles of the ways, and light, as in air: what Snell's law makes of them. */
const outAngleDeg = (n: number, exitRad: number) => (Math.asin(n * Math.sin(exitRad)) * 180) / Math.PI;

describe("a cover of thick layers", () => {
  test("of index 1 and no thickness is no cover", () => {
    const nothing: SeenFrom = { thick: [clear(1, 0)] };
    for (const surface of [{ kind: "polished" }, pyramids] as const) {
      const seen = coatedWafer({ surface, seenFrom: nothing, ...range }).nitride(2.06, 77);
      const air = coatedWafer({ surface, seenFrom: "air", ...range }).nitride(2.06, 77);
      expectAllClose(seen.reflectance, air.reflectance, rounding);
      expectAllClose(seen.transmittance, air.transmittance, rounding);
    }
  });

  test('"glass" is the list of its two layers', () => {
    const thick = [
      { material: materialByName("glass"), thicknessMm: 3.2 },
      { material: materialByName("encapsulant"), thicknessMm: 0.45 },
    ];
    expect(thickLayersOf("glass")).toEqual(
      thick.map((layer) => expect.objectContaining({ thicknessMm: layer.thicknessMm })),
    );
    const exitsRad = [0, 0.4, 0.68];
    const listed = coverLight({ seenFrom: { thick }, wavelengthNm: grid, exitsRad });
    const named = coverLight({ seenFrom: "glass", wavelengthNm: grid, exitsRad });
    exitsRad.forEach((_, way) => {
      expectAllClose(named.leaves[way], listed.leaves[way], rounding);
    });
    expect(innermostIndex("glass")(600)).toBe(materialByName("encapsulant").at(600).n);
  });

  test("split into thinner sheets of the same glass is the same cover", () => {
    const exitsRad = [0.1, 0.5, 0.7, 1.2];
    const seen = (...thick: ReturnType<typeof clear>[]) =>
      coverLight({ seenFrom: { thick }, wavelengthNm: grid, exitsRad });
    const grey = { material: constantMaterial(1.5, 1e-6), thicknessMm: 4 };
    const one = seen(grey);
    const four = seen(...Array.from({ length: 4 }, () => ({ ...grey, thicknessMm: 1 })));
    expectAllClose(one.enters, four.enters, rounding);
    exitsRad.forEach((_, way) => {
      expectAllClose(one.leaves[way], four.leaves[way], rounding);
      expectAllClose(one.returns[way], four.returns[way], rounding);
    });
  });

  test("lets out half s and half p light by Fresnel's equations, and nothing beyond the critical angle", () => {
    // 30 deg in glass of 1.5 on air, worked by hand from the tangent and sine forms (Born and Wolf, section 1.5.2).
    const exit = Math.PI / 6;
    const out = Math.asin(1.5 * Math.sin(exit));
    const rs = (Math.sin(exit - out) / Math.sin(exit + out)) ** 2;
    const rp = (Math.tan(exit - out) / Math.tan(exit + out)) ** 2;
    const { leaves, returns } = coverLight({
      seenFrom: { thick: [clear(1.5)] },
      wavelengthNm: grid,
      exitsRad: [exit, Math.asin(1 / 1.5) + 1e-6],
    });
    expectClose(leaves[0][0], 1 - (rs + rp) / 2, rounding);
    expectClose(returns[0][0], (rs + rp) / 2, rounding);
    expect(leaves[1][0]).toBe(0);
    expectClose(returns[1][0], 1, rounding);
  });

  test("accounts for all the light on the way in and on every way out", () => {
    const exitsRad = pyramidPaths("random", 54.74).map((path) => path.exitRad ?? Number.NaN);
    const cover = coverLight({ seenFrom: "glass", wavelengthNm: grid, exitsRad });
    const balance = { absolute: 1e-13, because: "conservation, rounding" };
    grid.forEach((_, i) => {
      const going = cover.absorbedGoingIn.reduce((sum, layer) => sum + layer[i], cover.front[i] + cover.enters[i]);
      expectClose(going, 1, balance);
      cover.absorbedLeaving.forEach((layers, way) => {
        const coming = layers.reduce((sum, layer) => sum + layer[i], cover.leaves[way][i] + cover.returns[way][i]);
        expectClose(coming, 1, balance);
      });
    });
  });

  test("closes the balance at every wavelength over any texture: out, in the layers, and below", () => {
    const part = fc.double({ min: 0, max: 1, noNaN: true });
    fc.assert(
      fc.property(fc.array(fc.tuple(part, part), { minLength: 3, maxLength: 3 }), (ways) => {
        const whole = ways.reduce((sum, [share]) => sum + share, 0);
        fc.pre(whole > 0.01);
        const exitsRad = [0.1, 0.66, 1.3];
        const cover = coverLight({ seenFrom: "glass", wavelengthNm: grid, exitsRad });
        const up = ways.map(([share, reflected]) => (share / whole) * reflected);
        const sum = (values: (way: number) => number) => up.reduce((total, one, way) => total + one * values(way), 0);
        grid.forEach((_, i) => {
          const reach = cover.enters[i] / (1 - sum((way) => cover.returns[way][i]));
          const out = cover.front[i] + reach * sum((way) => cover.leaves[way][i]);
          const below = reach * (1 - sum(() => 1));
          const lost = [0, 1].reduce(
            (total, j) => total + cover.absorbedGoingIn[j][i] + reach * sum((way) => cover.absorbedLeaving[way][j][i]),
            0,
          );
          expectClose(out + below + lost, 1, { absolute: 1e-12, because: "conservation, rounding" });
        });
      }),
      { numRuns: 30, seed: 3 },
    );
  });

  test("taken off leaves its medium and nothing else", () => {
    const bare = uncovered(coverLight({ seenFrom: "glass", wavelengthNm: grid, exitsRad: [0.3, 0.9] }));
    expect(bare.layers).toBe(0);
    expectAllClose(bare.innerIndex, Array.from(grid, innermostIndex("glass")), rounding);
    expect([bare.front[0], bare.enters[0], bare.leaves[1][0], bare.returns[1][0]]).toEqual([0, 1, 1, 0]);
  });

  test("sends light from flatter pyramids out nearer the vertical", () => {
    // Two bounces turn light by 4b - 180 from the vertical: 20 deg at 50, 38.94 at 54.7356, 44 at 56 (plane geometry).
    for (const [b, exitDeg] of [
      [50, 20],
      [52, 28],
      [56, 44],
    ]) {
      const [{ exitRad = Number.NaN }] = pyramidPaths("random", b);
      expectClose((exitRad * 180) / Math.PI, exitDeg, { absolute: 1e-9, because: "rounding" });
      if (b < 56) expect(outAngleDeg(1.5, exitRad)).toBeLessThan(90);
      else expect(outAngleDeg(1.5, exitRad)).toBeNaN();
    }
  });

  test("over pyramids agrees with photons walked one by one under the same rules", () => {
    // Facets of 56 deg: two bounces leave beyond the critical angle. A film that reflects and absorbs much, so that every part
    // of the light is large enough to be counted.
    const scene = {
      wavelengthNm: 600,
      facetAngleDeg: 56,
      film: { n: 3.2, k: 0.05, thicknessNm: 50 },
      substrate: { n: 3.9, k: 0.02 },
      layers: [
        { n: 1.52, k: 1e-6, thicknessMm: 3 },
        { n: 1.48, k: 4e-6, thicknessMm: 0.5 },
      ],
    };
    const count = 60_000;
    const walked = walkPhotons({ ...scene, count, seed: 77 });
    const answer = filmStack({
      light: { fromNm: 590, toNm: 610, stepNm: 10, angleDeg: 0, polarisation: "both", weight: "photons" },
      seenFrom: {
        thick: scene.layers.map(({ n, k, thicknessMm }) => ({ material: constantMaterial(n, k), thicknessMm })),
      },
      film: [{ material: constantMaterial(scene.film.n, scene.film.k), thicknessNm: scene.film.thicknessNm }],
      surface: { kind: "pyramids", facetAngleDeg: scene.facetAngleDeg },
      substrate: constantMaterial(scene.substrate.n, scene.substrate.k),
    });
    const close = (photons: number, summed: number) => {
      const absolute = 4 * Math.sqrt((summed * (1 - summed)) / count);
      expectClose(photons / count, summed, { absolute, because: "four standard errors of counting photons" });
    };
    close(walked.reflected, answer.reflectance[1]);
    close(walked.substrate, answer.transmittance[1]);
    close(walked.film, answer.absorptance[0][1]);
    // Layer by layer, from the currents: over 590 to 610 nm nothing but the slow change of absorption with wavelength.
    const { available, absorbed_in_cover_layers: layerwise } = answer.current_ma_cm2;
    close(walked.layers[0], layerwise[0] / available);
    close(walked.layers[1], layerwise[1] / available);
  });

  test("is asked the same way by the fast path and the general one", () => {
    const seenFrom: SeenFrom = { thick: [clear(1.52, 2), { material: constantMaterial(1.45, 2e-7), thicknessMm: 1 }] };
    for (const arrangement of ["random", "regular"] as const) {
      const surface = { ...pyramids, facetAngleDeg: 55.3, arrangement };
      const fast = coatedWafer({ surface, seenFrom, ...range, stepNm: 40 }).nitride(2.02, 80);
      const general = filmStack({
        light: { ...range, stepNm: 40, angleDeg: 0, polarisation: "both" },
        seenFrom,
        film: [{ material: siliconNitride(2.02), thicknessNm: 80 }],
        surface,
        substrate: materialByName("silicon"),
      });
      const same = { absolute: 1e-12, because: "two ways to the same numbers, rounding" };
      expectAllClose(fast.reflectance, general.reflectance, same);
      expectAllClose(fast.transmittance, general.transmittance, same);
      expectAllClose(fast.absorptance, general.absorptance[0], same);
    }
  });

  test("knows an exit for each way of the path sum, all of them upwards", () => {
    for (const b of [50, 52, 54, 54.74, 56]) {
      for (const { exitRad } of pathSum(pyramidPaths("random", b)).paths) expect(exitRad).toBeLessThan(Math.PI / 2);
    }
  });

  test("refuses what is not light on its way", () => {
    const ask = (more: object) =>
      refusalCode(() => coverLight({ seenFrom: "glass", wavelengthNm: grid, exitsRad: [0], ...more }));
    expect(ask({ exitsRad: [Math.PI / 2] })).toBe("stack-value");
    expect(ask({ exitsRad: [Number.NaN] })).toBe("stack-value");
    expect(ask({ angleRad: 0.1 })).toBe("stack-value");
    expect(ask({ angleRad: Number.NaN })).toBe("not-a-number");
    expect(ask({ seenFrom: { thick: [] } })).toBe("no-layers");
    expect(ask({ seenFrom: { index: 0 } })).toBe("stack-value");
    expect(ask({ wavelengthNm: Float64Array.of(200) })).toBe("outside-table");
  });
});
