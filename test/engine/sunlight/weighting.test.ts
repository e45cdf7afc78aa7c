import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { gridWeights, wavelengthGrid, weightedAverage } from "../../../engine/index.ts";
import { photonCurrent, sunlightPower, sunlightWavelengthNm } from "../../../engine/sunlight/spectrum.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const grid = wavelengthGrid(300, 1100, 10);

describe("weighted averages", () => {
  test("of a constant are that constant, whatever the weight", () => {
    const quantum = { wavelengthNm: [300, 700, 1100], efficiency: [0.5, 1, 0.2] };
    for (const weight of ["photons", "power", quantum] as const) {
      const values = new Float64Array(grid.length).fill(0.37);
      expectClose(weightedAverage(grid, values, 312.3, 1071.7, weight), 0.37, { absolute: 1e-14, because: "rounding" });
    }
  });

  test("equal the trapezoid over the spectrum's own points, written out", () => {
    fc.assert(
      fc.property(fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 81, maxLength: 81 }), (values) => {
        // Second route: no weights, no end points off the spectrum; straight lines by hand.
        let top = 0;
        let bottom = 0;
        const points = Array.from(sunlightWavelengthNm).filter((w) => w >= 300 && w <= 1100);
        const flux = (w: number) => sunlightPower[sunlightWavelengthNm.indexOf(w)] * w;
        const value = (w: number) => {
          const i = Math.min(79, Math.floor((w - 300) / 10));
          return values[i] + ((values[i + 1] - values[i]) * (w - grid[i])) / 10;
        };
        for (let p = 1; p < points.length; p++) {
          const [a, b] = [points[p - 1], points[p]];
          top += ((b - a) * (flux(a) * value(a) + flux(b) * value(b))) / 2;
          bottom += ((b - a) * (flux(a) + flux(b))) / 2;
        }
        expectClose(weightedAverage(grid, values, 300, 1100), top / bottom, { absolute: 1e-13, because: "rounding" });
      }),
      { numRuns: 20, seed: 3 },
    );
  });

  test("take end points between the spectrum's points by interpolation", () => {
    // Two end points and nothing between: the mean of the two wavelengths, weighted by the flux on a straight line.
    const e = (w: number) => sunlightPower[sunlightWavelengthNm.indexOf(w)];
    const flux = (w: number) => (e(500) + (e(501) - e(500)) * (w - 500)) * w;
    const [a, b] = [500.25, 500.75];
    const expected = (flux(a) * a + flux(b) * b) / (flux(a) + flux(b));
    expectClose(weightedAverage(grid, grid, a, b), expected, { absolute: 1e-9, because: "rounding" });
  });

  test("count nothing where the quantum efficiency is zero", () => {
    const blind = { wavelengthNm: [300, 600, 600.001, 1100], efficiency: [0, 0, 1, 1] };
    const step = Float64Array.from(grid, (w) => (w < 600 ? 1 : 0));
    expect(weightedAverage(grid, step, 300, 1100, blind)).toBeLessThan(1e-6);
  });

  test("refuse ranges and tables that do not cover", () => {
    const values = new Float64Array(grid.length);
    expect(refusalCode(() => weightedAverage(grid, values, 299, 1100))).toBe("outside-table");
    expect(refusalCode(() => weightedAverage(grid, values, 300, 1101))).toBe("outside-table");
    expect(refusalCode(() => weightedAverage(grid, values, 700, 500))).toBe("range-order");
    expect(refusalCode(() => weightedAverage(grid, values, Number.NaN, 500))).toBe("range-order");
    expect(refusalCode(() => weightedAverage(grid, values.subarray(1), 300, 1100))).toBe("length-mismatch");
    const narrow = { wavelengthNm: [400, 1100], efficiency: [1, 1] };
    expect(refusalCode(() => gridWeights(grid, 300, 1100, narrow))).toBe("outside-table");
    const percent = { wavelengthNm: [300, 1100], efficiency: [90, 95] };
    expect(refusalCode(() => gridWeights(grid, 300, 1100, percent))).toBe("quantum-efficiency");
    expect(refusalCode(() => gridWeights(wavelengthGrid(250, 1100, 10), 250, 1100))).toBe("outside-table");
  });
});

describe("photon current", () => {
  test("of 1 W/m2/nm at 1239.84 nm is 0.1 mA/cm2/nm: photons of 1 eV", () => {
    // h c / q = 1239.84198 eV nm, exact SI constants.
    expectClose(photonCurrent(1, 1239.8419843), 0.1, { relative: 1e-9, because: "constant quoted to 11 digits" });
  });
});

describe("a wavelength grid", () => {
  test("ends at the last wavelength even when the step does not divide the range", () => {
    expect(Array.from(wavelengthGrid(300, 325, 10))).toEqual([300, 310, 320, 325]);
    expect(Array.from(wavelengthGrid(300, 320, 10))).toEqual([300, 310, 320]);
    expect(refusalCode(() => wavelengthGrid(300, 1100, 0.1))).toBe("range-step");
    expect(refusalCode(() => wavelengthGrid(300, 1100, 0))).toBe("range-step");
    expect(refusalCode(() => wavelengthGrid(300, 300, 10))).toBe("range-order");
  });
});
