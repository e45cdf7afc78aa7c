import { describe, expect, test } from "vitest";
import { OneFilm, stackLight } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const wavelengthNm = Float64Array.of(300, 400, 632.8, 1000);
const film = { n: Float64Array.of(2.4, 2.2, 2.05, 2), k: Float64Array.of(0.16, 0.03, 0, 0) };
const substrate = { n: Float64Array.of(4.98, 5.57, 3.88, 3.57), k: Float64Array.of(4.2, 0.39, 0.018, 1e-4) };
const anglesRad = [0, 0.2757, 0.9553, 1.5066];

describe("the fast path for one film", () => {
  test.each([1, 1.49])("agrees with the general stack, seen from index %f", (index) => {
    const one = new OneFilm({
      wavelengthNm,
      incidenceIndex: new Float64Array(4).fill(index),
      film,
      substrate,
      anglesRad,
    });
    const reflectance = new Float64Array(16);
    const transmittance = new Float64Array(16);
    for (const thicknessNm of [0, 1, 79.3, 400, 20000]) {
      one.evaluate(thicknessNm, reflectance, transmittance);
      anglesRad.forEach((angleRad, a) => {
        wavelengthNm.forEach((wavelength, i) => {
          const general = stackLight({
            wavelengthNm: wavelength,
            angleRad,
            incidenceIndex: index,
            layers: [{ n: film.n[i], k: film.k[i], thicknessNm }],
            substrate: { n: substrate.n[i], k: substrate.k[i] },
            polarisation: "both",
          });
          // A phase of 2 pi n d / lambda of up to 1000 rad costs three of the sixteen digits.
          const tolerance = { absolute: 1e-12, because: "rounding of the phase in a film of up to 20 um" };
          expectClose(reflectance[a * 4 + i], general.reflectance, tolerance);
          expectClose(transmittance[a * 4 + i], general.transmittance, tolerance);
        });
      });
    }
  });

  test("refuses a thickness that cannot be", () => {
    const one = new OneFilm({
      wavelengthNm,
      incidenceIndex: new Float64Array(4).fill(1),
      film,
      substrate,
      anglesRad: [0],
    });
    const ask = (thicknessNm: number) => () => one.evaluate(thicknessNm, new Float64Array(4), new Float64Array(4));
    expect(refusalCode(ask(-0.001))).toBe("film-thickness");
    expect(refusalCode(ask(Number.NaN))).toBe("film-thickness");
    expect(refusalCode(ask(Number.POSITIVE_INFINITY))).toBe("film-thickness");
  });
});
