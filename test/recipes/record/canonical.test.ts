/** One value, one text: order of keys, spelling of numbers and composition of letters do not matter; nothing odd passes. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { canonicalJson, sha256 } from "../../../recipes/record/canonical.ts";

describe("canonical JSON", () => {
  it("sorts keys at every depth and writes no white space", () => {
    expect(canonicalJson({ b: 1, a: { d: [1, { z: null, y: true }], c: "x" } })).toBe(
      '{"a":{"c":"x","d":[1,{"y":true,"z":null}]},"b":1}',
    );
  });

  it("reads back equal, whatever the value, and is the same for any order of keys", () => {
    fc.assert(
      fc.property(fc.jsonValue({ maxDepth: 5 }), (value) => {
        // refused, and tested below
        fc.pre(!/"(__proto__|constructor|prototype)":/.test(JSON.stringify(value)));
        const text = canonicalJson(value);
        const again: unknown = JSON.parse(text);
        // -0 is written 0 by JSON, and text is stored in normal form C
        expect(canonicalJson(again)).toBe(text);
        const reversed: unknown = JSON.parse(JSON.stringify(value), (_, one: unknown) =>
          typeof one === "object" && one !== null && !Array.isArray(one)
            ? Object.fromEntries(Object.entries(one).reverse())
            : one,
        );
        expect(canonicalJson(reversed)).toBe(text);
      }),
      { numRuns: 300 },
    );
  });

  it("writes composed and decomposed letters the same", () => {
    expect(canonicalJson("Jose\u0301")).toBe(canonicalJson("Jos\u00e9"));
  });

  it("holds no byte that could act on a terminal", () => {
    const text = canonicalJson("\u001b]0;x\u0007 \u009b31m \u202e \u2066 \u200b \u2028 \u007f \ufeff");
    expect(text).toMatch(/^[\u0020-\u007e]+$/);
    expect(JSON.parse(text)).toBe("\u001b]0;x\u0007 \u009b31m \u202e \u2066 \u200b \u2028 \u007f \ufeff");
  });

  it.each([
    ["NaN", { a: Number.NaN }, "not-a-number"],
    ["infinity", [Number.NEGATIVE_INFINITY], "not-a-number"],
    ["a function", { a: () => 1 }, "not-json"],
    ["undefined in a list", [undefined], "not-json"],
    ["a big integer", 10n, "not-json"],
    ["a date", { a: new Date(0) }, "not-json"],
    ["a map", new Map(), "not-json"],
    ["__proto__", JSON.parse('{"__proto__":1}'), "forbidden-key"],
    ["constructor", { a: { constructor: 1 } }, "forbidden-key"],
    ["two spellings of one key", { "e\u0301": 1, "\u00e9": 2 }, "not-json"],
    ["depth without end", JSON.parse("[".repeat(30) + "]".repeat(30)), "too-deep"],
  ])("refuses %s", (_, value, code) => {
    expect(() => canonicalJson(value)).toThrow(expect.objectContaining({ code }));
  });

  it("leaves out what is undefined and writes -0 as 0", () => {
    expect(canonicalJson({ a: undefined, b: -0 })).toBe('{"b":0}');
  });

  it("hashes as SHA-256 does: the example of FIPS 180-4, 'abc'", () => {
    expect(sha256("abc")).toBe("ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  });
});
