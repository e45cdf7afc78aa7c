import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  type Problem,
  parseLimit,
  parseMeanSd,
  parseQuantity,
  parseRange,
  parseTolerance,
  Refusal,
} from "../../engine/index.ts";

const problemOf = (act: () => unknown): Problem => {
  try {
    act();
  } catch (error) {
    if (error instanceof Refusal) return error.problems[0];
    throw error;
  }
  return { code: "accepted", message: "" };
};

describe("a quantity", () => {
  it("is read with or without a space before its unit", () => {
    for (const text of ["812sccm", "812 sccm", " 812  sccm ", "0.812slm", "8.12e2 sccm", "+812sccm"]) {
      expect(parseQuantity(text, "flow").value).toBe(812);
    }
    expect(parseQuantity("723.15 K", "temperature")).toEqual({ value: 450, unit: "K" });
    expect(parseQuantity("88", "length", { defaultUnit: "nm" })).toEqual({ value: 88, unit: "nm" });
    expect(parseQuantity("2.06", "number")).toEqual({ value: 2.06, unit: "" });
  });

  it.each([
    ["0,003", "number", "decimal-comma", "0.003"],
    ["84,1 nm", "length", "decimal-comma", "84.1 nm"],
    ["3,000 sccm", "flow", "thousands-comma", "3000 sccm"],
    ["1,234,567.5 sccm", "flow", "thousands-comma", "1234567.5 sccm"],
    ["812", "flow", "missing-unit", "sccm"],
    ["812 scm", "flow", "unknown-unit", "sccm"],
    ["812 furlong", "flow", "unknown-unit", "sccm"],
    ["812 s", "flow", "wrong-unit", "sccm"],
    ["75 nm", "number", "wrong-unit", "plain number"],
    ["nan", "number", "not-a-number", "plain number"],
    [".inf", "number", "not-a-number", "plain number"],
    ["1e400", "number", "not-a-number", "plain number"],
    ["", "flow", "not-a-number", "sccm"],
    ["1 000 sccm", "flow", "not-a-number", "1000 sccm"],
    ["0x1F", "number", "unknown-unit", "plain number"],
    [">= 3000 sccm", "flow", "comparison-sign", "at least 3000 sccm"],
    ["<3 %", "percent", "comparison-sign", "at most 3 %"],
    ["\u00b10.4 nm", "length", "plus-minus", "alone"],
  ] as const)(
    "%j is refused as a %s with code %s and a hint that says what would do",
    (text, dimension, code, hint) => {
      const problem = problemOf(() => parseQuantity(text, dimension));
      expect(problem.code).toBe(code);
      expect(problem.hint).toContain(hint);
    },
  );

  it("of any text is read or refused, never anything else", () => {
    const piece = fc.constantFrom(
      "1",
      "0",
      ",",
      ".",
      "..",
      " ",
      "sccm",
      "nm",
      "within",
      "sd",
      "\u00b1",
      "at most",
      "-",
      "e",
      "%",
    );
    const text = fc.oneof(
      fc.string(),
      fc.array(piece, { maxLength: 8 }).map((pieces) => pieces.join("")),
    );
    fc.assert(
      fc.property(text, (given) => {
        for (const parse of [parseQuantity, parseRange, parseLimit]) problemOf(() => parse(given, null));
        for (const parse of [parseTolerance, parseMeanSd]) problemOf(() => parse(given, "length"));
      }),
    );
  });
});

describe("a range", () => {
  it("takes its unit from the second number, or has one on each", () => {
    expect(parseRange("300..1200 sccm", "flow")).toEqual({ low: 300, high: 1200, unit: "sccm" });
    expect(parseRange("300 sccm .. 1.2 slm", "flow")).toEqual({ low: 300, high: 1200, unit: "slm" });
    expect(parseRange("5..14", null)).toEqual({ low: 5, high: 14, unit: "" });
    expect(parseRange("-5..5 degC", "temperature").low).toBe(-5);
  });
  it.each([
    ["3,000..9,000 sccm", "thousands-comma", "3000..9000 sccm"],
    ["0,5..1,5 sccm", "decimal-comma", "0.5..1.5 sccm"],
    ["300-1200 sccm", "not-a-range", "300..1200 sccm"],
    ["300 sccm", "not-a-range", "300..1200"],
    ["1200..300 sccm", "range-reversed", "300..1200 sccm"],
    ["300..300 sccm", "range-reversed", "300..1200"],
    ["300..1200", "missing-unit", "sccm"],
  ])("%j is refused with code %s", (text, code, hint) => {
    const problem = problemOf(() => parseRange(text, "flow"));
    expect(problem.code).toBe(code);
    expect(problem.hint).toContain(hint);
  });
});

describe("a tolerance", () => {
  it("is read with its unit on both numbers or on one, and with a plus-minus sign", () => {
    for (const text of [
      "88 nm within 2 nm",
      "88 within 2 nm",
      "88 nm within 2",
      "88 nm \u00b1 2 nm",
      "88\u00b12 nm",
      "88 nm +/- 2 nm",
    ]) {
      expect(parseTolerance(text, "length")).toMatchObject({ value: 88, within: 2 });
    }
    expect(parseTolerance("450 degC within 2 K", "temperature")).toEqual({ value: 450, within: 2, unit: "degC" });
    expect(parseTolerance("2.06 within 0.02", "number")).toEqual({ value: 2.06, within: 0.02, unit: "" });
  });
  it.each([
    ["88 nm", "not-a-tolerance"],
    ["88 within 2", "missing-unit"],
    ["88 nm within 0 nm", "zero-tolerance"],
    ["88 nm within -2 nm", "zero-tolerance"],
    ["88 nm within 2 %", "wrong-unit"],
    ["88,5 nm within 2 nm", "decimal-comma"],
    ["88 nm within 2 nm within 3 nm", "not-a-tolerance"],
  ])("%j is refused with code %s", (text, code) => {
    expect(problemOf(() => parseTolerance(text, "length")).code).toBe(code);
  });
});

describe("a mean with a standard deviation", () => {
  it("is read as mean and sd", () => {
    expect(parseMeanSd("0.85 sd 0.05", "number")).toEqual({ mean: 0.85, sd: 0.05, unit: "" });
  });
  it("refuses a plus-minus sign, with the hint to write sd", () => {
    const problem = problemOf(() => parseMeanSd("0.85 \u00b1 0.05", "number"));
    expect(problem.code).toBe("plus-minus");
    expect(problem.hint).toContain("0.85 sd 0.05");
  });
  it.each([
    ["0.85", "not-a-mean-and-sd"],
    ["0.85 within 0.05", "not-a-mean-and-sd"],
    ["0.85 sd 0", "zero-sd"],
    ["0,85 sd 0,05", "decimal-comma"],
    ["75 nm", "wrong-unit"],
  ])("%j is refused with code %s", (text, code) => {
    expect(problemOf(() => parseMeanSd(text, "number")).code).toBe(code);
  });
});

describe("a limit", () => {
  it("is an upper end, a lower end, or both", () => {
    expect(parseLimit("at most 2.5 %", "percent")).toEqual({ low: Number.NEGATIVE_INFINITY, high: 2.5, unit: "%" });
    expect(parseLimit("at least 4 kW", "power")).toEqual({ low: 4000, high: Number.POSITIVE_INFINITY, unit: "kW" });
    expect(parseLimit("5..14", "number")).toEqual({ low: 5, high: 14, unit: "" });
  });
  it.each([
    ["2.5 %", "not-a-limit"],
    ["<= 2.5 %", "comparison-sign"],
    ["at most", "not-a-number"],
    ["at most 2,5 %", "decimal-comma"],
    ["at most 2.5", "missing-unit"],
  ])("%j is refused with code %s", (text, code) => {
    expect(problemOf(() => parseLimit(text, "percent")).code).toBe(code);
  });
});
