import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { decimalsOf, fromCanonical, fromCanonicalStep } from "../../../engine/index.ts";
import type { Setting } from "../../../recipes/line/line.ts";
import {
  asQuantities,
  asQuantity,
  fromQuantity,
  parseSet,
  parseStepSet,
  shown,
  snap,
  snapInside,
  typeable,
} from "../../../recipes/line/settings.ts";
import { changed, lineOf, problemsOf } from "./given.ts";

const chambers = lineOf().chambers;
const [a2, b1] = ["A2", "B1"].map((name) => chambers.get(name)!);
const power = a2.settings.get("power")!;
const silane = a2.settings.get("silane")!;

describe("settings as given", () => {
  it("become canonical numbers from words, texts and quantities", () => {
    const expected = new Map([
      ["silane", 812],
      ["ammonia", 6900],
      ["power", 8010],
    ]);
    expect(parseSet(["silane=812sccm", "ammonia = 6.9 slm", "power=8.01 kW"], a2)).toEqual(expected);
    expect(parseSet({ silane: "812 sccm", ammonia: { value: 6.9, unit: "slm" }, power: "8.01kW" }, a2)).toEqual(
      expected,
    );
  });

  it("are refused with every problem in one pass", () => {
    const words = [
      "silan=812sccm",
      "ammonia=6900",
      "time=560 sccm",
      "power",
      "silane=1100sccm",
      "pressure=213Pa",
      "pressure=214Pa",
    ];
    const problems = problemsOf(() => parseSet(words, b1));
    expect(problems.map(({ code }) => code)).toEqual([
      "unknown-setting",
      "missing-unit",
      "wrong-unit",
      "not-a-set",
      "outside-range",
      "set-twice",
    ]);
    expect(problems[0].hint).toBe("did you mean silane?");
    expect(problems[4].message).toBe("silane 1100 sccm lies outside 300 sccm to 1000 sccm, the range of B1");
    expect(problemsOf(() => parseSet({ silane: 812 }, a2))).toMatchObject([{ code: "missing-unit" }]);
  });

  it("may lie outside the range when what was run is recorded, and then only", () => {
    expect(parseSet(["silane=1100sccm"], b1, { allowOutside: true }).get("silane")).toBe(1100);
    expect(parseSet(["silane=1000sccm"], b1).get("silane")).toBe(1000);
  });

  it("of several steps are sorted by the name before the point", () => {
    const expected = new Map([
      ["dense", new Map([["silane", 900]])],
      ["", new Map([["power", 8010]])],
    ]);
    expect(parseStepSet(["dense.silane=0.9slm", "power=8.01kW"], a2)).toEqual(expected);
    expect(parseStepSet({ "dense.silane": "900 sccm", power: "8.01 kW" }, a2)).toEqual(expected);
    const problems = problemsOf(() => parseStepSet(["dense.silan=900sccm", "cap.time=1"], a2));
    expect(problems.map(({ code }) => code)).toEqual(["unknown-setting", "missing-unit"]);
  });

  it("of any text are read or refused", () => {
    fc.assert(fc.property(fc.array(fc.string()), (words) => void problemsOf(() => parseSet(words, a2))));
    fc.assert(
      fc.property(fc.dictionary(fc.string(), fc.string()), (record) => void problemsOf(() => parseSet(record, a2))),
    );
  });
});

describe("values that can be typed in", () => {
  it("are multiples of the smallest step from zero, not from the low end", () => {
    const odd: Setting = { ...silane, low: 303, high: 1197, smallest: 10 };
    expect(snap(303, odd)).toBe(300);
    expect(typeable(odd)).toEqual({ first: 310, last: 1190 });
    expect(snapInside(303, odd)).toBe(310);
    expect(snapInside(5000, odd)).toBe(1190);
    expect(problemsOf(() => snapInside(5, { ...odd, low: 301, high: 309 }))).toMatchObject([
      { code: "no-step-in-range" },
    ]);
  });

  it("lie on the grid of the unit they are typed in", () => {
    const kelvin = lineOf(changed("420..480 degC, smallest: 1 degC", "694..753 K, smallest: 1 K")).settings.get(
      "temperature",
    )!;
    expect(fromCanonical(snap(450, kelvin), "K")).toBe(723);
    expect(shown(kelvin, snap(450, kelvin))).toBe("723 K");
  });

  it("are free of dust: written in the declared unit they have no more decimals than the step", () => {
    const steps = fc.constantFrom(
      { ...power, smallest: 10 },
      { ...power, smallest: 5 },
      { ...silane, smallest: 0.1 },
      { ...silane, smallest: 0.25 },
      { ...a2.settings.get("pressure")!, unit: "Torr", smallest: 1.33322368421053, low: 100, high: 300 },
    );
    fc.assert(
      fc.property(steps, fc.double({ min: 1, max: 20_000, noNaN: true }), (setting, value) => {
        const snapped = snap(value, setting);
        expect(Math.abs(snapped - value)).toBeLessThanOrEqual(setting.smallest * 0.5001);
        expect(snap(snapped, setting)).toBe(snapped);
        const decimals = String(asQuantity(setting, snapped).value).split(".")[1]?.length ?? 0;
        expect(decimals).toBeLessThanOrEqual(decimalsOf(fromCanonicalStep(setting.smallest, setting.unit)));
      }),
    );
  });
});

describe("quantities", () => {
  it("are in the declared unit and come back as they were", () => {
    expect(asQuantity(power, 8010)).toEqual({ value: 8.01, unit: "kW" });
    expect(fromQuantity(power, { value: 8.01, unit: "kW" })).toBe(8010);
    expect(fromQuantity(power, { value: 8010, unit: "W" })).toBe(8010);
    expect(
      asQuantities(
        new Map([
          ["power", 8010],
          ["silane", 780],
        ]),
        a2,
      ),
    ).toEqual({
      silane: { value: 780, unit: "sccm" },
      power: { value: 8.01, unit: "kW" },
    });
  });

  it("keep a value that is off the grid, for a read-back is what the tool showed", () => {
    expect(asQuantity(power, 8012.5).value).toBe(8.0125);
    expect(shown(power, 8012.5)).toBe("8.0125 kW");
    expect(shown(power, 8000)).toBe("8.00 kW");
  });

  it("of another dimension are refused", () => {
    expect(problemsOf(() => fromQuantity(power, { value: 8, unit: "sccm" }))).toMatchObject([{ code: "wrong-unit" }]);
    expect(problemsOf(() => fromQuantity(power, { value: 8, unit: "hp" }))).toMatchObject([{ code: "unknown-unit" }]);
  });
});
