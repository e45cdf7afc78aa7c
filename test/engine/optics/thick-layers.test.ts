import { describe, expect, test } from "vitest";
import { constantMaterial, radians, stackLight, ThickLayers } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const wavelengthNm = Float64Array.of(600);
const glass = (k = 0) => ({ material: constantMaterial(1.5, k), thicknessMm: 3 });

describe("thick incoherent layers", () => {
  test("of clear glass over glass-air reflect 2r/(1 + r): a window pane (Fresnel and the geometric series)", () => {
    const r = 0.04;
    const pane = new ThickLayers(wavelengthNm, [glass()]).over(0, r);
    expectClose(pane.reflectance, (2 * r) / (1 + r), { absolute: 1e-15, because: "rounding" });
    expectClose(pane.reflectance + pane.reach * (1 - r), 1, { absolute: 1e-15, because: "clear glass loses nothing" });
  });

  test("are the mean of the coherent answer over the phase of a thick layer", () => {
    // Second route: the coherent stack, averaged over one full turn of the phase in the layer.
    for (const polarisation of ["s", "p"] as const) {
      const angleRad = radians(40);
      const substrate = { n: 3.9, k: 0.02 };
      const cover = new ThickLayers(
        wavelengthNm,
        [{ material: constantMaterial(1.5), thicknessMm: 1 }],
        1,
        angleRad,
        polarisation,
      );
      const inside = stackLight({
        wavelengthNm: 600,
        angleRad: cover.innerAngleRad[0],
        incidenceIndex: 1.5,
        layers: [],
        substrate,
        polarisation,
      });
      const turnNm = 600 / (2 * 1.5 * Math.cos(cover.innerAngleRad[0]));
      let mean = 0;
      for (let i = 0; i < 64; i++) {
        const layers = [{ n: 1.5, k: 0, thicknessNm: 1000 + (turnNm * i) / 64 }];
        mean +=
          stackLight({ wavelengthNm: 600, angleRad, incidenceIndex: 1, layers, substrate, polarisation }).reflectance /
          64;
      }
      const covered = cover.over(0, inside.reflectance).reflectance;
      expectClose(covered, mean, { absolute: 1e-10, because: "the mean of a smooth periodic function over 64 points" });
    }
  });

  test("absorb by Lambert and Beer on each pass", () => {
    const k = 1e-5;
    const once = Math.exp((-4 * Math.PI * k * 3e6) / 600);
    const { reach } = new ThickLayers(wavelengthNm, [glass(k)]).over(0, 0);
    expectClose(reach, 0.96 * once, { absolute: 1e-15, because: "rounding" });
    // Over a half mirror: down, back up, and round again, as a geometric series summed here term by term.
    const { reflectance, reach: all } = new ThickLayers(wavelengthNm, [glass(k)]).over(0, 0.5);
    let back = 0.04;
    let arrived = 0;
    let down = 0.96;
    for (let pass = 0; pass < 40; pass++) {
      arrived += down * once;
      back += down * once * 0.5 * once * 0.96;
      down *= once * 0.5 * once * 0.04;
    }
    expectClose(reflectance, back, { absolute: 1e-15, because: "rounding" });
    expectClose(all, arrived, { absolute: 1e-15, because: "rounding" });
  });

  test("nothing absorbed and nothing reflected below leaves the front reflection", () => {
    const two = new ThickLayers(wavelengthNm, [glass(), { material: constantMaterial(1.5), thicknessMm: 0.45 }]);
    expectClose(two.over(0, 0).reflectance, 0.04, { absolute: 1e-15, because: "rounding" });
    expectClose(two.over(0, 0.3).reach, 0.96 / (1 - 0.04 * 0.3), { absolute: 1e-15, because: "rounding" });
    expect(two.innerIndex[0]).toBe(1.5);
  });

  test("refuse no layer and a thickness that cannot be", () => {
    expect(refusalCode(() => new ThickLayers(wavelengthNm, []))).toBe("no-layers");
    expect(refusalCode(() => new ThickLayers(wavelengthNm, [{ ...glass(), thicknessMm: -1 }]))).toBe("stack-value");
  });
});
