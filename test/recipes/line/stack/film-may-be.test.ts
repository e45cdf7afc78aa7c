import { describe, expect, it } from "vitest";
import { readStack, stackDescription, stackUnknowns } from "../../../../recipes/line/stack/stack-file.ts";
import { problemsOf } from "../given.ts";

const film = (...layers: string[]) => `film:\n${layers.map((layer) => `  - { ${layer} }\n`).join("")}`;
const NITRIDE = "material: silicon nitride, index: 2.06, thickness: 75 nm";
const read = (text: string, improve = true) => readStack(text, "stack.yaml", undefined, { improve });
const placesOf = (text: string, improve = true) =>
  problemsOf(() => read(text, improve)).map(({ code, row, column }) => `${code} ${row}:${column}`);

describe("what may be improved", () => {
  it("is a thickness or a nitride index, with or without the value it has now", () => {
    const text = film(
      "material: silica, thickness: may be 40..120 nm",
      "material: silicon nitride, index: 2.06 may be 1.95..2.13, thickness: 75 nm may be 0.04..0.12 um",
      "index: 1.64, thickness: 10 nm",
      "material: silicon nitride, index: may be 1.9..2.1, thickness: 20 nm",
    );
    expect(stackUnknowns(read(text))).toEqual([
      { layer: 0, what: "thickness", from: 40, to: 120, start: null },
      { layer: 1, what: "thickness", from: 40, to: 120, start: 75 },
      { layer: 1, what: "index", from: 1.95, to: 2.13, start: 2.06 },
      { layer: 3, what: "index", from: 1.9, to: 2.1, start: null },
    ]);
    // open values stand in the middle until they are improved
    expect(read(text).film.map(({ thicknessNm }) => thicknessNm)).toEqual([80, 75, 10, 20]);
    expect(read(text).film.map((layer) => "index" in layer && layer.index)).toEqual([false, 2.06, 1.64, 2]);
  });

  it("is nothing in a film of single values", () => {
    expect(stackUnknowns(read(film(NITRIDE)))).toEqual([]);
  });

  it("is computed at the value named when nothing is to be improved", () => {
    const open = read(
      film(NITRIDE.replace("2.06", "2.06 may be 1.95..2.13").replace("75 nm", "75 nm may be 40..120 nm")),
      false,
    );
    const [{ material, thicknessNm }] = stackDescription(open).film;
    expect([material.at(632.8).n, thicknessNm]).toEqual([2.06, 75]);
  });

  it.each([
    [
      "thickness: 75 nm",
      "thickness: may be 40..120 nm",
      "add --improve, or give one value, alone or in front as in 80 nm may be 40..120 nm",
    ],
    [
      "index: 2.06",
      "index: may be 1.95..2.13",
      "add --improve, or give one value, alone or in front as in 2.04 may be 1.95..2.13",
    ],
  ])("is refused without --improve when %j is left open as %j", (from, to, hint) => {
    const text = film(NITRIDE.replace(from, to));
    const [{ code, row, hint: said }] = problemsOf(() => read(text, false));
    expect([code, row, said]).toEqual(["needs-improve", 2, hint]);
    // what the hint says is read
    const offered = /as in (.*)$/.exec(hint)?.[1] ?? "";
    expect(placesOf(film(NITRIDE.replace(from, `${from.split(":")[0]}: ${offered}`)), false)).toEqual([]);
  });

  it.each([
    ["75 nm", "may be 40..120", ["missing-unit 2:58"]],
    ["75 nm", "may be 120..40 nm", ["range-reversed 2:58"]],
    ["75 nm", "may be 80 nm", ["not-a-range 2:58"]],
    ["75 nm", "may be", ["not-a-range 2:58"]],
    ["75 nm", "may be -5..40 nm", ["out-of-bounds 2:58"]],
    ["75 nm", "may be 40..4000 nm", ["out-of-bounds 2:58"]],
    ["75 nm", "30 nm may be 40..120 nm", ["start-outside 2:58"]],
    ["75 nm", "30 may be 40..120 nm", ["missing-unit 2:58"]],
    ["2.06", "may be 1.5..2.1", ["out-of-bounds 2:41"]],
    ["2.06", "may be 1.9..2.5", ["out-of-bounds 2:41"]],
    ["2.06", "2.2 may be 1.9..2.1", ["start-outside 2:41"]],
    ["silicon nitride, index: 2.06", "silica", []],
    ["silicon nitride, index: 2.06", "silica, index: may be 1.4..1.5", ["not-a-family 2:32"]],
    ["material: silicon nitride, index: 2.06", "index: may be 1.4..1.5", ["not-a-family 2:14"]],
  ])("with %j written as %j is refused: %j", (from, to, places) => {
    expect(placesOf(film(NITRIDE.replace(from, to)))).toEqual(places);
  });

  it("reports several problems at once", () => {
    const text = film("material: silcia, thickness: may be 9..8 nm", NITRIDE.replace("2.06", "may be 3..4"));
    expect(placesOf(text)).toEqual(["unknown-material 2:17", "range-reversed 2:36", "out-of-bounds 3:41"]);
  });
});

describe("the goal of a stack", () => {
  const goal = (text: string) => read(`${film(NITRIDE)}goal:\n${text}`);
  const goalPlaces = (text: string) => placesOf(`${film(NITRIDE)}goal:\n${text}`);

  it("is read, all of it or any part", () => {
    expect(read(film(NITRIDE)).goal).toEqual({});
    const all = goal(
      [
        "  weighted_reflectance: at most 2.5 %",
        "  reflectance_minimum: 600 nm within 15 nm",
        "  reflectance: { 400 nm: at most 8 %, 0.6 um: 1 % within 0.5 % }",
        "  colour: { lab: [21, 9, -28], within: 3 }",
        "",
      ].join("\n"),
    );
    expect(all.goal).toEqual({
      weightedReflectancePercent: { atMost: 2.5 },
      reflectanceMinimumNm: { value: 600, within: 15 },
      reflectance: [
        { wavelengthNm: 400, atMost: 8 },
        { wavelengthNm: 600, value: 1, within: 0.5 },
      ],
      colour: { lab: [21, 9, -28], within: 3 },
    });
    const { lab } = goal('  colour: { like: "#20305f", within: 3 }\n').goal.colour ?? { lab: [0, 0, 0] };
    // L of #20305f by hand from IEC 61966-2-1: linear 0.01444, 0.02956, 0.11444; Y = 0.03247; L = 116 cbrt(Y) - 16 = 21.0
    expect(lab[0]).toBeGreaterThan(20.9);
    expect(lab[0]).toBeLessThan(21.1);
  });

  it.each([
    ["  weighted_reflectance: 2.5 %\n", ["not-a-limit 4:25"]],
    ["  weighted_reflectance: at least 2.5 %\n", ["not-a-limit 4:25"]],
    ["  reflectance_minimum: 600 nm\n", ["not-a-tolerance 4:24"]],
    ["  reflectance_min: 600 nm within 15 nm\n", ["unknown-key 4:3"]],
    ["  reflectance: { 400: at most 8 % }\n", ["missing-unit 4:23"]],
    ["  reflectance: { 2000 nm: at most 8 % }\n", ["out-of-bounds 4:27"]],
    ["  reflectance: { 400 nm: 8 % }\n", ["not-a-limit 4:26"]],
    ["  reflectance: { 400 nm: at least 8 % }\n", ["not-a-limit 4:26"]],
    ["  reflectance: { 400 nm: at most 0 % }\n", ["out-of-bounds 4:26"]],
    ["  colour: { like: blue, within: 3 }\n", ["bad-colour 4:19"]],
    ['  colour: { like: "#20305f" }\n', ["missing-key 4:11"]],
    ["  colour: { within: 3 }\n", ["colour-goal 4:11"]],
    ['  colour: { like: "#20305f", lab: [1, 2, 3], within: 3 }\n', ["colour-goal 4:11"]],
    ["  colour: { lab: [1, 2, 300], within: 3 }\n", ["out-of-bounds 4:25"]],
    ["  colour: { lab: [1, 2], within: 3 }\n", ["wrong-type 4:18"]],
    ["  {}\n", ["empty-goal 4:3"]],
  ])("%j is refused: %j", (text, places) => {
    expect(goalPlaces(text)).toEqual(places);
  });
});
