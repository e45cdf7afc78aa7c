import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { blankLine, DEMO_LINE } from "../../../recipes/line/template.ts";
import { outside } from "../../../recipes/line/window.ts";
import { lineOf } from "./given.ts";

/** Defaults of the virtual tube-like chamber the demo's runs come from; witness 73 nm after 560 s of which 4 s to ignite. */
const TUBE = new Map(
  Object.entries({ silane: 780, ammonia: 7020, power: 8000, pressure: 213, temperature: 450, time: 675 }),
);

describe("the line files that `new` writes", () => {
  it("read without a problem, under any name", () => {
    fc.assert(
      fc.property(fc.string({ minLength: 1, maxLength: 40 }), (text) => {
        const name =
          text
            .replace(/\p{Cc}|\p{Zl}|\p{Zp}/gu, "")
            .trim()
            .normalize("NFC") || "my line";
        expect(lineOf(blankLine(name, "Europe/Lisbon")).name).toBe(name);
      }),
      { numRuns: 25 },
    );
    expect(lineOf(DEMO_LINE).name).toBe("Saltmarsh 2");
  });

  it("begin with one chamber, and with three in the demo", () => {
    expect([...lineOf(blankLine("x", "UTC")).chambers.keys()]).toEqual(["A1"]);
    expect([...lineOf(DEMO_LINE).chambers.keys()]).toEqual(["A1", "A2", "B1"]);
  });

  it("hold the virtual chamber's recipe inside the window of every chamber", () => {
    for (const text of [DEMO_LINE, blankLine("x", "UTC")]) {
      const line = lineOf(text);
      for (const chamber of line.chambers.values()) expect(outside(TUBE, chamber, line)).toEqual([]);
    }
  });

  it("show a commented key for everything a line may declare", () => {
    const text = blankLine("x", "UTC");
    for (const key of [
      "facet_angle",
      "weighted_reflectance",
      "reflectance_minimum",
      "day_to_day",
      "full_scale",
      "belt_speed",
      "power_is",
      "acts_as",
      "acts:",
      "recipes",
      "people",
    ]) {
      expect(text).toContain(key);
    }
  });
});
