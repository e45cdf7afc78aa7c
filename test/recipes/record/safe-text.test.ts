/** Nothing that people or files wrote can act on a terminal, and nothing disappears silently. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { safeLines, safeText } from "../../../recipes/record/safe-text.ts";

/** Terminal controls as ECMA-48 has them (C0, C1, DEL), and Unicode's controls of direction (UAX #9). */
const ACTS = /[\u0000-\u001f\u007f-\u009f\u200e\u200f\u061c\u202a-\u202e\u2066-\u2069\u2028\u2029\u200b\ufeff]/;

describe("safe text", () => {
  it("leaves plain text, accents and units alone", () => {
    const text = "Jos\u00e9: 84.1 nm, \u00b12 \u00b5m, \u4e2d\u6587, \ud83d\udfe6";
    expect(safeText(text)).toBe(text);
  });

  it.each([
    ["a colour", "\u001b[31mred", "\\x1b[31mred"],
    ["a title", "\u001b]0;x\u0007", "\\x1b]0;x\\x07"],
    ["a control of eight bits", "\u009b2J", "\\x9b2J"],
    ["a carriage return", "ok\rfault", "ok\\x0dfault"],
    ["a newline in a name", "A\nB", "A\\x0aB"],
    ["an override of direction", "a\u202eb", "a\\u202eb"],
    ["an isolate", "\u2066", "\\u2066"],
    ["a zero-width space", "A\u200b2", "A\\u200b2"],
    ["a line separator", "\u2028", "\\u2028"],
    ["a hidden tag", "x\u{e0041}", "x\\u{e0041}"],
    ["half a surrogate pair", "\ud83d!", "\\ud83d!"],
  ])("shows %s as a visible escape", (_, text, shown) => {
    expect(safeText(text)).toBe(shown);
  });

  it("whatever the text, nothing that acts is left, and cleaning twice changes nothing", () => {
    fc.assert(
      fc.property(fc.string({ unit: "binary" }), (text) => {
        const safe = safeText(text);
        expect(safe).not.toMatch(ACTS);
        expect(safeText(safe)).toBe(safe);
      }),
    );
  });

  it("keeps line ends where several lines are wanted, and only these", () => {
    expect(safeLines("a\r\nb\u001bc\rd")).toBe("a\nb\\x1bc\\x0dd");
  });
});
