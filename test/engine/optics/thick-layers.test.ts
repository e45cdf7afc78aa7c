import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  constantMaterial,
  coverLight,
  type Polarisation,
  radians,
  stackLight,
  type ThickLayer,
  ThickLayers,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const wavelengthNm = Float64Array.of(600);
const layer = (n: number, k = 0, thicknessMm = 3): ThickLayer => ({ material: constantMaterial(n, k), thicknessMm });
const rounding = { absolute: 1e-14, because: "rounding" };

/** All passes over a surface that reflects `below` of what reaches it. */
function over(layers: ThickLayer[], below: number, along = 0, polarisation: Polarisation = "s") {
  const thick = new ThickLayers(wavelengthNm, layers);
  const down = thick.down(0, along, polarisation);
  const up = thick.up(0, along, polarisation);
  const reach = down.through / (1 - below * up.back);
  return { reach, reflectance: down.back + reach * below * up.through };
}

describe("thick incoherent layers", () => {
  test("of clear glass over glass-air reflect 2r/(1 + r): a window pane (Fresnel and the geometric series)", () => {
    const r = 0.04;
    const pane = over([layer(1.5)], r);
    expectClose(pane.reflectance, (2 * r) / (1 + r), rounding);
    expectClose(pane.reflectance + pane.reach * (1 - r), 1, rounding);
  });

  test("of two panes with air between reflect as m plates do, r(m) = 2mr/(1 + (2m - 1) r) (Stokes 1862, from memory)", () => {
    // Two plates: pane, air gap, pane, and the air behind as the surface below: four interfaces of r = 0.04.
    const r = 0.04;
    const panes = over([layer(1.5), layer(1, 0, 10), layer(1.5)], r);
    expectClose(panes.reflectance, (4 * r) / (1 + 3 * r), rounding);
    // And of absorbing panes: pane i alone has R = r + (1-r)^2 a^2 r/(1-a^2 r^2), T = (1-r)^2 a/(1-a^2 r^2); two add up as
    // R + T^2 R/(1 - R^2).
    const k = 2e-6;
    const a = Math.exp((-4 * Math.PI * k * 3e6) / 600);
    const alone = r + ((1 - r) ** 2 * a * a * r) / (1 - a * a * r * r);
    const through = ((1 - r) ** 2 * a) / (1 - a * a * r * r);
    const grey = over([layer(1.5, k), layer(1, 0, 10), layer(1.5, k)], r);
    expectClose(grey.reflectance, alone + (through * through * alone) / (1 - alone * alone), rounding);
    expectClose(grey.reach * (1 - r), (through * through) / (1 - alone * alone), rounding);
  });

  test("are the mean of the coherent answer over the phase of a thick layer", () => {
    // Second route: the coherent stack, averaged over one full turn of the phase in the layer.
    for (const polarisation of ["s", "p"] as const) {
      const angleRad = radians(40);
      const substrate = { n: 3.9, k: 0.02 };
      const innerRad = Math.asin(Math.sin(angleRad) / 1.5);
      const common = { wavelengthNm: 600, substrate, polarisation };
      const inside = stackLight({ ...common, angleRad: innerRad, incidenceIndex: 1.5, layers: [] });
      const turnNm = 600 / (2 * 1.5 * Math.cos(innerRad));
      let mean = 0;
      for (let i = 0; i < 64; i++) {
        const layers = [{ n: 1.5, k: 0, thicknessNm: 1000 + (turnNm * i) / 64 }];
        mean += stackLight({ ...common, angleRad, incidenceIndex: 1, layers }).reflectance / 64;
      }
      const covered = over([layer(1.5)], inside.reflectance, Math.sin(angleRad), polarisation).reflectance;
      expectClose(covered, mean, { absolute: 1e-10, because: "the mean of a smooth periodic function over 64 points" });
      const { innerAngleRad } = coverLight({
        seenFrom: { thick: [layer(1.5)] },
        wavelengthNm,
        exitsRad: "mirror",
        angleRad,
      });
      expectClose(innerAngleRad[0], innerRad, rounding);
    }
  });

  test("absorb by Lambert and Beer on each pass, longer aslant", () => {
    const k = 1e-5;
    const once = Math.exp((-4 * Math.PI * k * 3e6) / 600);
    const { through, absorbed } = new ThickLayers(wavelengthNm, [layer(1.5, k)]).down(0, 0, "s");
    expectClose(through, 0.96 * once, rounding);
    expectClose(absorbed[0], 0.96 * (1 - once), rounding);
    // At 30 deg in the glass a pass is 1/cos 30 deg longer; index 1 has no interface outside to reflect.
    const slant = new ThickLayers(wavelengthNm, [layer(1, k)]).up(0, Math.sin(radians(30)), "p");
    expectClose(slant.through, once ** (1 / Math.cos(radians(30))), rounding);
    // Over a half mirror: down, back up, and round again, as a geometric series summed here term by term.
    const { reflectance, reach } = over([layer(1.5, k)], 0.5);
    let back = 0.04;
    let arrived = 0;
    let down = 0.96;
    for (let pass = 0; pass < 40; pass++) {
      arrived += down * once;
      back += down * once * 0.5 * once * 0.96;
      down *= once * 0.5 * once * 0.04;
    }
    expectClose(reflectance, back, rounding);
    expectClose(reach, arrived, rounding);
  });

  test("send nothing out beyond the critical angle, whichever interface that is met at", () => {
    const along = 1.5 * Math.sin(radians(45));
    for (const layers of [[layer(1.5)], [layer(1.6), layer(1.5)], [layer(1.5), layer(1, 0, 1), layer(1.5)]]) {
      for (const polarisation of ["s", "p"] as const) {
        const up = new ThickLayers(wavelengthNm, layers).up(0, along, polarisation);
        expect(up.through).toBe(0);
        expectClose(up.back, 1, rounding);
      }
    }
    // Just inside it a little still gets out.
    expect(new ThickLayers(wavelengthNm, [layer(1.5)]).up(0, 0.9999, "s").through).toBeGreaterThan(0.01);
  });

  test("account for all the light in both directions, whatever they are", () => {
    const anyLayer = fc
      .tuple(
        fc.double({ min: 1, max: 2.5, noNaN: true }),
        fc.double({ min: 0, max: 2e-5, noNaN: true }),
        fc.double({ min: 0, max: 20, noNaN: true }),
      )
      .map(([n, k, mm]) => layer(n, k, mm));
    fc.assert(
      fc.property(
        fc.array(anyLayer, { minLength: 1, maxLength: 4 }),
        fc.double({ min: 0, max: 89.9, noNaN: true }),
        fc.constantFrom<Polarisation>("s", "p"),
        (layers, deg, polarisation) => {
          const thick = new ThickLayers(wavelengthNm, layers);
          const sine = Math.sin(radians(deg));
          for (const light of [
            thick.down(0, sine, polarisation),
            thick.up(0, thick.innerIndex[0] * sine, polarisation),
          ]) {
            const sum = light.absorbed.reduce((total, part) => total + part, light.through + light.back);
            expectClose(sum, 1, { absolute: 1e-12, because: "conservation, rounding" });
            for (const part of [light.through, light.back, ...light.absorbed]) expect(part).toBeGreaterThanOrEqual(0);
          }
        },
      ),
      { seed: 11 },
    );
  });

  test("let as much through up as down (reciprocity of a flat stack; Born and Wolf, section 1.6, by its symmetry)", () => {
    const thick = new ThickLayers(wavelengthNm, [layer(1.5, 1e-6), layer(1.8, 3e-6), layer(1.45)]);
    for (const polarisation of ["s", "p"] as const) {
      expectClose(thick.up(0, 0.6, polarisation).through, thick.down(0, 0.6, polarisation).through, rounding);
    }
  });

  test("refuse no layer, a thickness that cannot be, and what is no window", () => {
    const made = (...layers: ThickLayer[]) => refusalCode(() => new ThickLayers(wavelengthNm, layers));
    expect(made()).toBe("no-layers");
    expect(made(layer(1.5, 0, -1))).toBe("stack-value");
    expect(made(layer(1.5, 0, Number.NaN))).toBe("stack-value");
    expect(made(layer(0.9))).toBe("stack-value");
    expect(made(layer(1.5, 0.06))).toBe("stack-value");
  });
});
