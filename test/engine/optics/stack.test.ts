import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { radians, stackLight } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { matrixStack } from "../../support/matrix-stack.ts";
import { refusalCode } from "../../support/refusal.ts";

const anyIndex = { n: fc.double({ min: 0.05, max: 7, noNaN: true }), k: fc.double({ min: 0, max: 5, noNaN: true }) };
const anyStack = fc.record({
  wavelengthNm: fc.double({ min: 280, max: 1300, noNaN: true }),
  angleRad: fc.double({ min: 0, max: 1.55, noNaN: true }),
  incidenceIndex: fc.double({ min: 1, max: 2, noNaN: true }),
  layers: fc.array(fc.record({ ...anyIndex, thicknessNm: fc.double({ min: 0, max: 150, noNaN: true }) }), {
    maxLength: 6,
  }),
  substrate: fc.record(anyIndex),
});
const polarisations = ["s", "p"] as const;

describe("a coherent stack", () => {
  test("agrees with the characteristic matrices of Born and Wolf multiplied out", () => {
    fc.assert(
      fc.property(anyStack, fc.constantFrom(...polarisations), (question, polarisation) => {
        const fast = stackLight({ ...question, polarisation });
        const plain = matrixStack(question, polarisation);
        // The matrix route loses digits where cosh(delta) grows: 6 layers of 150 nm at k = 5 reach exp(100).
        const growth = question.layers.reduce((sum, l) => sum + (2 * Math.PI * (l.k + l.n) * l.thicknessNm) / 280, 0);
        fc.pre(growth < 12);
        const because = "rounding of the matrix route, which cancels growing exponentials";
        expectClose(fast.reflectance, plain.R, { absolute: 1e-10, because });
        expectClose(fast.transmittance, plain.T, { absolute: 1e-10, because });
        for (let j = 0; j < plain.A.length; j++)
          expectClose(fast.absorptance[j], plain.A[j], { absolute: 1e-10, because });
      }),
      { numRuns: 700, seed: 7 },
    );
  });

  test("agrees to 1e-12 for films of the trade on silicon", () => {
    for (const polarisation of polarisations) {
      for (const angleDeg of [0, 15.79, 54.74, 71.29, 86.32]) {
        for (let thicknessNm = 0; thicknessNm <= 200; thicknessNm += 12.5) {
          const question = {
            wavelengthNm: 400,
            angleRad: radians(angleDeg),
            incidenceIndex: 1,
            layers: [
              { n: 1.47, k: 0, thicknessNm: 30 },
              { n: 2.05, k: 0.02, thicknessNm },
            ],
            substrate: { n: 5.57, k: 0.387 },
          };
          const fast = stackLight({ ...question, polarisation });
          const plain = matrixStack(question, polarisation);
          const tolerance = { absolute: 1e-12, because: "a few thousand roundings of 1e-16" };
          expectClose(fast.reflectance, plain.R, tolerance);
          expectClose(fast.transmittance, plain.T, tolerance);
          expectClose(fast.absorptance[1], plain.A[1], tolerance);
        }
      }
    }
  });

  test("accounts for all the light: R + T + sum of A is 1", () => {
    fc.assert(
      fc.property(anyStack, fc.constantFrom("s" as const, "p" as const, "both" as const), (question, polarisation) => {
        const light = stackLight({ ...question, polarisation });
        const sum = light.reflectance + light.transmittance + light.absorptance.reduce((a, b) => a + b, 0);
        expectClose(sum, 1, { absolute: 1e-12, because: "a few hundred roundings; conservation is promised to 1e-12" });
        for (const share of [light.reflectance, light.transmittance, ...light.absorptance]) {
          expect(share).toBeGreaterThan(-1e-12);
        }
      }),
      { numRuns: 1500, seed: 11 },
    );
  });

  test("survives 5 um of a strong absorber, which then is all that matters", () => {
    const substrate = { n: 3.9, k: 0.02 };
    const thick = { n: 4.2, k: 3, thicknessNm: 5000 };
    const common = { wavelengthNm: 400, angleRad: 0.7, incidenceIndex: 1.5, polarisation: "p" as const };
    const light = stackLight({ ...common, layers: [thick], substrate });
    const endless = stackLight({ ...common, layers: [], substrate: thick });
    expectClose(light.reflectance, endless.reflectance, { absolute: 1e-15, because: "exp(-470) of light comes back" });
    expectClose(light.absorptance[0], 1 - light.reflectance, { absolute: 1e-12, because: "conservation" });
    expect(light.transmittance).toBeLessThan(1e-100);
    expect(light.transmittance).toBeGreaterThanOrEqual(0);
    const metres = stackLight({ ...common, layers: [{ ...thick, thicknessNm: 1e9 }], substrate });
    expect(metres.reflectance).toBe(endless.reflectance);
  });

  test("a layer of zero thickness is not there", () => {
    const common = { wavelengthNm: 600, angleRad: 0.5, incidenceIndex: 1, substrate: { n: 3.9, k: 0.02 } };
    const bare = stackLight({ ...common, layers: [], polarisation: "both" });
    const empty = stackLight({ ...common, layers: [{ n: 2, k: 0.4, thicknessNm: 0 }], polarisation: "both" });
    expectClose(empty.reflectance, bare.reflectance, { absolute: 1e-15, because: "rounding" });
    expectClose(empty.absorptance[0], 0, { absolute: 1e-15, because: "rounding" });
  });

  test("a loss-free layer absorbs exactly nothing", () => {
    const light = stackLight({
      wavelengthNm: 600,
      angleRad: 0.3,
      incidenceIndex: 1,
      layers: [{ n: 2, k: 0, thicknessNm: 80 }],
      substrate: { n: 3.9, k: 0.02 },
      polarisation: "both",
    });
    expect(light.absorptance[0]).toBe(0);
  });

  test("light is totally reflected from glass into air beyond the critical angle, and tunnels through a thin gap", () => {
    // Born and Wolf, 1.5.4: critical angle asin(1/1.5) = 41.81 deg.
    const gap = (thicknessNm: number, angleDeg: number, polarisation: "s" | "p") =>
      stackLight({
        wavelengthNm: 600,
        angleRad: radians(angleDeg),
        incidenceIndex: 1.5,
        layers: [{ n: 1, k: 0, thicknessNm }],
        substrate: { n: 1.5, k: 0 },
        polarisation,
      });
    for (const polarisation of polarisations) {
      const bare = stackLight({
        wavelengthNm: 600,
        angleRad: radians(45),
        incidenceIndex: 1.5,
        layers: [],
        substrate: { n: 1, k: 0 },
        polarisation,
      });
      expectClose(bare.reflectance, 1, { absolute: 1e-14, because: "rounding" });
      expectClose(bare.transmittance, 0, { absolute: 1e-14, because: "rounding" });
      expect(gap(60, 45, polarisation).transmittance).toBeGreaterThan(0.5);
      expect(gap(600, 45, polarisation).transmittance).toBeLessThan(0.1);
      expect(gap(6000, 45, polarisation).transmittance).toBeLessThan(1e-10);
      expect(gap(6000, 40, polarisation).transmittance).toBeGreaterThan(0.1);
      const critical = gap(100, (Math.asin(1 / 1.5) * 180) / Math.PI, polarisation);
      expectClose(critical.reflectance + critical.transmittance, 1, {
        absolute: 1e-9,
        because: "q is held off 0 there by 1e-6",
      });
    }
  });

  test("refuses what is not a stack", () => {
    const good = { wavelengthNm: 600, angleRad: 0, incidenceIndex: 1, layers: [], substrate: { n: 3.9, k: 0 } };
    const ask = (change: object) => () => stackLight({ ...good, polarisation: "s", ...change });
    expect(refusalCode(ask({ wavelengthNm: 0 }))).toBe("stack-value");
    expect(refusalCode(ask({ wavelengthNm: Number.NaN }))).toBe("not-a-number");
    expect(refusalCode(ask({ angleRad: Math.PI / 2 }))).toBe("stack-value");
    expect(refusalCode(ask({ layers: [{ n: 2, k: 0, thicknessNm: -1 }] }))).toBe("stack-value");
    expect(refusalCode(ask({ layers: [{ n: 2, k: -0.1, thicknessNm: 1 }] }))).toBe("stack-value");
    expect(refusalCode(ask({ substrate: { n: 0, k: 1 } }))).toBe("stack-value");
  });
});
