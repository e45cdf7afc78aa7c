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

  it("stand in the text as a ledger, a line for each place light goes, that adds up to what is available", () => {
    const ledger = (description: FilmStackDescription) =>
      filmText(filmStack(description), description)
        .split("\n")
        .map((line) => /^(.*?) {2,}(\d+\.\d{3}) +(\d+\.\d\d)$/.exec(line))
        .filter((match) => match !== null)
        .map(([, name, current, percent]) => ({ name, current: Number(current), percent: Number(percent) }));
    const under = ledger(base);
    expect(under.map(({ name }) => name)).toEqual([
      "light available",
      "reflected",
      "absorbed in glass",
      "absorbed in encapsulant",
      "absorbed in the film, silicon nitride",
      "into the substrate",
    ]);
    const [available, ...rest] = under;
    // five numbers rounded to 0.0005 mA/cm2 and to 0.005 %
    expect(Math.abs(rest.reduce((sum, { current }) => sum + current, 0) - available.current)).toBeLessThan(0.003);
    expect(Math.abs(rest.reduce((sum, { percent }) => sum + percent, 0) - 100)).toBeLessThan(0.03);
    expect(ledger({ ...base, seenFrom: "air" }).map(({ name }) => name)).toEqual([
      "light available",
      "reflected",
      "absorbed in the film, silicon nitride",
      "into the substrate",
    ]);
    const thick = [{ material: materialByName("encapsulant"), thicknessMm: 1 }];
    const weight = { wavelengthNm: [300, 1100], efficiency: [0.5, 1] };
    const film = [...base.film, { material: materialByName("silica"), thicknessNm: 20 }];
    const more = ledger({ ...base, film, seenFrom: { thick }, light: { ...base.light, weight } });
    expect(more.map(({ name }) => name)).toEqual([
      "light available",
      "reflected",
      "absorbed in thick layer 1, encapsulant",
      "absorbed in film layer 1, silicon nitride",
      "absorbed in film layer 2, silica",
      "into the substrate",
      "collected, by quantum efficiency",
    ]);
    expect(more[6].current).toBeLessThan(more[5].current);
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
