import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  bounceAngles,
  crystalFacetAngleDeg,
  degrees,
  type Facet,
  pyramidPaths,
  randomWays,
  tracedFacetAnglesDeg,
} from "../../../engine/index.ts";
import { addPaths, pathSum } from "../../../engine/surface/path-sum.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { traceWays } from "../../support/pyramid-rays.ts";
import { refusalCode } from "../../support/refusal.ts";

const anglesDeg = (facets: readonly Facet[], facetAngleDeg: number) => bounceAngles(facets, facetAngleDeg).map(degrees);

describe("angles of incidence on pyramids", () => {
  test("at 54.74 deg are those listed for alkaline texture", () => {
    // Listed in the project's physics notes to 0.01 deg, from an independent program.
    const tolerance = { absolute: 0.006, because: "listed to 0.01 deg" };
    const b = crystalFacetAngleDeg;
    expectAllClose(anglesDeg(["+x", "-x", "+x"], b), [54.74, 15.79, 86.32], tolerance);
    expectAllClose(anglesDeg(["+x", "+y", "-x"], b), [54.74, 78.9, 33.49], tolerance);
    expectAllClose(anglesDeg(["+x", "+y", "-y", "-x"], b), [54.74, 78.9, 71.29, 51.68], tolerance);
  });

  test("follow b, then 180 - 3b on the opposite facet, then 360 - 5b on the first again", () => {
    fc.assert(
      fc.property(fc.double({ min: 54.01, max: 56, noNaN: true }), (b) => {
        const because = "rounding of an arc cosine near 90 deg";
        expectAllClose(anglesDeg(["+x", "-x", "+x"], b), [b, 180 - 3 * b, 360 - 5 * b], { absolute: 1e-9, because });
      }),
    );
  });

  test("end where the light no longer meets the facet", () => {
    expect(bounceAngles(["+x", "-x", "+x"], 53.9)).toHaveLength(2);
    expect(bounceAngles(["+x", "-x", "+x"], 54.1)).toHaveLength(3);
  });
});

describe("bounce paths", () => {
  test("hold all the light exactly, at every facet angle and arrangement", () => {
    for (let b = 50; b <= 56; b += 0.05) {
      for (const arrangement of ["random", "regular"] as const) {
        const paths = pyramidPaths(arrangement, Math.min(b, 56));
        expect(paths.reduce((total, path) => total + path.fraction, 0)).toBe(1);
        for (const { fraction } of paths) expect(fraction).toBeGreaterThan(0);
      }
    }
  });

  test("of equal pyramids are 8/9 double and 1/9 triple at the crystal's angle (common knowledge of the trade)", () => {
    const paths = pyramidPaths("regular");
    expect(paths.map((path) => path.anglesRad.length)).toEqual([2, 3]);
    expectAllClose(
      paths.map((path) => path.fraction),
      [8 / 9, 1 / 9],
      { absolute: 1e-14, because: "rounding of cos 5b near its zero" },
    );
    expect(pyramidPaths("regular", 53.9).map((path) => path.anglesRad.length)).toEqual([2]);
  });

  test.each([50, 53.9, 54.3, crystalFacetAngleDeg, 55, 56])(
    "of equal pyramids are those of the ray tracer on a lattice at %f deg",
    (facetAngleDeg) => {
      const rays = 12_000;
      const traced = traceWays({ facetAngleDeg, arrangement: "regular", rays, seed: 9 });
      const thrice = pyramidPaths("regular", facetAngleDeg)[1]?.fraction ?? 0;
      const absolute = 4 * Math.sqrt((thrice * (1 - thrice)) / rays);
      const because = "four standard errors of counting rays";
      expectClose(traced.get("+x -x +x") ?? 0, thrice, { absolute, because });
      expectClose(traced.get("+x -x") ?? 0, 1 - thrice, { absolute: absolute + 1e-12, because });
    },
  );

  test("of random pyramids at 54.74 deg are those of an independent ray tracer", () => {
    // The project's physics notes, traced +-0.003: .654, .211, .056, .056 and .023 for the last two kinds together.
    const paths = pyramidPaths("random", crystalFacetAngleDeg);
    const of = (...angles: number[]) =>
      paths
        .filter(({ anglesRad }) => angles.every((a, i) => Math.abs(degrees(anglesRad[i] ?? 0) - a) < 0.01))
        .reduce((sum, path) => sum + path.fraction, 0);
    const tolerance = {
      absolute: 0.008,
      because: "0.003 of rays there, 0.012 a patch of texture and its size unknown",
    };
    expectClose(of(54.74, 15.79), 0.654 + 0.056, tolerance);
    expectClose(of(54.74, 15.79, 86.32), 0.056, tolerance);
    expectClose(of(54.74, 78.9, 33.49), 0.211, tolerance);
    expectClose(of(54.74, 78.9, 71.29), 0.056 + 0.023, tolerance);
  });

  test.each([50, 52, crystalFacetAngleDeg, 56])(
    "of random pyramids are those that the ray tracer gives at %f deg",
    (facetAngleDeg) => {
      const patches = 3;
      const rays = 1000;
      const column = tracedFacetAnglesDeg.indexOf(facetAngleDeg);
      const traced = Array.from({ length: patches }, (_, i) =>
        traceWays({ facetAngleDeg, rays, heightSpread: 0.7, seed: 40 + i }),
      );
      for (const way of randomWays) {
        const fraction = way.fractions[column];
        const mean = traced.reduce((sum, patch) => sum + (patch.get(way.facets.join(" ")) ?? 0) / patches, 0);
        // Variance a patch, measured over 240 of them: of the patch 0.017^2 f (1 - f), and of counting its rays.
        const variance = (fraction * (1 - fraction) * (0.017 ** 2 + 1 / rays)) / patches;
        const absolute = 4 * Math.sqrt(variance);
        expectClose(mean, fraction, { absolute, because: "four standard errors of rays and patches" });
      }
    },
  );

  test("refuse facets that are not alkaline texture", () => {
    expect(refusalCode(() => pyramidPaths("random", 49.9))).toBe("facet-angle");
    expect(refusalCode(() => pyramidPaths("regular", 56.1))).toBe("facet-angle");
    expect(refusalCode(() => pyramidPaths("random", Number.NaN))).toBe("not-a-number");
  });
});

describe("the sum over paths", () => {
  test("multiplies reflectances along a path and lets what is left in at each bounce", () => {
    const paths = pathSum([
      { anglesRad: [0.9, 0.3], fraction: 0.75 },
      { anglesRad: [0.9, 0.3, 1.5], fraction: 0.25 },
    ]);
    expect(paths.anglesRad).toEqual([0.9, 0.3, 1.5]);
    const reflectance = Float64Array.of(0.2, 0.3, 0.8);
    const transmittance = Float64Array.of(0.7, 0.6, 0.1);
    const r = new Float64Array(1);
    const t = new Float64Array(1);
    addPaths(paths, 1, reflectance, transmittance, r, t);
    const tolerance = { absolute: 1e-15, because: "rounding" };
    expectClose(r[0], 0.75 * 0.2 * 0.3 + 0.25 * 0.2 * 0.3 * 0.8, tolerance);
    expectClose(t[0], 0.7 + 0.2 * 0.6 + 0.25 * 0.2 * 0.3 * 0.1, tolerance);
  });
});
