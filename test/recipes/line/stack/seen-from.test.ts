/** What a stack file may say about light and what lies in front: thick layers, efficiency weights, the kind of pyramids. */
import { describe, expect, it } from "vitest";
import { filmStack } from "../../../../engine/index.ts";
import { readStack, stackDescription } from "../../../../recipes/line/stack/stack-file.ts";
import { problemsOf } from "../given.ts";

const IQE = "wavelength_nm,efficiency\n300,0.5\n600,0.98\n1100,0.4\n";
const FRONT_TABLE = "wavelength_nm,n,k\n250,1.51,0\n1300,1.50,0\n";
const files: Record<string, string> = {
  "iqe.csv": IQE,
  "short.csv": "wavelength_nm,efficiency\n400,0.5\n1100,0.4\n",
  "dark.csv": "wavelength_nm,efficiency\n300,0\n1100,0\n",
  "percent.csv": "wavelength_nm,efficiency\n300,50\n1100,40\n",
  "front.csv": FRONT_TABLE,
  "late.csv": "wavelength_nm,n,k\n500,1.51,0\n1300,1.50,0\n",
};
const read = (text: string) =>
  readStack(text, "stack.yaml", (name) => {
    const found = files[name];
    if (found === undefined) throw new Error("none");
    return found;
  });
const placesOf = (text: string) =>
  problemsOf(() => read(text)).map(({ code, file, row, column }) => `${code} ${file} ${row}:${column}`);
const tail = "film:\n  - { material: silicon nitride, index: 2.06, thickness: 76 nm }\n";

describe("what a stack is seen from", () => {
  it("is a list of thick layers, outermost first, in any spelling of a material and any unit of length", () => {
    const { seenFrom } = read(
      `seen_from: [ { material: glass, thickness: 3.2 mm }, { table: front.csv, thickness: 450 um }, { index: 1.49, extinction: 0.0000002, thickness: 0.2 mm } ]\n${tail}`,
    );
    expect(seenFrom).toMatchObject({
      thick: [
        { material: { name: "glass" }, thicknessMm: 3.2 },
        { material: { name: "front.csv" }, thicknessMm: 0.45 },
        { thicknessMm: 0.2 },
      ],
    });
    if (typeof seenFrom !== "object" || !("thick" in seenFrom)) throw new Error("no list");
    expect(seenFrom.thick[2].material.at(500)).toEqual({ n: 1.49, k: 2e-7 });
  });

  it("as glass gives the same numbers as its two layers written out", () => {
    const written = read(
      `seen_from:\n  - { material: glass, thickness: 3.2 mm }\n  - { material: encapsulant, thickness: 0.45 mm }\n${tail}surface: pyramids\n`,
    );
    const short = read(`seen_from: glass\n${tail}surface: pyramids\n`);
    expect(filmStack(stackDescription(written))).toEqual(filmStack(stackDescription(short)));
  });

  it.each([
    ["seen_from: []", ["no-layers stack.yaml 1:12"]],
    ["seen_from: water", ["wrong-value stack.yaml 1:12"]],
    ["seen_from: [ glass ]", ["wrong-type stack.yaml 1:14"]],
    ["seen_from: [ { material: glass } ]", ["missing-key stack.yaml 1:14"]],
    ["seen_from: [ { material: glas, thickness: 3 mm } ]", ["unknown-material stack.yaml 1:26"]],
    ["seen_from: [ { material: glass, thickness: 3 } ]", ["missing-unit stack.yaml 1:44"]],
    ["seen_from: [ { material: glass, thickness: 30 mm } ]", ["out-of-bounds stack.yaml 1:44"]],
    ["seen_from: [ { material: glass, thickness: 90 nm } ]", ["out-of-bounds stack.yaml 1:44"]],
    ["seen_from: [ { material: glass, thickness: 3 mm, colour: green } ]", ["unknown-key stack.yaml 1:50"]],
    ["seen_from: [ { table: late.csv, thickness: 3 mm } ]", ["outside-table stack.yaml 1:14"]],
    ["seen_from: [ { table: none.csv, thickness: 3 mm } ]", ["no-file stack.yaml 1:23"]],
    ["seen_from: [ { index: 0.9, thickness: 3 mm } ]", ["stack-value stack.yaml 1:14"]],
    ["seen_from: [ { material: silicon, thickness: 3 mm } ]", ["stack-value stack.yaml 1:14"]],
    [
      "seen_from:\n  - { material: glass, thickness: 30 mm }\n  - { material: wax, thickness: 3 mm }",
      ["out-of-bounds stack.yaml 2:35", "unknown-material stack.yaml 3:17"],
    ],
  ])("written as %j is refused where it is wrong", (line, places) => {
    expect(placesOf(`${line}\n${tail}`)).toEqual(places);
  });

  it("says of a thin film written in front where it belongs", () => {
    const [problem] = problemsOf(() => read(`seen_from: [ { material: silica, thickness: 90 nm } ]\n${tail}`));
    expect(problem.hint).toMatch(/film/);
  });
});

describe("the light of a stack file", () => {
  it("may be weighted by a quantum efficiency, and then says what is collected", () => {
    const stack = read(`light: { weight: iqe.csv }\n${tail}`);
    expect(stack.light.weight).toEqual({
      file: "iqe.csv",
      wavelengthNm: [300, 600, 1100],
      efficiency: [0.5, 0.98, 0.4],
    });
    const { collected = Number.NaN, into_substrate } = filmStack(stackDescription(stack)).current_ma_cm2;
    expect(collected).toBeLessThan(0.98 * into_substrate);
    expect(collected).toBeGreaterThan(0.5 * into_substrate);
  });

  it.each([
    ["weight: short.csv", ["table-too-short stack.yaml 1:18"]],
    ["weight: none.csv", ["no-file stack.yaml 1:18"]],
    ["weight: ../iqe.csv", ["bad-file-name stack.yaml 1:18"]],
    ["weight: dark.csv", ["quantum-efficiency stack.yaml 1:18"]],
    ["weight: percent.csv", ["out-of-bounds percent.csv 2:5", "out-of-bounds percent.csv 3:6"]],
    ["weight: photon", ["wrong-value stack.yaml 1:18"]],
    [
      "weight: front.csv",
      ["missing-column front.csv 1:1", "unknown-column front.csv 1:15", "unknown-column front.csv 1:17"],
    ],
    ["from: 900 nm, to: 400 nm", ["range-reversed stack.yaml 1:8"]],
  ])("written as %j is refused where it is wrong", (light, places) => {
    expect(placesOf(`light: { ${light} }\n${tail}`).sort()).toEqual([...places].sort());
  });
});

describe("the pyramids of a stack file", () => {
  it("may be random or regular", () => {
    const surfaceOf = (surface: string) => read(`${tail}surface: ${surface}\n`).surface;
    expect(surfaceOf("{ pyramids: 54.74 deg, arrangement: regular }")).toEqual({
      kind: "pyramids",
      facetAngleDeg: 54.74,
      arrangement: "regular",
    });
    expect(surfaceOf("{ pyramids: 52 deg }")).toEqual({ kind: "pyramids", facetAngleDeg: 52 });
    const reflected = (surface: string) =>
      filmStack(stackDescription(read(`film: []\nsurface: ${surface}\n`))).weighted_reflectance_percent;
    expect(reflected("{ pyramids: 52 deg, arrangement: random }")).toBe(reflected("{ pyramids: 52 deg }"));
    expect(reflected("{ pyramids: 52 deg, arrangement: regular }")).toBeGreaterThan(reflected("{ pyramids: 52 deg }"));
  });

  it.each([
    ["{ pyramids: 54.74 deg, arrangement: neat }", "wrong-value stack.yaml 3:46"],
    ["{ pyramids: 54.74 deg, arangement: random }", "unknown-key stack.yaml 3:33"],
    ["{ arrangement: random }", "missing-key stack.yaml 3:10"],
    ["{ pyramids: 54.74, arrangement: random }", "missing-unit stack.yaml 3:22"],
  ])("written as %j are refused where they are wrong", (surface, place) => {
    expect(placesOf(`${tail}surface: ${surface}\n`)).toEqual([place]);
  });
});
