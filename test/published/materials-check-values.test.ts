/** Optical constants at points quoted with the published tables themselves (sources in engine/materials/data). */
import { describe, expect, test } from "vitest";
import { materialByName, siliconNitride } from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";

describe("materials at 632.8 nm", () => {
  test.each([
    // M. A. Green (2008); quoted from straight lines between rows 10 nm apart, n rounded to 0.001.
    ["silicon", 3.874, 0.0162, 0.0012, 3e-4],
    // I. H. Malitson (1965): 1.45702.
    ["silica", 1.457, 0, 5e-5, 0],
    // S. V. Zhukovsky et al. (2015).
    ["alumina", 1.6253, 0, 1e-4, 0],
    // T. Siefke et al. (2016).
    ["titania", 2.3894, 2.04e-9, 1e-4, 1e-9],
    // D. T. Pierce and W. E. Spicer (1972), rows 20 to 50 nm apart.
    ["amorphous silicon", 4.2063, 0.422, 0.01, 0.02],
    // M. R. Vogt et al. (2016), n printed to 0.001.
    ["encapsulant", 1.4897, 5e-7, 0.001, 2e-7],
    ["glass", 1.512, 3.9e-8, 0.001, 2e-9],
  ])("%s has n %f, k %f", (name, n, k, nTolerance, kTolerance) => {
    const here = materialByName(name).at(632.8);
    const because = "quoted digits, and a smooth curve where the quoted value comes from a straight line";
    expectClose(here.n, n, { absolute: nTolerance, because });
    expectClose(here.k, k, { absolute: kTolerance, because });
  });
});

describe("rows of the tables", () => {
  test("silicon of Green (2008) at 300, 400 and 1000 nm", () => {
    const silicon = materialByName("silicon");
    const because = "n printed to 0.001, used within its rounding; k exactly";
    for (const [wavelengthNm, n, k] of [
      [300, 4.976, 4.234],
      [400, 5.613, 0.296],
      [1000, 3.572, 5.093e-4],
    ]) {
      expectClose(silicon.at(wavelengthNm).n, n, { absolute: 5.1e-4, because });
      expectClose(silicon.at(wavelengthNm).k, k, { relative: 1e-12, because });
    }
  });

  test("silica of Malitson (1965) at the d and C lines, 587.6 and 656.3 nm", () => {
    // Malitson's table of measured indices, from memory: 1.45846 and 1.45637.
    const silica = materialByName("silica");
    const because = "printed to 5 decimals";
    expectClose(silica.at(587.5618).n, 1.45846, { absolute: 6e-6, because });
    expectClose(silica.at(656.2725).n, 1.45637, { absolute: 6e-6, because });
  });
});

describe("silicon nitride films of M. R. Vogt (2015)", () => {
  test("absorb at 400 nm with k 0.0028 at n 1.905 and 0.035 at n 2.132", () => {
    const because = "printed to 3 and 2 digits";
    expectClose(siliconNitride(1.905).at(400).k, 0.0028, { absolute: 5e-5, because });
    expectClose(siliconNitride(2.132).at(400).k, 0.035, { absolute: 2e-4, because });
  });

  test("keep absorbing at indices in between, where Philipp's film without k would wipe it out", () => {
    expect(siliconNitride(2.01).at(400).k).toBeGreaterThan(0.005);
    expect(siliconNitride(2.09).at(400).k).toBeGreaterThan(0.015);
  });

  test("pass through n of H. R. Philipp (1973) at his index", () => {
    const film = siliconNitride(2.0104973266780335);
    const because = "his formula, evaluated independently to 7 digits";
    expectClose(film.at(250).n, 2.2818861, { absolute: 1e-6, because });
    expectClose(film.at(1230).n, 1.982852, { absolute: 1e-6, because });
  });
});
