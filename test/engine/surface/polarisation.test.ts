/**
 * What it costs to take light as unpolarised at each bounce off a pyramid, measured against the field carried from facet to
 * facet (test/support/polarised-ways.ts). The numbers are those the header of engine/surface/pyramids.ts states.
 */
import { describe, expect, test } from "vitest";
import {
  type Arrangement,
  bounceAngles,
  crystalFacetAngleDeg,
  type Facet,
  materialByName,
  pyramidPaths,
  randomWays,
  stackLight,
  tracedFacetAnglesDeg,
  wavelengthGrid,
  weightedAverage,
} from "../../../engine/index.ts";
import { plainReflectance } from "../../support/characteristic-matrix.ts";
import { expectClose } from "../../support/close.ts";
import { amplitude, type FilmOnFacet, leftAfterWay } from "../../support/polarised-ways.ts";

const silicon = materialByName("silicon");
const grid = wavelengthGrid(300, 1100, 25);
const b0 = crystalFacetAngleDeg;
const coated = [{ n: 2.05, k: 0, thicknessNm: 73 }];

/** The ways of an arrangement at a traced facet angle, cut where the light no longer meets a facet. */
function waysOf(arrangement: Arrangement, facetAngleDeg: number): { facets: Facet[]; fraction: number }[] {
  const paths = pyramidPaths(arrangement, facetAngleDeg);
  const all: readonly (readonly Facet[])[] =
    arrangement === "regular"
      ? [
          ["+x", "-x"],
          ["+x", "-x", "+x"],
        ]
      : randomWays
          .filter((way) => way.fractions[tracedFacetAnglesDeg.indexOf(facetAngleDeg)] > 0)
          .map((way) => way.facets);
  return paths.map(({ fraction, anglesRad }, i) => ({ facets: all[i].slice(0, anglesRad.length), fraction }));
}

const chain = (facets: readonly Facet[], facetAngleDeg: number, film: FilmOnFacet, polarisation: "s" | "p" | "both") =>
  bounceAngles(facets, facetAngleDeg).reduce(
    (left, angleRad) => left * stackLight({ ...film, angleRad, polarisation }).reflectance,
    1,
  );

/** Weighted reflectance in percent, photons, 300 to 1100 nm: with the mean at each bounce, and exactly. */
function weighted(arrangement: Arrangement, facetAngleDeg: number, layers: FilmOnFacet["layers"]) {
  const ways = waysOf(arrangement, facetAngleDeg);
  const over = (one: (facets: Facet[], film: FilmOnFacet) => number) =>
    100 *
    weightedAverage(
      grid,
      Array.from(grid, (wavelengthNm) => {
        const film = { wavelengthNm, incidenceIndex: 1, layers, substrate: silicon.at(wavelengthNm) };
        return ways.reduce((sum, { facets, fraction }) => sum + fraction * one(facets, film), 0);
      }),
      300,
      1100,
    );
  return {
    mean: over((facets, film) => chain(facets, facetAngleDeg, film, "both")),
    exact: over((facets, film) => leftAfterWay(facets, facetAngleDeg, film)),
  };
}

describe("the field carried from facet to facet", () => {
  const film = { wavelengthNm: 500, incidenceIndex: 1.4, layers: coated, substrate: { n: 4.3, k: 0.07 } };

  test("has the amplitudes of plain characteristic matrices", () => {
    for (const polarisation of ["s", "p"] as const) {
      const [re, im] = amplitude(film, Math.cos(1.1), polarisation);
      const plain = plainReflectance(500, 1.1, 1.4, coated, film.substrate, polarisation);
      expectClose(re * re + im * im, plain, { absolute: 1e-14, because: "rounding" });
    }
  });

  test("keeps s and p apart where all planes of incidence are one, and there only", () => {
    const apart = (facets: Facet[]) =>
      (chain(facets, b0, film, "s") + chain(facets, b0, film, "p")) / 2 - leftAfterWay(facets, b0, film);
    const rounding = { absolute: 1e-14, because: "rounding" };
    expectClose(leftAfterWay(["+x"], b0, film), chain(["+x"], b0, film, "both"), rounding);
    expectClose(apart(["+x", "-x"]), 0, rounding);
    expectClose(apart(["+x", "-x", "+x"]), 0, rounding);
    expect(Math.abs(apart(["+x", "+y", "-x"]))).toBeGreaterThan(1e-4);
  });

  test("does not care which way round the pyramids are numbered", () => {
    const way = leftAfterWay(["+x", "+y", "-y", "-x"], b0, film);
    for (const same of [
      ["-x", "+y", "-y", "+x"],
      ["+y", "-x", "+x", "-y"],
    ] as Facet[][]) {
      expectClose(leftAfterWay(same, b0, film), way, { absolute: 1e-14, because: "rounding" });
    }
  });

  test("loses nothing on facets that reflect all the light, whatever they do to its phase", () => {
    // A mirror of imaginary index: total reflection with different phases for s and p.
    const mirror = { ...film, layers: [], substrate: { n: 1e-9, k: 3 } };
    const left = leftAfterWay(["+x", "+y", "-y", "-x"], b0, mirror);
    expectClose(left, 1, { absolute: 1e-7, because: "the index of the mirror keeps a real part of 1e-9" });
  });
});

describe("the unpolarised mean at each bounce", () => {
  test.each<[Arrangement, number, number, number]>([
    ["random", 50, 0.62, 0.15],
    ["random", 52, 0.27, 0.09],
    ["random", b0, 0.03, 0.03],
    ["random", 56, 0.28, 0.03],
    ["regular", 50, 0.81, 0.16],
    ["regular", 52, 0.55, 0.11],
    ["regular", b0, 0.49, 0.06],
    ["regular", 56, 1.05, 0.1],
  ])("on %s pyramids of %f deg is too low by %f % bare and %f % coated, as stated", (arrangement, b, bare, film) => {
    const stated = { absolute: 0.01, because: "stated to two decimals, on a grid of 10 nm" };
    const without = weighted(arrangement, b, []);
    const under = weighted(arrangement, b, coated);
    expectClose(without.exact - without.mean, bare, stated);
    expectClose(under.exact - under.mean, film, stated);
  });
});
