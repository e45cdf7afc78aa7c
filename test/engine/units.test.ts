import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  canonicalUnit,
  dimensionOf,
  formatQuantity,
  fromCanonical,
  fromCanonicalStep,
  nearestWord,
  Refusal,
  roundToStep,
  shownValue,
  toCanonical,
  toCanonicalStep,
  unitSpelling,
  unitsOf,
} from "../../engine/index.ts";

const DIMENSIONS = [
  "flow",
  "time",
  "power",
  "pressure",
  "temperature",
  "speed",
  "length",
  "percent",
  "angle",
  "number",
] as const;
const UNITS = DIMENSIONS.flatMap((dimension) => unitsOf(dimension));

const codeOf = (act: () => unknown): string => {
  try {
    act();
  } catch (error) {
    if (error instanceof Refusal) return error.code;
    throw error;
  }
  return "accepted";
};

describe("units", () => {
  it("convert by their definitions", () => {
    // SI Brochure, 9th ed. (2019): minute, prefixes, degC = K - 273.15; NIST SP 811 (2008) appendix B: torr =
    // 101325/760 Pa, bar = 1e5 Pa, angstrom = 1e-10 m
    expect(toCanonical(10, "slm")).toBe(10_000);
    expect(toCanonical(1.5, "min")).toBe(90);
    expect(toCanonical(250, "ms")).toBe(0.25);
    expect(toCanonical(8.01, "kW")).toBe(8010);
    // 1.005 * 1000 is 1004.9999999999999 in doubles
    expect(toCanonical(1.005, "slm")).toBe(1005);
    expect(toCanonical(2.13, "mbar")).toBe(213);
    // 12 digits: conversions keep 13
    expect(toCanonical(760, "Torr")).toBeCloseTo(101_325, 6);
    expect(toCanonical(1000, "mTorr")).toBeCloseTo(133.322368421, 8);
    expect(toCanonical(723.15, "K")).toBe(450);
    expect(toCanonical(1.2, "m/min")).toBe(20);
    expect(toCanonical(120, "cm/min")).toBe(20);
    expect(toCanonical(0.088, "um")).toBe(88);
    expect(toCanonical(880, "angstrom")).toBe(88);
  });

  it("take a step in kelvin as a step in degrees, without the offset of the scale", () => {
    expect(toCanonicalStep(1, "K")).toBe(1);
    expect(fromCanonicalStep(1, "K")).toBe(1);
    expect(toCanonical(1, "K")).toBe(-272.15);
  });

  it("come back from the canonical unit as they went in", () => {
    // 1e-12 relative: conversions keep 13 significant digits; a temperature loses some to its offset, hence the absolute part
    const value = fc.double({ min: -1e6, max: 1e6, noNaN: true });
    fc.assert(
      fc.property(value, fc.constantFrom(...UNITS), (number, unit) => {
        const there = toCanonical(number, unit);
        expect(Math.abs(fromCanonical(there, unit) - number)).toBeLessThanOrEqual(1e-12 * Math.abs(number) + 1e-9);
      }),
    );
  });

  it("are shown without floating-point dust", () => {
    expect(fromCanonical(8010, "kW")).toBe(8.01);
    expect(formatQuantity(8010, "kW", 10)).toBe("8.01 kW");
    expect(formatQuantity(8000, "kW", 10)).toBe("8.00 kW");
    expect(formatQuantity(812.4, "sccm", 1)).toBe("812 sccm");
    expect(formatQuantity(2.0612345, "")).toBe("2.06123");
    expect(formatQuantity(toCanonical(1.6, "Torr"), "Torr")).toBe("1.6 Torr");
    expect(formatQuantity(-0.2, "degC", 1)).toBe("0 degC");
    expect(shownValue(0.1 + 0.2, "s")).toBe(0.3);
  });

  it("round to multiples of the step, whatever the step", () => {
    fc.assert(
      fc.property(
        fc.constantFrom(0.01, 0.02, 0.05, 0.1, 0.25, 0.5, 1, 5, 10),
        fc.integer({ min: -9999, max: 9999 }),
        (step, n) => {
          const exact = roundToStep(n * step, step);
          expect(roundToStep(exact + 0.3 * step, step)).toBe(exact);
          // a decimal number, not one beside it: its shortest spelling has no more decimals than the step
          expect(String(exact).split(".")[1]?.length ?? 0).toBeLessThanOrEqual(String(step).split(".")[1]?.length ?? 0);
        },
      ),
    );
    expect(codeOf(() => roundToStep(1, 0))).toBe("zero-step");
  });

  it("are known under both micro signs, both angstrom signs and the degree sign", () => {
    for (const text of ["um", "\u00b5m", "\u03bcm"]) expect(unitSpelling(text)).toBe("um");
    for (const text of ["angstrom", "\u00c5", "\u212b", "A\u030a"]) expect(unitSpelling(text)).toBe("angstrom");
    expect(unitSpelling("\u00b0C")).toBe("degC");
    expect(toCanonical(1, "\u00b5m")).toBe(1000);
  });

  it("belong to the dimension whose canonical unit they convert to", () => {
    for (const dimension of DIMENSIONS) {
      for (const unit of unitsOf(dimension)) expect(dimensionOf(unit)).toBe(dimension);
    }
    expect(DIMENSIONS.map(canonicalUnit)).toEqual(["sccm", "s", "W", "Pa", "degC", "mm/s", "nm", "%", "deg", ""]);
  });

  it("that are not known, and numbers that are not finite, are refused", () => {
    expect(codeOf(() => toCanonical(1, "scm"))).toBe("unknown-unit");
    expect(codeOf(() => dimensionOf("furlong"))).toBe("unknown-unit");
    expect(codeOf(() => toCanonical(Number.NaN, "s"))).toBe("not-a-number");
    expect(codeOf(() => toCanonical(1e308, "um"))).toBe("not-a-number");
  });
});

describe("the nearest word", () => {
  const known = ["silane", "ammonia", "time", "power", "pressure", "temperature"];
  it("is found across a slip, a swap and capitals", () => {
    expect(nearestWord("silan", known)).toBe("silane");
    expect(nearestWord("presure", known)).toBe("pressure");
    expect(nearestWord("tmie", known)).toBe("time");
    expect(nearestWord("Ammonia", known)).toBe("ammonia");
  });
  it("is not offered for something else", () => {
    expect(nearestWord("argon", known)).toBeNull();
    expect(nearestWord("x".repeat(100), known)).toBeNull();
  });
});
