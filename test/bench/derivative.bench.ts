/**
 * What all derivatives of a stack's reflectance cost beside its reflectance alone: silica on silicon nitride on silicon at 91
 * wavelengths, six parameters. The derivatives are checked against central differences first.
 */
import { materialByName } from "../../engine/materials/library.ts";
import { onGrid } from "../../engine/materials/material.ts";
import { StackDerivative, stackSlopes } from "../../engine/optics/stack-slopes.ts";
import { StackSpectrum } from "../../engine/optics/stack-spectrum.ts";
import { wavelengthGrid } from "../../engine/wavelength-grid.ts";
import type { Bench } from "./harness.ts";

const wavelengthNm = wavelengthGrid(300, 1200, 10);
const layers = [
  onGrid(materialByName("silica"), wavelengthNm),
  onGrid(materialByName("silicon nitride", { index: 2.08 }), wavelengthNm),
];
const substrate = onGrid(materialByName("silicon"), wavelengthNm);
const incidenceIndex = new Float64Array(wavelengthNm.length).fill(1);
const THICKNESSES = Array.from({ length: 200 }, (_, s) => [
  60 + 60 * ((s * 0.618034) % 1),
  50 + 50 * ((s * 0.754878) % 1),
]);

function bench(title: string, angleRad: number): Bench {
  const stack = new StackSpectrum({ wavelengthNm, incidenceIndex, angleRad, polarisation: "both", layers, substrate });
  const derivative = new StackDerivative(stack);
  const { reflectance, reflectanceSlopes } = stackSlopes(stack);
  const value = new Float64Array(wavelengthNm.length);
  return {
    title,
    a: {
      name: "reflectance and its six derivatives",
      run() {
        let sum = 0;
        for (const [s, thickness] of THICKNESSES.entries()) {
          derivative.evaluate(thickness, { reflectance, reflectanceSlopes });
          sum += reflectanceSlopes[s];
        }
        return sum;
      },
    },
    b: {
      name: "reflectance alone",
      run() {
        let sum = 0;
        for (const [s, thickness] of THICKNESSES.entries()) {
          stack.reflectance(thickness, value);
          sum += value[s % value.length];
        }
        return sum;
      },
    },
    check() {
      const step = 0.01;
      const more = new Float64Array(value.length);
      derivative.evaluate([90, 60], { reflectance, reflectanceSlopes });
      for (let layer = 0; layer < 2; layer++) {
        const moved = (by: number) => [90, 60].map((d, j) => (j === layer ? d + by : d));
        stack.reflectance(moved(step), more);
        stack.reflectance(moved(-step), value);
        for (let i = 0; i < value.length; i++) {
          const slope = (more[i] - value[i]) / (2 * step);
          // Third derivative (4 pi n / lambda)^3 step^2 / 6, at most 2e-8 here.
          if (!(Math.abs(slope - reflectanceSlopes[layer * value.length + i]) < 1e-7))
            throw new Error(`layer ${layer + 1} at ${wavelengthNm[i]} nm: slopes apart`);
        }
      }
    },
    rounds: 101,
  };
}

export const benches: Bench[] = [
  bench("derivatives, two layers, 91 wavelengths, straight down", 0),
  bench("derivatives, two layers, 91 wavelengths, 54.74 deg unpolarised", 0.9553),
];
