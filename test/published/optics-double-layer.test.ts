/**
 * Two films that null the reflectance of one wavelength without being quarter waves. For indices n0 | n1 n2 | ns there are two
 * such pairs of thicknesses below half a wave each (B. A. Moys, The theory of double-layer antireflection coatings, Thin Solid
 * Films 21 (1974) 145-157, and earlier L. A. Catalan, J. Opt. Soc. Am. 52 (1962) 437; equations from memory, and checked here by
 * the reflectance they give):
 *
 *   tan^2 d1 = n1^2 (ns - n0) (n2^2 - n0 ns) / ((n1^2 ns - n0 n2^2) (n0 ns - n1^2))
 *   tan^2 d2 = n2^2 (ns - n0) (n0 ns - n1^2) / ((n1^2 ns - n0 n2^2) (n2^2 - n0 ns)),     d = 2 pi n t / wavelength
 */
import { describe, expect, test } from "vitest";
import { constantMaterial, filmStack, improveStack } from "../../engine/index.ts";
import { polished, thickness } from "../engine/inverse/stacks.ts";
import { expectClose } from "../support/close.ts";

const wavelengthNm = 600;

function nulling(n0: number, n1: number, n2: number, ns: number): [number, number][] {
  const shared = n1 * n1 * ns - n0 * n2 * n2;
  const first = Math.atan(Math.sqrt((n1 * n1 * (ns - n0) * (n2 * n2 - n0 * ns)) / (shared * (n0 * ns - n1 * n1))));
  const second = Math.atan(Math.sqrt((n2 * n2 * (ns - n0) * (n0 * ns - n1 * n1)) / (shared * (n2 * n2 - n0 * ns))));
  const nm = (phase: number, n: number) => (phase * wavelengthNm) / (2 * Math.PI * n);
  // both phases in the first quarter, or both in the second
  return [
    [nm(first, n1), nm(second, n2)],
    [nm(Math.PI - first, n1), nm(Math.PI - second, n2)],
  ];
}

describe("two films that reflect nothing at 600 nm", () => {
  test.each([
    [1, 1.45, 2.3, 3.5],
    [1, 1.38, 2.35, 3.9],
    [1.5, 1.7, 2.5, 3.9],
  ])("in %f with films %f and %f on %f are the two of the closed form, and no others", (n0, n1, n2, ns) => {
    const film = [n1, n2].map((n) => ({ material: constantMaterial(n, 0), thicknessNm: 50 }));
    const description = {
      light: {
        fromNm: 400,
        toNm: 800,
        stepNm: 20,
        angleDeg: 0,
        polarisation: "both" as const,
        weight: "photons" as const,
      },
      seenFrom: n0 === 1 ? ("air" as const) : { index: n0 },
      film,
      surface: polished,
      substrate: constantMaterial(ns, 0),
    };
    const expected = nulling(n0, n1, n2, ns);
    for (const [one, two] of expected) {
      const { wavelength_nm, reflectance } = filmStack({
        ...description,
        film: [
          { ...film[0], thicknessNm: one },
          { ...film[1], thicknessNm: two },
        ],
      });
      expectClose(reflectance[wavelength_nm.indexOf(wavelengthNm)], 0, {
        absolute: 1e-14,
        because: "rounding of a null",
      });
    }
    // ranges just under half a wave each
    const unknowns = [n1, n2].map((n, layer) => thickness(layer, 0, (0.49 * wavelengthNm) / n));
    const { optima, goalMet } = improveStack(description, unknowns, { reflectance: [{ wavelengthNm, atMost: 1e-6 }] });
    expect(goalMet).toBe(true);
    const found = optima.map(({ values }) => values).sort((a, b) => a[0] - b[0]);
    expect(found.length).toBe(2);
    found.forEach((values, which) => {
      values.forEach((nm, layer) => {
        expectClose(nm, expected[which][layer], {
          absolute: 0.1,
          because: "1e-6 % of reflectance is an amplitude of 1e-4, some hundredths of a nm",
        });
      });
    });
  });
});
