import { describe, expect, it } from "vitest";
import * as z from "zod/mini";
import { extrapolationSentence, taucLorentzMaterial } from "../../../../engine/index.ts";
import { Reader, read } from "../../../../recipes/line/shape.ts";
import { readMaterial } from "../../../../recipes/line/stack/material.ts";
import { readYaml } from "../../../../recipes/line/yaml.ts";

const TABLE = "wavelength_nm,n,k\n300,2.1,0.1\n1100,2.0,0\n";
const THICKNESS = { thickness: z.optional(read((text) => Number(text.replace(" nm", "")))) };

/** Reads `m:` of a small file; the rows of its text count from 1, `m: ` takes three columns. */
function given(text: string, more: Parameters<typeof readMaterial>[2] = THICKNESS) {
  const reader = new Reader(readYaml(`m: ${text}\n`, "stack.yaml"));
  const material = readMaterial(reader, ["m"], more, () => TABLE);
  return { material, problems: reader.problems };
}
function good(text: string, more?: Parameters<typeof readMaterial>[2]) {
  const { material, problems } = given(text, more);
  expect(problems).toEqual([]);
  if (!material) throw new Error("nothing was read, and no problem said");
  return material;
}
const places = (text: string) => {
  const { material, problems } = given(text);
  expect(material).toBeUndefined();
  expect(problems.every(({ message }) => message.length > 5)).toBe(true);
  return problems.map(({ code, row, column }) => `${code} ${row}:${column}`);
};
const hintOf = (text: string) => given(text).problems.find(({ hint }) => hint !== undefined)?.hint ?? "";

const CAUCHY = "{ cauchy: { a: 1.9, b_um2: 0.02, c_um4: 0.001, extinction: 0.002, range: 300..1200 nm } }";
const SELLMEIER = "{ sellmeier: { terms: [ { b: 1.1, c: 0.1 um }, { b: 0.9, c: 9896 nm } ], range: 0.3..1.2 um } }";
const OSCILLATOR = "{ amplitude_ev: 80, centre_ev: 7.2, width_ev: 6 }";
const TAUC = `{ tauc_lorentz: { gap_ev: 2.4, epsilon_infinity: 1.2, oscillators: [ ${OSCILLATOR} ], range: 300..1100 nm } }`;
const MIXTURE = "{ mixture: [ { material: silica, share: 30 % }, { index: 2.4, share: 70 % } ] }";

describe("a material in a stack file", () => {
  it("is a name, a table or a constant", () => {
    expect(good("{ material: silica }")).toMatchObject({ kind: "material", name: "silica" });
    expect(good("{ material: silicon nitride, index: 2.09 }").material.at(632.8).n).toBeCloseTo(2.09, 12);
    expect(good("{ table: my.csv, thickness: 12 nm }")).toMatchObject({
      kind: "table",
      file: "my.csv",
      thicknessNm: 12,
    });
    expect(good("{ table: my.csv }").material.source).toBe("my.csv");
    expect(good("{ index: 1.64, extinction: 0.01 }").material.at(500)).toEqual({ n: 1.64, k: 0.01 });
  });

  it("is Cauchy's formula, its coefficients in micrometres", () => {
    const { kind, material } = good(CAUCHY);
    expect(kind).toBe("cauchy");
    expect(material.at(500).n).toBeCloseTo(1.9 + 0.02 / 0.25 + 0.001 / 0.0625, 12);
    expect(material.at(500).k).toBe(0.002);
    expect(material.rangeNm).toEqual([300, 1200]);
    expect(material.source).toBe("Cauchy formula");
  });

  it("is Sellmeier's formula, its poles in any unit of length", () => {
    const { material } = good(SELLMEIER);
    expect(material.at(500).n ** 2).toBeCloseTo(1 + (1.1 * 0.25) / 0.24 + (0.9 * 0.25) / (0.25 - 9.896 ** 2), 12);
    expect(material.rangeNm).toEqual([300, 1200]);
    expect(material.source).toBe("Sellmeier formula");
  });

  it("is the Tauc-Lorentz formula, its oscillators in electronvolts", () => {
    const own = taucLorentzMaterial({
      gapEv: 2.4,
      epsilonInfinity: 1.2,
      oscillators: [{ amplitudeEv: 80, centreEv: 7.2, widthEv: 6 }],
      rangeNm: [300, 1100],
    });
    expect(good(TAUC).material.at(400)).toEqual(own.at(400));
    expect(good(TAUC).material.source).toBe("Tauc-Lorentz formula");
    expect(good(TAUC.replace("epsilon_infinity: 1.2, ", "")).material.at(900).n).toBeLessThan(own.at(900).n);
  });

  it("is a mixture of any of these, with the sources of its components", () => {
    const { material } = good(MIXTURE);
    const ends = [good("{ material: silica }").material.at(600).n, 2.4];
    expect(material.at(600).n).toBeGreaterThan(ends[0]);
    expect(material.at(600).n).toBeLessThan(ends[1]);
    expect(material.source).toContain("Malitson");
    const each = [CAUCHY, SELLMEIER, TAUC, "{ table: my.csv }", "{ material: silicon nitride, index: 2 }"];
    const parts = each.map((text) => text.replace(/ \}$/, ", share: 20 % }")).join(", ");
    expect(good(`{ mixture: [ ${parts} ], thickness: 9 nm }`)).toMatchObject({ kind: "mixture", thicknessNm: 9 });
    const thirds = [33.3, 33.3, 33.4].map((share) => `{ index: 2, share: ${share} % }`).join(", ");
    expect(good(`{ mixture: [ ${thirds} ] }`).material.at(500).n).toBeCloseTo(2, 12);
  });

  it("answers beyond its ends where `extrapolate` is true, and carries what was done", () => {
    const table = good("{ table: my.csv, extrapolate: true }").material;
    expect(table.at(1240).n).toBe(2);
    expect(extrapolationSentence(table, 300, 1240)).toBe(
      "my.csv is known from 300 to 1100 nm; beyond, its last value is held",
    );
    expect(() => good("{ table: my.csv, extrapolate: false }").material.at(1240)).toThrow("known from 300 to 1100 nm");
    expect(good(CAUCHY.replace(/ \}$/, ", extrapolate: true }")).material.at(1500).n).toBeGreaterThan(1.9);
    const part = MIXTURE.replace("{ index: 2.4", "{ table: my.csv, extrapolate: true");
    expect(extrapolationSentence(good(part).material, 300, 1240)).toContain("my.csv is known from");
    expect(good(MIXTURE.replace(/ \}$/, ", extrapolate: true }")).material.at(3000).n).toBeGreaterThan(1.4);
    expect(good("{ index: 1.5, extrapolate: true }").material.extrapolations).toBeUndefined();
  });

  it("takes other keys, and another reading of its own, from whoever asks", () => {
    const may = read((text) => ({ value: Number(text.split(" ")[0]), mayBe: text }));
    const written = good("{ material: silicon nitride, index: 2.06 may be 1.9..2.13 }", { index: z.optional(may) });
    expect(written.material.at(632.8).n).toBeCloseTo(2.06, 12);
    expect(written).toMatchObject({ index: 2.06, given: { index: { mayBe: "2.06 may be 1.9..2.13" } } });
    expect(good("{ index: 1.7 may be 1.5..2 }", { index: may }).material.at(500).n).toBe(1.7);
  });
});

describe("a mistake in a material", () => {
  it.each([
    ["silica", ["wrong-type 1:4"]],
    ["{ material: silcia }", ["unknown-material 1:16"]],
    ["{ materail: silica }", ["unknown-key 1:6", "missing-key 1:4"]],
    ["{ material: silica, extrapolate: yes }", ["wrong-type 1:37"]],
    ["{ material: silica, extrapolat: true }", ["unknown-key 1:24"]],
    ["{ material: silica, cauchy: { a: 2, range: 300..900 nm } }", ["two-materials 1:24"]],
    ["{ index: 2, mixture: [ ] }", ["two-materials 1:6"]],
    ["{ table: my.csv, index: 2 }", ["two-materials 1:21"]],
    // Cauchy
    ["{ cauchy: 1.9 }", ["wrong-type 1:14"]],
    ["{ cauchy: { a: 1.9 } }", ["missing-key 1:14"]],
    ["{ cauchy: { b_um2: 0.02, range: 300..900 nm } }", ["missing-key 1:14"]],
    ["{ cauchy: { a: 1.9, b: 0.02, range: 300..900 nm } }", ["unknown-key 1:24"]],
    ["{ cauchy: { a: 1.9, b_um2: 0.02 um, range: 300..900 nm } }", ["wrong-unit 1:31"]],
    ["{ cauchy: { a: 1.9, range: 900..300 nm } }", ["range-reversed 1:31"]],
    ["{ cauchy: { a: 1.9, range: 300 nm } }", ["not-a-range 1:31"]],
    ["{ cauchy: { a: 1.9, range: 300..900 } }", ["missing-unit 1:31"]],
    ["{ cauchy: { a: 1.9, range: 300..900 nm, extinction: -1 } }", ["out-of-bounds 1:56"]],
    ["{ cauchy: { a: 0.1, b_um2: -0.02, range: 300..900 nm } }", ["material-value 1:14"]],
    ["{ cauchy: { a: 1.9 }, thicknes: 3 nm }", ["unknown-key 1:26", "missing-key 1:14"]],
    // Sellmeier
    ["{ sellmeier: { terms: [ ], range: 300..900 nm } }", ["material-value 1:17"]],
    ["{ sellmeier: { terms: [ { b: 1, c: 0.1 } ], range: 300..900 nm } }", ["missing-unit 1:39"]],
    ["{ sellmeier: { terms: [ { b: 1 } ], range: 300..900 nm } }", ["missing-key 1:28"]],
    ["{ sellmeier: { terms: { b: 1, c: 0.1 um }, range: 300..900 nm } }", ["wrong-type 1:26"]],
    ["{ sellmeier: { terms: [ { b: 1, c: 0.5 um } ], range: 300..900 nm } }", ["material-value 1:17"]],
    // Tauc-Lorentz
    ["{ tauc_lorentz: { gap_ev: 2.4, oscillators: [ ], range: 300..900 nm } }", ["material-value 1:20"]],
    [TAUC.replace("80", "-80"), ["out-of-bounds 1:89"]],
    [TAUC.replace("width_ev: 6", "width_ev: 0"), ["out-of-bounds 1:119"]],
    [TAUC.replace("centre_ev", "center_ev"), ["missing-key 1:73", "unknown-key 1:93"]],
    [TAUC.replace("2.4", "2.4 eV"), ["unknown-unit 1:30"]],
    [TAUC.replace("2.4", "-1"), ["out-of-bounds 1:30"]],
    // mixture
    ["{ mixture: silica }", ["wrong-type 1:15"]],
    ["{ mixture: [ { material: silica, share: 100 % } ] }", ["mixture-parts 1:15"]],
    [MIXTURE.replace("30 %", "20 %"), ["mixture-shares 1:15"]],
    [MIXTURE.replace("30 %", "0.3"), ["missing-unit 1:44"]],
    [MIXTURE.replace("30 %", "130 %"), ["out-of-bounds 1:44"]],
    [MIXTURE.replace(", share: 30 %", ""), ["missing-key 1:17"]],
    [MIXTURE.replace("silica", "silcia"), ["unknown-material 1:29"]],
    [MIXTURE.replace("share: 30 %", "share: 30 %, thickness: 3 nm"), ["unknown-key 1:50"]],
    [
      `{ mixture: [ ${MIXTURE.replace(/ \}$/, ", share: 50 % }")}, { index: 2, share: 50 % } ] }`,
      ["nested-mixture 1:19"],
    ],
    [
      "{ mixture: [ { material: silcia, share: 30 % }, { index: -2, share: 70 % } ], thicknes: 3 nm }",
      ["unknown-key 1:82", "unknown-material 1:29", "out-of-bounds 1:61"],
    ],
  ])("%s: %j", (text, expected) => {
    expect(places(text)).toEqual(expected);
  });

  it("comes with what would do", () => {
    const american = given(TAUC.replace("centre_ev", "center_ev")).problems.map(({ hint }) => hint);
    expect(american).toContain("did you mean centre_ev?");
    for (const text of ["{ cauchy: { a: 1.9 } }", "{ sellmeier: 2 }", "{ tauc_lorentz: { gap_ev: 2 } }"]) {
      const kind = text.slice(2, text.indexOf(":"));
      for (const { hint } of given(text).problems) expect(hint).toContain(`as in ${kind}: {`);
    }
    expect(hintOf("{ cauchy: { a: 1.9, b: 0.02, range: 300..900 nm } }")).toContain("b_um2");
    expect(hintOf("{ cauchy: { a: 0.1, b_um2: -0.02, range: 300..900 nm } }")).toContain("narrow the range");
    expect(hintOf(MIXTURE.replace("30 %", "20 %"))).toContain("share: 30 %");
    expect(hintOf("{ tauclorentz: { } }")).toBe("did you mean tauc_lorentz?");
  });
});
