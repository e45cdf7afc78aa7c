import { describe, expect, test } from "vitest";
import { type MaterialData, materialByName, materialNames, tabulated } from "../../../engine/index.ts";
import { aluminaZhukovsky2015 } from "../../../engine/materials/data/alumina-zhukovsky-2015.ts";
import { amorphousSiliconPierce1972 } from "../../../engine/materials/data/amorphous-silicon-pierce-1972.ts";
import { encapsulantVogt2016 } from "../../../engine/materials/data/encapsulant-vogt-2016.ts";
import { glassVogt2016 } from "../../../engine/materials/data/glass-vogt-2016.ts";
import { nitrideVogt2015n191 } from "../../../engine/materials/data/nitride-vogt-2015-n191.ts";
import { nitrideVogt2015n209 } from "../../../engine/materials/data/nitride-vogt-2015-n209.ts";
import { nitrideVogt2015n213 } from "../../../engine/materials/data/nitride-vogt-2015-n213.ts";
import { siliconGreen2008 } from "../../../engine/materials/data/silicon-green-2008.ts";
import { titaniaSiefke2016 } from "../../../engine/materials/data/titania-siefke-2016.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("the library", () => {
  test.each(materialNames)("knows of %s its source and a range over the light of a cell", (name) => {
    const material = materialByName(name, name === "silicon nitride" ? { index: 2.05 } : {});
    expect(material.name).toBe(name);
    if (name === "air") expect(material.source).toBe("constant");
    // an author, and the year of the publication in brackets
    else expect(material.source).toMatch(/[A-Z]\. .*\((19|20)\d\d\)/);
    const [from, to] = material.rangeNm;
    expect(from).toBeLessThanOrEqual(300);
    expect(to).toBeGreaterThanOrEqual(1100);
    for (const wavelengthNm of [Math.max(from, 250), 550, Math.min(to, 3000)]) {
      const { n, k } = material.at(wavelengthNm);
      expect(n).toBeGreaterThan(0.9);
      expect(n).toBeLessThan(7);
      expect(k).toBeGreaterThanOrEqual(0);
    }
  });

  test("refuses unknown names, nitride without an index, and an index where none belongs", () => {
    expect(refusalCode(() => materialByName("unobtainium"))).toBe("unknown-material");
    expect(refusalCode(() => materialByName("constructor"))).toBe("unknown-material");
    expect(refusalCode(() => materialByName("silicon nitride"))).toBe("material-index");
    expect(refusalCode(() => materialByName("silica", { index: 1.46 }))).toBe("material-index");
  });
});

const tables: MaterialData[] = [
  aluminaZhukovsky2015,
  amorphousSiliconPierce1972,
  encapsulantVogt2016,
  glassVogt2016,
  nitrideVogt2015n191,
  nitrideVogt2015n209,
  nitrideVogt2015n213,
  siliconGreen2008,
  titaniaSiefke2016,
];

describe.each(tables.map((data) => [data.name, data] as const))("the table of %s", (_, data) => {
  const material = tabulated(data);
  const { rows, nStep = 0 } = data;

  test("is passed through at its rows", () => {
    for (const [wavelengthNm, n, k] of rows) {
      const here = material.at(wavelengthNm);
      // half a step of print where the smoothest n within the rounding is used, else rounding of a double
      expect(Math.abs(here.n - n)).toBeLessThanOrEqual(nStep / 2 + 1e-12);
      expect(Math.abs(here.k - k)).toBeLessThanOrEqual(1e-12 * Math.max(k, 1e-3));
    }
  });

  test("never overshoots between two rows: n and k run from one to the other and do not turn", () => {
    let turns = 0;
    let outside = 0;
    for (let i = 1; i < rows.length; i++) {
      const [from, to] = [rows[i - 1][0], rows[i][0]];
      const path = Array.from({ length: 9 }, (_, j) => material.at(j === 8 ? to : from + ((to - from) * j) / 8));
      for (const value of ["n", "k"] as const) {
        const whole = path[8][value] - path[0][value];
        for (let j = 1; j < 9; j++) {
          // rounding of a cubic on values up to 7
          if ((path[j][value] - path[j - 1][value]) * Math.sign(whole || 1) < -1e-13) turns++;
          if (whole === 0 && Math.abs(path[j][value] - path[0][value]) > 1e-13) outside++;
        }
      }
    }
    expect({ turns, outside }).toEqual({ turns: 0, outside: 0 });
  });

  test("has increasing wavelengths and no row that stands out from its neighbours as a slip of the keyboard would", () => {
    for (let i = 1; i < rows.length - 1; i++) {
      const [[before, n0], [here, n], [after, n1]] = [rows[i - 1], rows[i], rows[i + 1]];
      expect(here).toBeGreaterThan(before);
      expect(after).toBeGreaterThan(here);
      // A slipped digit makes a spike: n far from the line of its neighbours and on both sides the same way.
      const line = n0 + ((n1 - n0) * (here - before)) / (after - before);
      const isSpike = (n - n0) * (n - n1) > 0 && Math.abs(n - line) > 0.05 * n;
      // the resonances of silicon and amorphous silicon are real peaks, below 420 nm
      if (isSpike) expect(here).toBeLessThan(420);
    }
  });
});
