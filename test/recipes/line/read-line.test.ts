import { createHash } from "node:crypto";
import { describe, expect, it } from "vitest";
import { goalOf } from "../../../recipes/line/line.ts";
import { waferLight } from "../../../recipes/line/line-wafer.ts";
import { changed, EXAMPLE, lineOf, placesOf, problemsOf } from "./given.ts";

describe("the example line file", () => {
  const line = lineOf();

  it("reads as it is written, in canonical units", () => {
    expect(line.name).toBe("Saltmarsh 2");
    expect(line.timeZone).toBe("Europe/Lisbon");
    expect(line.wafer).toEqual({
      surface: "pyramids",
      facetAngleDeg: 52,
      facetFactor: { mean: 0.85, sd: 0.05 },
      seenFrom: "air",
    });
    expect(line.goal).toEqual({
      index: { value: 2.06, within: 0.02 },
      thicknessNm: { value: 88, within: 2 },
      weightedReflectancePercent: { atMost: 2.5 },
      reflectanceMinimumNm: { value: 600, within: 15 },
    });
    expect(line.light).toEqual({ fromNm: 300, toNm: 1100, weight: "photons" });
    expect(line.gauges.get("ellipsometer")).toEqual({
      name: "ellipsometer",
      on: "polished",
      index: 0.003,
      thicknessNm: 0.4,
      dayToDay: { index: 0.004, thicknessNm: 0.5 },
    });
    expect(line.gauges.get("reflectometer")).toMatchObject({ on: "cell", weightedReflectancePercent: 0.1 });
    expect([...line.settings.keys()]).toEqual(["silane", "ammonia", "time", "power", "pressure", "temperature"]);
    expect(line.settings.get("ammonia")).toEqual({
      name: "ammonia",
      dimension: "flow",
      unit: "sccm",
      low: 3000,
      high: 9000,
      smallest: 10,
      fullScale: 10_000,
      tune: true,
      meaning: "ammonia",
      acts: null,
    });
    expect(line.settings.get("power")).toMatchObject({
      unit: "kW",
      low: 4000,
      high: 12_000,
      smallest: 10,
      tune: false,
    });
  });

  it("holds its window, anchor, recipes and people", () => {
    const open = Number.NEGATIVE_INFINITY;
    expect(line.window).toEqual([
      { text: "ammonia/silane", kind: "ratio", settings: ["ammonia", "silane"], low: 5, high: 14 },
      { text: "silane", kind: "value", settings: ["silane"], low: open, high: 1100 },
      { text: "silane+ammonia", kind: "sum", settings: ["silane", "ammonia"], low: open, high: 9500 },
    ]);
    expect(line.anchor).toEqual([
      { text: "ammonia/silane", kind: "ratio", settings: ["ammonia", "silane"], fraction: 0.06 },
      { text: "time", kind: "value", settings: ["time"], fraction: 0.1 },
    ]);
    expect(goalOf(line, "dark").thicknessNm).toEqual({ value: 80, within: 2 });
    expect(goalOf(line, "dark").index).toEqual({ value: 2.06, within: 0.02 });
    expect(line.people).toEqual({ approve: [], override: [] });
    expect(line.hash).toBe(createHash("sha256").update(EXAMPLE).digest("hex"));
  });

  it("narrows a chamber where it says so, and nowhere else", () => {
    expect([...line.chambers.keys()]).toEqual(["A1", "A2", "B1"]);
    expect(line.chambers.get("B1")?.settings.get("silane")).toMatchObject({ low: 300, high: 1000, smallest: 1 });
    expect(line.chambers.get("A2")?.settings).toEqual(line.settings);
  });

  it("reads the same with CRLF line ends, a byte-order mark, or as bytes", () => {
    const { hash: _, ...plain } = line;
    for (const text of [EXAMPLE.replaceAll("\n", "\r\n"), `\ufeff${EXAMPLE}`]) {
      expect(lineOf(text)).toMatchObject(plain);
    }
    const wrong = changed("seen_from: air", "seen_from:air").replaceAll("\n", "\r\n");
    expect(placesOf(wrong)).toEqual(["missing-space 7:12"]);
    expect(lineOf(new TextEncoder().encode(EXAMPLE) as unknown as string).hash).toBe(line.hash);
  });
});

describe("what may be left out", () => {
  it("has its stated default", () => {
    const line = lineOf(
      EXAMPLE.replace(/^light:.*\n/m, "")
        .replace(/^window:\n(?: .*\n)+/m, "")
        .replace(/^anchor:.*\n(?: .*\n)+/m, "")
        .replace(/^recipes:.*\n/m, "")
        .replace(/^people:.*\n/m, "")
        .replace(/^window:.*\n(?: .*\n)+/m, "")
        .replace(/^ {2}(facet_angle|seen_from).*\n/gm, ""),
    );
    expect(line.light).toEqual({ fromNm: 300, toNm: 1100, weight: "photons" });
    expect(line.wafer).toMatchObject({ facetAngleDeg: 54.74, seenFrom: "air" });
    expect(line.window).toEqual([]);
    expect(line.anchor).toEqual([]);
    expect(line.recipes.size).toBe(0);
  });

  it("is the facet of a polished wafer, whose factor is then 1", () => {
    const polished = EXAMPLE.replace("pyramids  ", "polished").replace(/^ {2}facet_.*\n/gm, "");
    expect(lineOf(polished).wafer.facetFactor).toEqual({ mean: 1, sd: 0 });
    expect(placesOf(changed("surface: pyramids", "surface: polished"))).toEqual([
      "pyramids-only 5:3",
      "pyramids-only 6:3",
    ]);
  });

  it("is not the facet factor of pyramids, the zone, a goal, a gauge, a setting or a chamber", () => {
    expect(placesOf(EXAMPLE.replace(/^ {2}facet_factor.*\n/m, ""))).toEqual(["missing-key 3:1"]);
    expect(placesOf(EXAMPLE.replace(/^time_zone.*\n/m, ""))).toEqual(["missing-key 1:1"]);
    expect(placesOf(EXAMPLE.replace(/^goal:.*\n(?: .*\n)+/m, "goal: {}\n"))).toEqual(["no-goal 8:7"]);
    expect(placesOf("line: x\n").filter((place) => place.startsWith("missing-key"))).toHaveLength(6);
  });
});

describe("an efficiency table as weight", () => {
  const named = changed("weight: photons", "weight: cell.csv");
  const table = "wavelength_nm,efficiency\n280,0.1\n700,0.95\n1200,0.05\n";

  it("is read through the door by the name written", () => {
    const asked: string[] = [];
    const readFile = (name: string) => {
      asked.push(name);
      return table;
    };
    const { weight } = lineOf(named, { readFile }).light;
    expect(weight).toEqual({ file: "cell.csv", wavelengthNm: [280, 700, 1200], efficiency: [0.1, 0.95, 0.05] });
    expect(asked).toEqual(["cell.csv"]);
  });

  it("is refused by its own row and column, or at the row that names it", () => {
    const bad = problemsOf(() => lineOf(named, { readFile: () => table.replace("0.95", "95") }));
    expect(bad).toMatchObject([{ code: "out-of-bounds", file: "cell.csv", row: 3, column: 5 }]);
    expect(placesOf(named)).toEqual(["no-file 13:45"]);
    expect(placesOf(named, { readFile: () => table.replace("1200", "1000") })).toEqual(["table-too-short 13:45"]);
    expect(placesOf(changed("weight: photons", "weight: ../cell.csv"))).toEqual(["bad-file-name 13:45"]);
    expect(placesOf(changed("weight: photons", "weight: photon"))).toEqual(["wrong-value 13:45"]);
  });
});

describe("what the numbers imply", () => {
  it("begins with the film on a facet", () => {
    // 0.85 x 88 = 74.8; 1.96 x 0.05 x 88 = 8.6
    expect(lineOf().implications[0]).toContain(
      "88 nm on a polished witness is 74.8 nm on a facet (95 % between 66.2 and 83.4 nm",
    );
  });

  it("names a goal that never binds and the minimum that the facet factor alone spans", () => {
    const said = lineOf(EXAMPLE, { light: waferLight }).implications.join("\n");
    expect(said).toMatch(
      /facet factor alone spans a reflectance minimum of \d+ to \d+ nm, against a goal of 600 nm within 15 nm/,
    );
    expect(said).toMatch(/weighted reflectance at most 2.5 % never binds/);
    const [, low, high] = /minimum of (\d+) to (\d+) nm/.exec(said)?.map(Number) ?? [];
    // 7.6 to 7.8 nm of minimum per nm of film (computed by an independent program for index 2.09 in air) over 17.25 nm of film: 131 to 135 nm;
    // 10 nm of slack for the other index and for pyramids
    expect(high - low).toBeGreaterThan(121);
    expect(high - low).toBeLessThan(145);
  });

  it("says when a light goal cannot be met by the film goals", () => {
    const tight = changed("at most 2.5 %", "at most 1 %");
    expect(lineOf(tight, { light: waferLight }).implications.join("\n")).toContain("is missed by every film");
    const far = changed("600 nm within 15 nm", "700 nm within 15 nm");
    expect(lineOf(far, { light: waferLight }).implications.join("\n")).toContain("cannot be met by a film");
  });

  it("says when a usable floor, a gauge, an idle limit or a missing anchor matters", () => {
    const said = (text: string) => lineOf(text).implications.join("\n");
    expect(said(changed("full_scale: 2000 sccm", "full_scale: 20 slm"))).toContain("400 sccm is taken");
    expect(said(changed("2.06 within 0.02", "2.06 within 0.004"))).toContain("single readings cannot judge it");
    expect(said(changed("silane: at most 1100 sccm", "silane: at most 1300 sccm"))).toContain("never binds");
    expect(said(changed("  time: 10 %\n", ""))).toContain("No anchor holds time");
    expect(said(EXAMPLE.replaceAll("tune: true", "tune: false"))).toContain("nothing can be proposed");
    expect(said(changed(", weighted_reflectance: 0.1 %", ""))).toContain("No gauge reads weighted_reflectance");
  });
});
