import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { filmStack } from "../../../../engine/index.ts";
import { readStack, stackDescription } from "../../../../recipes/line/stack/stack-file.ts";
import { changed, problemsOf } from "../given.ts";

/** The example of the published contract. */
const STACK = `light: { from: 300 nm, to: 1100 nm, step: 10 nm, angle: 0 deg, polarisation: both, weight: photons }   # s | p | both
seen_from: air                    # air | glass | { index: 1.5 } | a list of thick layers, outermost first
film:                             # from the light inwards
  - { material: silica, thickness: 90 nm }
  - { material: silicon nitride, index: 2.09, thickness: 60 nm }
  - { table: my-film.csv, thickness: 12 nm }             # wavelength_nm,n,k
  - { index: 1.64, extinction: 0.0, thickness: 10 nm }   # constant
surface: polished                 # polished | { pyramids: 54.74 deg }
substrate: silicon                # a material, { table: F.csv }, or { index, extinction }
`;
const TABLE = "wavelength_nm,n,k\n250,2.1,0.1\n1300,2.0,0\n";
const read = (text: string, table = TABLE) => readStack(text, "stack.yaml", () => table);
const placesOf = (text: string, table?: string) =>
  problemsOf(() => read(text, table)).map(({ code, row, column }) => `${code} ${row}:${column}`);

describe("a stack file", () => {
  it("reads as it is written", () => {
    const { light, seenFrom, film, surface, substrate } = read(STACK);
    expect(light).toEqual({
      fromNm: 300,
      toNm: 1100,
      stepNm: 10,
      angleDeg: 0,
      polarisation: "both",
      weight: "photons",
    });
    expect(seenFrom).toBe("air");
    expect(film).toMatchObject([
      { kind: "material", name: "silica", thicknessNm: 90 },
      { kind: "material", name: "silicon nitride", index: 2.09, thicknessNm: 60 },
      {
        kind: "table",
        file: "my-film.csv",
        rows: [
          [250, 2.1, 0.1],
          [1300, 2, 0],
        ],
        thicknessNm: 12,
      },
      { kind: "constant", index: 1.64, extinction: 0, thicknessNm: 10 },
    ]);
    expect(surface).toEqual({ kind: "polished" });
    expect(substrate.name).toBe("silicon");
  });

  it("is what the engine computes: a bare wafer reflects as published", () => {
    // bare polished silicon (Green 2008), photons, 300 to 1100 nm: 35.24 +- 0.02 % on the spectrum's own points (computed by an independent program);
    // 0.05 more for the 10 nm grid of reflectance
    const answer = filmStack(stackDescription(read("film: []\n")));
    expect(Math.abs(answer.weighted_reflectance_percent - 35.24)).toBeLessThan(0.07);
  });

  it("leaves out what has a default", () => {
    const { light, surface } = read(
      "film: []\nsurface: pyramids\nseen_from: { index: 1.5 }\nsubstrate: { index: 3.88, extinction: 0.018 }\n",
    );
    expect(light).toEqual({
      fromNm: 300,
      toNm: 1100,
      stepNm: 10,
      angleDeg: 0,
      polarisation: "both",
      weight: "photons",
    });
    expect(surface).toEqual({ kind: "pyramids", facetAngleDeg: 54.74 });
    expect(read("film: []\nsurface: { pyramids: 52 deg }\n").surface).toEqual({ kind: "pyramids", facetAngleDeg: 52 });
    expect(read("film: []\nsubstrate: { index: 3.88, extinction: 0.018 }\n").substrate.at(600)).toEqual({
      n: 3.88,
      k: 0.018,
    });
    expect(read("film: []\nsubstrate: { table: s.csv }\n").substrate.at(250)).toEqual({ n: 2.1, k: 0.1 });
  });

  it.each([
    ["silica", "silcia", ["unknown-material 4:17"]],
    ["index: 2.09, ", "", ["material-index 5:17"]],
    ["index: 2.09, ", "index: 9.5, ", ["index-out-of-range 5:41"]],
    ["material: silica,", "material: silica, index: 1.5,", ["material-index 4:32"]],
    ["90 nm", "90", ["missing-unit 4:36"]],
    ["90 nm", "may be 40..120 nm", ["needs-improve 4:36"]],
    ["90 nm", "-1 nm", ["out-of-bounds 4:36"]],
    ["seen_from: air", "seen_from: [ glass ]", ["wrong-type 2:14"]],
    ["seen_from: air", "seen_from: water", ["wrong-value 2:12"]],
    ["extinction: 0.0", "extinction: -0.1", ["out-of-bounds 7:32"]],
    ["extinction: 0.0", "extinct: 0.0", ["unknown-key 7:20"]],
    ["angle: 0 deg", "angle: 90 deg", ["out-of-bounds 1:57"]],
    ["polarisation: both", "polarisation: x", ["wrong-value 1:78"]],
    ["surface: polished", "surface: { pyramids: 30 deg }", ["out-of-bounds 8:22"]],
    ["substrate: silicon", "substrate: silicone", ["unknown-material 9:12"]],
    ["substrate: silicon", "substrat: silicon", ["unknown-key 9:1"]],
    ["material: silica, ", "", ["missing-key 4:5"]],
    ["table: my-film.csv", "table: my-film.csv, material: silica", ["two-materials 6:7"]],
    ["table: my-film.csv", "table: /etc/passwd", ["bad-file-name 6:14"]],
  ])("with %j written as %j is refused: %j", (from, to, places) => {
    expect(placesOf(changed(from, to, STACK))).toEqual(places);
  });

  it("names light aslant on pyramids at the angle", () => {
    const text = changed("angle: 0 deg", "angle: 10 deg", changed("surface: polished", "surface: pyramids", STACK));
    expect(placesOf(text)).toEqual(["angle-on-pyramids 1:57"]);
  });

  it("reports several problems at once", () => {
    expect(placesOf(changed("silica", "silcia", changed("90 nm", "may be 40..120 nm", STACK)))).toEqual([
      "unknown-material 4:17",
      "needs-improve 4:36",
    ]);
  });

  it.each([
    ["wavelength_nm,n\n250,2\n1300,2\n", "missing-column 1:1"],
    ["wavelength_nm,n,kk\n250,2,0\n1300,2,0\n", "unknown-column 1:17"],
    ["wavelength_nm,n,k,n\n250,2,0,2\n1300,2,0,2\n", "duplicate-column 1:19"],
    ["wavelength_nm,n,k\n250,nan,0\n1300,2,0\n", "not-a-number 2:5"],
    ["wavelength_nm,n,k\n250,2,-0.1\n1300,2,0\n", "out-of-bounds 2:7"],
    ["wavelength_nm,n,k\n250,2,0\n250,2,0\n", "not-increasing 3:1"],
    ["wavelength_nm,n,k\n250,2,0\n\n240,2,0\n", "not-increasing 4:1"],
    ["wavelength_nm,n,k\n250,2,0\n", "too-few-rows 2:1"],
    ["wavelength_nm;n;k\n250;2;0\n", "unknown-column 1:1"],
    ["wavelength_nm,n,k\n250,2,0,1\n1300,2,0\n", "wrong-columns 2:1"],
    ["", "empty-file 1:1"],
  ])("names the place in a table that is wrong: %j", (table, place) => {
    expect(placesOf(STACK, table)).toContain(place);
    expect(problemsOf(() => read(STACK, table))[0].file).toBe("my-film.csv");
  });

  it("with random damage is read or refused with a place", () => {
    fc.assert(
      fc.property(
        fc.nat({ max: STACK.length }),
        fc.nat({ max: 8 }),
        fc.string({ maxLength: 3 }),
        (at, remove, insert) => {
          for (const { row, column } of problemsOf(() =>
            read(STACK.slice(0, at) + insert + STACK.slice(at + remove)),
          )) {
            expect(row).toBeGreaterThanOrEqual(1);
            expect(column).toBeGreaterThanOrEqual(1);
          }
        },
      ),
      { numRuns: 150, seed: 7 },
    );
  });
});
