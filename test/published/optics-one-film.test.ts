/**
 * One film against numbers from outside: closed forms of the textbooks, and values of an independent program, which was
 * written for this project in another language and shares no code with it.
 */
import { describe, expect, test } from "vitest";
import { radians, stackLight } from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";

const bare = (n0: number, ns: number, angleRad: number, polarisation: "s" | "p") =>
  stackLight({ wavelengthNm: 600, angleRad, incidenceIndex: n0, layers: [], substrate: { n: ns, k: 0 }, polarisation });

describe("a bare interface (Fresnel; Born and Wolf, Principles of Optics, 1.5)", () => {
  test("reflects ((n0 - ns)/(n0 + ns))^2 at normal incidence and transmits the rest", () => {
    for (const [n0, ns] of [
      [1, 1.5],
      [1, 3.88],
      [1.5, 3.88],
      [2.4, 1.2],
    ]) {
      const light = bare(n0, ns, 0, "p");
      expectClose(light.reflectance, ((n0 - ns) / (n0 + ns)) ** 2, { absolute: 1e-15, because: "rounding" });
      expectClose(light.transmittance, 1 - light.reflectance, { absolute: 1e-15, because: "rounding" });
    }
  });

  test("does not reflect p light at Brewster's angle, tan = ns / n0, and s light by cos(2 angle) squared", () => {
    for (const [n0, ns] of [
      [1, 1.5],
      [1, 3.88],
      [1.5, 1],
    ]) {
      const angle = Math.atan(ns / n0);
      expectClose(bare(n0, ns, angle, "p").reflectance, 0, { absolute: 1e-28, because: "rounding, squared" });
      // At Brewster's angle the two rays are at right angles, so Fresnel's sine law leaves r_s = -cos(2 angle).
      expectClose(bare(n0, ns, angle, "s").reflectance, Math.cos(2 * angle) ** 2, {
        absolute: 1e-14,
        because: "rounding",
      });
    }
  });

  test("reflects everything at grazing incidence", () => {
    for (const polarisation of ["s", "p"] as const) {
      expect(bare(1, 3.88, radians(89.9999), polarisation).reflectance).toBeGreaterThan(0.9999);
    }
  });
});

describe("a quarter-wave film (Heavens, Optical Properties of Thin Solid Films)", () => {
  test("of index sqrt(n0 ns) reflects nothing", () => {
    for (const [n0, ns] of [
      [1, 3.4],
      [1.5, 3.88],
    ]) {
      const n = Math.sqrt(n0 * ns);
      const layers = [{ n, k: 0, thicknessNm: 600 / (4 * n) }];
      const light = stackLight({
        wavelengthNm: 600,
        angleRad: 0,
        incidenceIndex: n0,
        layers,
        substrate: { n: ns, k: 0 },
        polarisation: "s",
      });
      expectClose(light.reflectance, 0, { absolute: 1e-30, because: "rounding, squared" });
    }
    // Facts of the trade (common practice): 1.84 to 1.85 nulls silicon of index 3.4 in air.
    expectClose(Math.sqrt(3.4), 1.845, { absolute: 0.005, because: "quoted as 1.84 to 1.85" });
  });

  test("reflects ((n0 ns - n^2)/(n0 ns + n^2))^2 for any other index, and a half wave is not seen", () => {
    const [n0, n, ns] = [1, 2.09, 3.88];
    const film = (waves: number) =>
      stackLight({
        wavelengthNm: 600,
        angleRad: 0,
        incidenceIndex: n0,
        layers: [{ n, k: 0, thicknessNm: (waves * 600) / n }],
        substrate: { n: ns, k: 0 },
        polarisation: "both",
      }).reflectance;
    expectClose(film(1 / 4), ((n0 * ns - n * n) / (n0 * ns + n * n)) ** 2, { absolute: 1e-15, because: "rounding" });
    expectClose(film(1 / 2), ((n0 - ns) / (n0 + ns)) ** 2, { absolute: 1e-14, because: "rounding" });
  });
});

describe("a film of 75 nm on silicon (an independent program's values, 6 decimals)", () => {
  const red = { wavelengthNm: 632.8, layers: [{ n: 2.05, k: 0, thicknessNm: 75 }], substrate: { n: 3.88, k: 0.018 } };
  const violet = {
    wavelengthNm: 400,
    layers: [{ n: 2.05, k: 0.02, thicknessNm: 75 }],
    substrate: { n: 5.57, k: 0.387 },
  };
  test.each([
    [red, 1, 0, 0.002473, 0.002473],
    [red, 1, 15.7932, 0.004301, 0.002274],
    [red, 1, 54.7356, 0.082225, 0.029157],
    [red, 1.5, 0, 0.026392, 0.026392],
    [violet, 1, 0, 0.335432, 0.335432],
    [violet, 1, 54.7356, 0.400732, 0.162119],
  ])("case %#", (stack, incidenceIndex, angleDeg, rs, rp) => {
    const question = { ...stack, incidenceIndex, angleRad: radians(angleDeg) };
    const tolerance = { absolute: 1e-6, because: "printed to 6 decimals, angles to 4" };
    expectClose(stackLight({ ...question, polarisation: "s" }).reflectance, rs, tolerance);
    expectClose(stackLight({ ...question, polarisation: "p" }).reflectance, rp, tolerance);
    expectClose(stackLight({ ...question, polarisation: "both" }).reflectance, (rs + rp) / 2, tolerance);
  });
});
