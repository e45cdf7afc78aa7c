/**
 * The Tauc-Lorentz model against the relation it must obey (Kramers and Kronig, integrated numerically) and against the closed
 * form its authors print.
 */
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { type TaucLorentz, taucLorentz, taucLorentzMaterial } from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";
import { kramersKronig } from "../support/kramers-kronig.ts";
import { refusalCode } from "../support/refusal.ts";

const one = (amplitudeEv: number, centreEv: number, widthEv: number, gapEv: number): TaucLorentz => ({
  gapEv,
  epsilonInfinity: 1,
  oscillators: [{ amplitudeEv, centreEv, widthEv }],
});
/** Films of the trade's kind, and ones that strain the formula. */
const models: [string, TaucLorentz][] = [
  ["a nitride", one(80, 7.2, 6, 2.4)],
  ["an amorphous silicon", one(200, 3.5, 2.3, 1.2)],
  ["a narrow oscillator", one(50, 5, 0.2, 2)],
  ["one centred below its gap", one(80, 2, 1.5, 2.5)],
  ["one without a gap", one(30, 4, 2, 0)],
  ["one near critical damping", one(80, 3, 5.999, 2)],
  ["a critically damped one", one(80, 3, 6, 2)],
  ["an overdamped one", one(80, 3, 9, 2)],
  [
    "two oscillators",
    {
      ...one(80, 7.2, 6, 2.4),
      epsilonInfinity: 1.4,
      oscillators: [
        { amplitudeEv: 80, centreEv: 7.2, widthEv: 6 },
        { amplitudeEv: 12, centreEv: 4.1, widthEv: 1.1 },
      ],
    },
  ],
];

describe("the Tauc-Lorentz model", () => {
  test.each(models)("is the Kramers-Kronig integral of its own eps2: %s", (_, model) => {
    const centres = model.oscillators.map(({ centreEv }) => centreEv);
    const energies = [0.8, 1.5, model.gapEv, model.gapEv + 1e-4, 3.1, 4.2, 6.5, 12, ...centres].filter((e) => e > 0);
    for (const energy of energies) {
      const integral = kramersKronig((x) => taucLorentz(model, x).eps2, energy, model.gapEv, centres);
      const { eps1 } = taucLorentz(model, energy);
      expectClose(eps1 - model.epsilonInfinity, integral, {
        absolute: 2e-11,
        because: "the worst is 5e-12, at critical damping; 2e-13 without it: rounding",
      });
    }
  });

  test("is eps1 as G. E. Jellison and F. A. Modine print it (1996, with the erratum), where the oscillator rings", () => {
    // Written out from memory of the paper; the test above would find a slip in either.
    const printed = (E: number, A: number, E0: number, C: number, Eg: number): number => {
      const alpha = Math.sqrt(4 * E0 ** 2 - C ** 2);
      const gamma2 = E0 ** 2 - C ** 2 / 2;
      const zeta4 = (E ** 2 - gamma2) ** 2 + (alpha ** 2 * C ** 2) / 4;
      const aLn = (Eg ** 2 - E0 ** 2) * E ** 2 + Eg ** 2 * C ** 2 - E0 ** 2 * (E0 ** 2 + 3 * Eg ** 2);
      const aAtan = (E ** 2 - E0 ** 2) * (E0 ** 2 + Eg ** 2) + Eg ** 2 * C ** 2;
      const ln = Math.log((E0 ** 2 + Eg ** 2 + alpha * Eg) / (E0 ** 2 + Eg ** 2 - alpha * Eg));
      const atans = Math.PI - Math.atan((2 * Eg + alpha) / C) + Math.atan((alpha - 2 * Eg) / C);
      const turn = Math.PI + 2 * Math.atan((2 * (gamma2 - Eg ** 2)) / (alpha * C));
      const edge = Math.abs(E - Eg);
      const ratio = (edge * (E + Eg)) / Math.sqrt((E0 ** 2 - Eg ** 2) ** 2 + Eg ** 2 * C ** 2);
      return (
        ((A * C) / (Math.PI * zeta4)) * (aLn / (2 * alpha * E0)) * ln -
        (A / (Math.PI * zeta4)) * (aAtan / E0) * atans +
        2 * ((A * E0) / (Math.PI * zeta4 * alpha)) * Eg * (E ** 2 - gamma2) * turn -
        ((A * E0 * C) / (Math.PI * zeta4)) * ((E ** 2 + Eg ** 2) / E) * Math.log(edge / (E + Eg)) +
        ((2 * A * E0 * C) / (Math.PI * zeta4)) * Eg * Math.log(ratio)
      );
    };
    for (const [A, E0, C, Eg] of [
      [80, 7.2, 6, 2.4],
      [200, 3.5, 2.3, 1.2],
      [50, 5, 0.2, 2],
    ]) {
      for (const energy of [0.7, 1.9, 2.6, 3.1, 5, 9]) {
        expectClose(taucLorentz(one(A, E0, C, Eg), energy).eps1 - 1, printed(energy, A, E0, C, Eg), {
          relative: 1e-11,
          because: "rounding, in both forms",
        });
      }
    }
  });

  test("does not absorb below its gap and is finite at every point that could divide by zero", () => {
    for (const [, model] of models) {
      for (const energy of [0.9 * model.gapEv, model.gapEv]) {
        if (energy > 0) expect(taucLorentz(model, energy).eps2).toBe(0);
      }
      for (const energy of [model.gapEv, ...model.oscillators.map(({ centreEv }) => centreEv)]) {
        if (energy === 0) continue;
        const here = taucLorentz(model, energy);
        const beside = taucLorentz(model, energy * (1 + 1e-9));
        const because = "continuous: a step of 1e-9 moves it by no more, times its steepest logarithm";
        expectClose(here.eps1, beside.eps1, { absolute: 1e-5, because });
        expectClose(here.eps2, beside.eps2, { absolute: 1e-5, because });
      }
    }
  });

  test("runs smoothly through critical damping", () => {
    const at = (width: number) => taucLorentz(one(80, 3, width, 2), 2.5).eps1;
    const steps = Array.from({ length: 41 }, (_, i) => at(6 + (i - 20) * 5e-7));
    const slope = (steps[40] - steps[0]) / 40;
    for (let i = 1; i < steps.length; i++) {
      expectClose(steps[i] - steps[i - 1], slope, { absolute: 1e-11, because: "digits lost where two roots meet" });
    }
  });

  test("gives n and k whose square is its eps, for any sensible oscillator", () => {
    const positive = (min: number, max: number) => fc.double({ min, max, noNaN: true });
    fc.assert(
      fc.property(positive(5, 200), positive(3, 12), positive(0.2, 15), positive(0.5, 5), (a, e0, c, gap) => {
        const model = one(a, e0, c, gap);
        const film = taucLorentzMaterial({ ...model, rangeNm: [250, 1300] });
        for (const wavelengthNm of [250, 400, 632.8, 1300]) {
          const { eps1, eps2 } = taucLorentz(model, 1239.841984332 / wavelengthNm);
          // A strong narrow oscillator can reflect like a metal (eps1 < 0); without loss that is no film.
          if (eps1 <= 0 && eps2 === 0) continue;
          const { n, k } = film.at(wavelengthNm);
          const because = "rounding, and hc/e written to 13 digits";
          expectClose(n * n - k * k, eps1, { absolute: 1e-10 * Math.hypot(eps1, eps2), because });
          expectClose(2 * n * k, eps2, { absolute: 1e-10 * Math.hypot(eps1, eps2), because });
        }
      }),
    );
  });

  test("refuses what is no oscillator", () => {
    const at =
      (change: Partial<TaucLorentz>, oscillator = {}) =>
      () =>
        taucLorentz(
          {
            ...one(80, 7, 6, 2),
            oscillators: [{ amplitudeEv: 80, centreEv: 7, widthEv: 6, ...oscillator }],
            ...change,
          },
          3,
        );
    expect(refusalCode(at({ gapEv: -1 }))).toBe("material-value");
    expect(refusalCode(at({ gapEv: Number.NaN }))).toBe("not-a-number");
    expect(refusalCode(at({ epsilonInfinity: 0 }))).toBe("material-value");
    expect(refusalCode(at({ oscillators: [] }))).toBe("material-value");
    for (const key of ["amplitudeEv", "centreEv", "widthEv"]) {
      expect(refusalCode(at({}, { [key]: 0 }))).toBe("material-value");
      expect(refusalCode(at({}, { [key]: Number.POSITIVE_INFINITY }))).toBe("not-a-number");
    }
    expect(refusalCode(() => taucLorentz(one(80, 7, 6, 2), 0))).toBe("material-value");
    const film = taucLorentzMaterial({ ...one(80, 7, 6, 2), rangeNm: [300, 1100] });
    expect(refusalCode(() => film.at(1101))).toBe("outside-table");
    const backwards = () => taucLorentzMaterial({ ...one(80, 7, 6, 2), rangeNm: [1100, 300] });
    expect(refusalCode(backwards)).toBe("material-range");
  });
});
