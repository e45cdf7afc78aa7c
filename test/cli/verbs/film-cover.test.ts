/** `film` accounts for all the light, also under glass, where the cover takes a part of its own. */
import { describe, expect, it } from "vitest";
import { filmText } from "../../../cli/text/film.ts";
import {
  type FilmStackAnswer,
  type FilmStackDescription,
  filmStack,
  materialByName,
  siliconNitride,
} from "../../../engine/index.ts";

const base: FilmStackDescription = {
  light: { fromNm: 300, toNm: 1100, stepNm: 10, angleDeg: 0, polarisation: "both", weight: "photons" },
  seenFrom: "glass",
  film: [{ material: siliconNitride(2.06), thicknessNm: 80 }],
  surface: { kind: "polished" },
  substrate: materialByName("silicon"),
};
const cases: [string, Partial<FilmStackDescription>][] = [
  ["on polished silicon", {}],
  ["on pyramids", { surface: { kind: "pyramids", facetAngleDeg: 52 } }],
  ["aslant", { light: { ...base.light, angleDeg: 40 } }],
  ["without a film", { film: [] }],
];

const parts = ({ current_ma_cm2: c }: FilmStackAnswer): number =>
  c.reflected + c.absorbed_in_cover + c.absorbed_in_film.reduce((a, b) => a + b, 0) + c.into_substrate;

describe("the currents of a stack", () => {
  it.each(cases)("under glass %s add up to what is available", (_, more) => {
    const answer = filmStack({ ...base, ...more });
    // the cover's part comes from the cover alone, so this is conservation below it; the tolerance is rounding
    expect(Math.abs(parts(answer) - answer.current_ma_cm2.available)).toBeLessThan(1e-9);
    expect(answer.current_ma_cm2.absorbed_in_cover).toBeGreaterThan(0.1);
  });

  it.each(cases)("in air %s leave nothing in a cover that is not there", (_, more) => {
    const answer = filmStack({ ...base, seenFrom: "air", ...more });
    expect(answer.current_ma_cm2.absorbed_in_cover).toBe(0);
    expect(Math.abs(parts(answer) - answer.current_ma_cm2.available)).toBeLessThan(1e-9);
  });

  it("name the cover's part in the text only where there is one", () => {
    const shown = { light: { fromNm: 300, toNm: 1100, weight: "photons" } };
    expect(filmText(filmStack(base), shown)).toMatch(/absorbed in glass and encapsulant \d\.\d{3},/);
    expect(filmText(filmStack({ ...base, seenFrom: "air" }), shown)).not.toContain("encapsulant");
  });

  it("come from fractions that never leave 0 to 1, not by rounding either", () => {
    // total reflection: everything comes back, and the sums of s and p round both ways
    const light = { ...base.light, angleDeg: 75 };
    const mirror = { ...base, light, seenFrom: { index: 2 }, substrate: materialByName("silica"), film: [] };
    for (const answer of [filmStack(mirror), ...cases.map(([, more]) => filmStack({ ...base, ...more }))])
      for (const value of [...answer.reflectance, ...answer.transmittance, ...answer.absorptance.flat()]) {
        expect(value).toBeLessThanOrEqual(1);
        expect(value).toBeGreaterThanOrEqual(0);
      }
  });
});
