import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  type OpticalConstantsOnGrid,
  type Polarisation,
  StackDerivative,
  StackSpectrum,
  type StackSpectrumInput,
  stackLight,
  stackSlopes,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const grid = Float64Array.of(310, 480, 632.8, 1010);
const along = (min: number, max: number) =>
  fc
    .array(fc.double({ min, max, noNaN: true }), { minLength: grid.length, maxLength: grid.length })
    .map((values) => Float64Array.from(values));
const medium = fc.record({ n: along(0.4, 6), k: fc.oneof(fc.constant(new Float64Array(4)), along(0, 3)) });
const anyStack = fc.record({
  incidenceIndex: along(1, 2),
  angleRad: fc.oneof(fc.constant(0), fc.double({ min: 0, max: 1.5, noNaN: true }), along(0, 1.5)),
  polarisation: fc.constantFrom<Polarisation | "both">("s", "p", "both"),
  layers: fc.array(fc.record({ constants: medium, thicknessNm: fc.double({ min: 0, max: 200, noNaN: true }) }), {
    maxLength: 6,
  }),
  substrate: medium,
});
type AnyStack = typeof anyStack extends fc.Arbitrary<infer T> ? T : never;

const inputOf = (stack: AnyStack): StackSpectrumInput => ({
  ...stack,
  wavelengthNm: grid,
  layers: stack.layers.map((layer) => layer.constants),
});
const thicknessesOf = (stack: AnyStack): number[] => stack.layers.map((layer) => layer.thicknessNm);

/** The plain route, a wavelength at a time. */
function plain(stack: AnyStack, i: number): { reflectance: number; transmittance: number } {
  const at = ({ n, k }: OpticalConstantsOnGrid) => ({ n: n[i], k: k[i] });
  return stackLight({
    wavelengthNm: grid[i],
    angleRad: typeof stack.angleRad === "number" ? stack.angleRad : stack.angleRad[i],
    incidenceIndex: stack.incidenceIndex[i],
    layers: stack.layers.map(({ constants, thicknessNm }) => ({ ...at(constants), thicknessNm })),
    substrate: at(stack.substrate),
    polarisation: stack.polarisation,
  });
}

function evaluated(spectrum: StackSpectrum, thicknessNm: readonly number[]) {
  const reflectance = new Float64Array(grid.length);
  const transmittance = new Float64Array(grid.length);
  spectrum.evaluate(thicknessNm, reflectance, transmittance);
  return { reflectance, transmittance };
}

describe("a stack over a spectrum", () => {
  const tolerance = { absolute: 1e-12, because: "some hundred roundings of numbers near 1" };

  test("gives what the plain recursion gives at each wavelength", () => {
    fc.assert(
      fc.property(anyStack, (stack) => {
        const { reflectance, transmittance } = evaluated(new StackSpectrum(inputOf(stack)), thicknessesOf(stack));
        for (let i = 0; i < grid.length; i++) {
          const one = plain(stack, i);
          expectClose(reflectance[i], one.reflectance, tolerance);
          expectClose(transmittance[i], one.transmittance, tolerance);
        }
      }),
      { numRuns: 400, seed: 21 },
    );
  });

  test("with new layers in place of the old is the same as built anew", () => {
    fc.assert(
      fc.property(anyStack, fc.array(medium, { minLength: 7, maxLength: 7 }), (stack, others) => {
        const spectrum = new StackSpectrum(inputOf(stack));
        const derivative = new StackDerivative(spectrum);
        evaluated(spectrum, thicknessesOf(stack));
        const layers = stack.layers.map((_, j) => others[j]);
        const fresh = new StackSpectrum({ ...inputOf(stack), layers });
        layers.forEach((layer, j) => {
          spectrum.setLayer(j, layer);
          derivative.refresh(j);
        });
        expect(evaluated(spectrum, thicknessesOf(stack))).toEqual(evaluated(fresh, thicknessesOf(stack)));
        const slopes = stackSlopes(spectrum);
        const anew = stackSlopes(spectrum);
        derivative.evaluate(thicknessesOf(stack), slopes);
        new StackDerivative(fresh).evaluate(thicknessesOf(stack), anew);
        expect(slopes).toEqual(anew);
        spectrum.restack(
          stack.layers.map((layer) => layer.constants),
          others[6],
        );
        const last = new StackSpectrum({ ...inputOf(stack), substrate: others[6] });
        expect(evaluated(spectrum, thicknessesOf(stack))).toEqual(evaluated(last, thicknessesOf(stack)));
      }),
      { numRuns: 60, seed: 22 },
    );
  });

  test("carries 5 um of a strong absorber and its slopes without overflow", () => {
    const flat = (value: number) => new Float64Array(4).fill(value);
    const spectrum = new StackSpectrum({
      wavelengthNm: grid,
      incidenceIndex: flat(1.5),
      angleRad: 0.7,
      polarisation: "both",
      layers: [{ n: flat(4.2), k: flat(3) }],
      substrate: { n: flat(3.9), k: flat(0.02) },
    });
    const out = stackSlopes(spectrum);
    new StackDerivative(spectrum).evaluate([5000], out);
    for (const value of [...out.reflectance, ...out.reflectanceSlopes, ...out.transmittanceSlopes])
      expect(Number.isFinite(value)).toBe(true);
    expectClose(out.reflectanceSlopes[0], 0, { absolute: 1e-30, because: "no light comes back through 5 um" });
  });

  test("refuses thicknesses and arrays that do not fit", () => {
    const flat = (value: number, length = 4) => new Float64Array(length).fill(value);
    const input = {
      wavelengthNm: grid,
      incidenceIndex: flat(1),
      angleRad: 0,
      polarisation: "both" as const,
      layers: [{ n: flat(2), k: flat(0) }],
      substrate: { n: flat(4), k: flat(0) },
    };
    const spectrum = new StackSpectrum(input);
    const out = flat(0);
    expect(refusalCode(() => spectrum.reflectance([1, 2], out))).toBe("length-mismatch");
    expect(refusalCode(() => spectrum.reflectance([-1], out))).toBe("film-thickness");
    expect(refusalCode(() => spectrum.reflectance([Number.NaN], out))).toBe("film-thickness");
    expect(refusalCode(() => new StackDerivative(spectrum).evaluate([-1], stackSlopes(spectrum)))).toBe(
      "film-thickness",
    );
    const short = { n: flat(2, 3), k: flat(0, 3) };
    expect(refusalCode(() => new StackSpectrum({ ...input, layers: [short] }))).toBe("length-mismatch");
    expect(refusalCode(() => spectrum.setLayer(0, short))).toBe("length-mismatch");
    expect(refusalCode(() => spectrum.restack([], input.substrate))).toBe("length-mismatch");
  });
});

describe("the derivatives of a stack", () => {
  /** Fifth-order central difference of both results with respect to one parameter. */
  function difference(stack: AnyStack, parameter: number, i: number, step: number): [number, number] {
    const m = stack.layers.length;
    const moved = (by: number) => {
      const layers = stack.layers.map(({ constants, thicknessNm }, j) => {
        if (j !== parameter % m) return { constants, thicknessNm };
        const shift = (values: Float64Array) => values.map((value) => value + by);
        if (parameter < m) return { constants, thicknessNm: thicknessNm + by };
        const { n, k } = constants;
        return { constants: parameter < 2 * m ? { n: shift(n), k } : { n, k: shift(k) }, thicknessNm };
      });
      return plain({ ...stack, layers }, i);
    };
    const [m2, m1, p1, p2] = [-2, -1, 1, 2].map((c) => moved(c * step));
    const slope = (of: (light: typeof p1) => number) => (8 * (of(p1) - of(m1)) - (of(p2) - of(m2))) / (12 * step);
    return [slope((light) => light.reflectance), slope((light) => light.transmittance)];
  }

  test("with respect to every thickness, index and extinction are those of finite differences", () => {
    // Away from the edges where a central difference would leave the physical range, and from nearly lossless resonances,
    // whose third derivatives no finite difference follows.
    const tame = fc.record({
      incidenceIndex: along(1, 1.6),
      angleRad: fc.double({ min: 0, max: 1.4, noNaN: true }),
      polarisation: fc.constantFrom<Polarisation | "both">("s", "p", "both"),
      layers: fc.array(
        fc.record({
          constants: fc.record({ n: along(1.7, 4), k: along(0.001, 0.6) }),
          thicknessNm: fc.double({ min: 1, max: 150, noNaN: true }),
        }),
        { minLength: 1, maxLength: 5 },
      ),
      substrate: fc.record({ n: along(1.7, 5), k: along(0, 1) }),
    });
    fc.assert(
      fc.property(tame, (stack) => {
        const m = stack.layers.length;
        const spectrum = new StackSpectrum(inputOf(stack));
        const out = stackSlopes(spectrum);
        new StackDerivative(spectrum).evaluate(thicknessesOf(stack), out);
        const value = evaluated(spectrum, thicknessesOf(stack));
        for (let i = 0; i < grid.length; i++) {
          expectClose(out.reflectance[i], value.reflectance[i], { absolute: 1e-14, because: "rounding" });
          expectClose(out.transmittance[i], value.transmittance[i], { absolute: 1e-14, because: "rounding" });
          for (let parameter = 0; parameter < 3 * m; parameter++) {
            const step = parameter < m ? 0.02 : 2e-4;
            const [r, t] = difference(stack, parameter, i, step);
            // Rounding 1e-15 / 2e-4, and the fifth derivative: (2 pi d / lambda)^5 step^4 / 30.
            const tolerance = { absolute: 1e-9, because: "rounding and truncation of the difference" };
            expectClose(out.reflectanceSlopes[parameter * grid.length + i], r, tolerance);
            expectClose(out.transmittanceSlopes[parameter * grid.length + i], t, tolerance);
          }
        }
      }),
      { numRuns: 60, seed: 23 },
    );
  });
});
