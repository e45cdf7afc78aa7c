import { describe, expect, test } from "vitest";
import {
  coatedWafer,
  colourDifference,
  colourOfReflectance,
  colourWavelengthNm,
  filmColours,
  materialByName,
  type SeenColour,
  siliconNitride,
  type Triple,
} from "../../../engine/index.ts";
import { plainReflectance } from "../../support/characteristic-matrix.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

/** A colour made up for the test. */
const colour = (words: string, lab: Triple = [50, 0, 0], hex = "#777777"): SeenColour => ({
  xyz: [0, 0, 0],
  lab,
  hex,
  clipped: false,
  words,
});
const polished = coatedWafer({
  surface: { kind: "polished" },
  seenFrom: "air",
  fromNm: 300,
  toNm: 1100,
  weight: "photons",
});

describe("the table of film colours", () => {
  test("has a row at every step and one at the end of the range", () => {
    const thicknesses = (fromNm: number, toNm: number, stepNm: number) =>
      filmColours(() => colour("grey"), { fromNm, toNm, stepNm }).rows.map((row) => row.thicknessNm);
    expect(thicknesses(0, 10, 5)).toEqual([0, 5, 10]);
    expect(thicknesses(70, 80, 4)).toEqual([70, 74, 78, 80]);
    // 0.3 / 0.1 is a little under 3 in binary: no fourth step for that.
    expect(thicknesses(0.5, 0.8, 0.1)).toHaveLength(4);
  });

  test("merges rows that follow one another under the same words, and shows each stretch by its middle", () => {
    const { stretches } = filmColours(
      (nm) => colour(nm < 52 ? "brown" : nm <= 66 ? "purple" : "brown", [50, 0, 0], `#${nm}`),
      {
        fromNm: 50,
        toNm: 68,
        stepNm: 1,
      },
    );
    expect(stretches).toEqual([
      { fromNm: 50, toNm: 51, words: "brown", hex: "#50" },
      { fromNm: 52, toNm: 66, words: "purple", hex: "#59" },
      { fromNm: 67, toNm: 68, words: "brown", hex: "#67" },
    ]);
  });

  test("its change a nm is the CIEDE2000 difference across one nm, whatever the step", () => {
    // First pair of Sharma, Wu and Dalal (2005): 2.0425.
    const pair = (nm: number) => colour("blue", nm < 80 ? [50, 2.6772, -79.7751] : [50, 0, -82.7485]);
    for (const stepNm of [10, 5, 1]) {
      const { rows } = filmColours(pair, { fromNm: 70, toNm: 90, stepNm });
      for (const { thicknessNm, changePerNm } of rows) {
        const expected = thicknessNm === 80 ? 2.0425 : 0;
        expectClose(changePerNm, expected, { absolute: 5e-5, because: "published to 4 decimals" });
      }
    }
  });

  test("at no film the change is taken upwards only", () => {
    const { rows } = filmColours((nm) => polished.colour(2.05, nm), { fromNm: 0, toNm: 1, stepNm: 1 });
    const expected = 2 * colourDifference(polished.colour(2.05, 0).lab, polished.colour(2.05, 0.5).lab);
    expectClose(rows[0].changePerNm, expected, { relative: 1e-12, because: "rounding" });
    expect(rows[0].changePerNm).toBeGreaterThan(0);
  });

  test("refuses ranges and steps that make no table", () => {
    const ask = (fromNm: number, toNm: number, stepNm: number) => () =>
      filmColours(() => colour("grey"), { fromNm, toNm, stepNm });
    expect(refusalCode(ask(-1, 10, 1))).toBe("range-order");
    expect(refusalCode(ask(80, 80, 1))).toBe("range-order");
    expect(refusalCode(ask(90, 80, 1))).toBe("range-order");
    expect(refusalCode(ask(10, 80, 0))).toBe("range-step");
    expect(refusalCode(ask(10, 80, -1))).toBe("range-step");
    expect(refusalCode(ask(0, 1000, 0.01))).toBe("range-step");
    expect(refusalCode(ask(Number.NaN, 80, 1))).toBe("not-a-number");
    expect(refusalCode(ask(10, 80, Number.POSITIVE_INFINITY))).toBe("not-a-number");
  });

  test("passes on what the film refuses", () => {
    expect(refusalCode(() => filmColours((nm) => polished.colour(3, nm), { fromNm: 50, toNm: 60, stepNm: 1 }))).toBe(
      "index-out-of-range",
    );
  });
});

describe("colours of a wafer", () => {
  test("are those of its reflectance worked out by matrices, from no film to 150 nm", () => {
    const silicon = materialByName("silicon");
    const film = siliconNitride(2.05);
    const matrices = colourOfReflectance((thicknessNm) =>
      colourWavelengthNm.map((nm) =>
        plainReflectance(nm, 0, 1, [{ ...film.at(nm), thicknessNm }], silicon.at(nm), "s"),
      ),
    );
    const range = { fromNm: 0, toNm: 150, stepNm: 15 };
    const direct = filmColours((nm) => polished.colour(2.05, nm), range).rows;
    filmColours(matrices, range).rows.forEach((row, i) => {
      expectAllClose(direct[i].lab, row.lab, { absolute: 1e-9, because: "rounding of two routes" });
      expect(direct[i].words).toBe(row.words);
    });
  });

  test("on polished silicon turn fastest from brown to blue, and slowly where the film is light blue", () => {
    const { rows } = filmColours((nm) => polished.colour(2.05, nm), { fromNm: 30, toNm: 120, stepNm: 1 });
    const change = (nm: number) => rows[nm - 30].changePerNm;
    const fastest = rows.reduce((best, row) => (row.changePerNm > best.changePerNm ? row : best));
    expect(fastest.thicknessNm).toBeGreaterThan(54);
    expect(fastest.thicknessNm).toBeLessThan(68);
    expect(change(105)).toBeLessThan(change(80));
    expect(change(80)).toBeLessThan(fastest.changePerNm);
  });
});
