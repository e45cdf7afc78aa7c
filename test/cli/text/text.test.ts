import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { due, goalInBrief, sentenceInBrief } from "../../../cli/text/line-words.ts";
import { chanceText, chanceWord, fixed, settingText, signed, withHalf } from "../../../cli/text/numbers.ts";
import { overviewText } from "../../../cli/text/overview.ts";
import { painted, rowCells, rowText, toWidth, words } from "../../../cli/text/rows.ts";
import { asciiText, safeText } from "../../../cli/text/safe-text.ts";
import { cells, cut, left, right, take, wrap } from "../../../cli/text/width.ts";
import { FakeDesk, fakeSettings } from "../../support/fake-desk.ts";

describe("safe text", () => {
  test.each([
    ["escape sequences are seen, not obeyed", "a\u001b[31mb\u009b1m", "a\\x1b[31mb\\x9b1m"],
    ["newlines and tabs become blanks", "a\r\nb\tc", "a b c"],
    ["direction overrides and zero-width signs are seen", "a\u202eb\u200bc\u2066d", "a\\u202eb\\u200bc\\u2066d"],
    ["half a surrogate pair is named", "a\ud800b", "a\\ud800b"],
    ["everything else stays", "Zürich 84 nm ±2 漢", "Zürich 84 nm ±2 漢"],
  ])("%s", (_title, text, safe) => {
    expect(safeText(text)).toBe(safe);
  });

  test("never lets a control character through, whatever comes", () => {
    fc.assert(
      fc.property(
        fc.string({ unit: "binary" }),
        (text) => !/[\u0000-\u001f\u007f-\u009f\u202a-\u202e]/.test(safeText(text)),
      ),
      { seed: 5, numRuns: 500 },
    );
  });

  test("spells known signs out in ASCII, drops accents, and leaves nothing above 0x7e", () => {
    expect(asciiText("88 ±2 nm, µ, é → m²")).toBe("88 +/-2 nm, u, e -> m2");
    fc.assert(
      fc.property(fc.string({ unit: "grapheme" }), (text) => /^[ -~]*$/.test(asciiText(text))),
      { seed: 5, numRuns: 500 },
    );
  });
});

describe("width", () => {
  // East Asian Width (UAX #11): ideographs are wide, combining marks take no cell of their own.
  test.each([
    ["A2", 2],
    ["漢字", 4],
    ["e\u0301", 1],
    ["±²µ", 3],
    ["⣿│░", 3],
    ["😀", 2],
  ])("%s takes %i cells", (text, width) => {
    expect(cells(text)).toBe(width);
  });

  test("cutting never exceeds the width, and padding reaches it exactly", () => {
    fc.assert(
      fc.property(fc.string({ unit: "grapheme" }), fc.integer({ min: 0, max: 30 }), (raw, width) => {
        const text = safeText(raw);
        expect(cells(take(text, width))).toBeLessThanOrEqual(width);
        expect(cells(cut(text, width))).toBeLessThanOrEqual(width);
        expect(cells(left(text, width))).toBe(width);
        expect(cells(right(text, width))).toBe(width);
      }),
      { seed: 11, numRuns: 500 },
    );
  });

  test("a wide character is not split: the cell it would need half of stays blank", () => {
    expect(left("漢字漢字", 4)).toBe("漢… ");
  });

  test("wrapping keeps every word and no line is too wide", () => {
    const text = "thickness has been 3.6 nm low on all four runs since the clean";
    const lines = wrap(text, 20);
    expect(lines.join(" ")).toBe(text);
    for (const line of lines) expect(cells(line)).toBeLessThanOrEqual(20);
    expect(wrap("abcdefghij", 4)).toEqual(["abcd", "efgh", "ij"]);
    expect(wrap("silane    835 sccm", 20)).toEqual(["silane    835 sccm"]);
  });
});

describe("words for the line", () => {
  test("the goal in brief names every goal there is, and only those", () => {
    expect(goalInBrief(new FakeDesk().overview().goal)).toBe(
      "index 2.06 ±0.02, 88 ±2 nm, R at most 2.5 %, minimum 600 ±15 nm",
    );
    expect(goalInBrief({ thicknessNm: { value: 80, within: 2 } })).toBe("80 ±2 nm");
  });

  test("a sentence loses its advice first, then whole clauses, never part of one", () => {
    const sentence = "4 runs since clean, thickness 2.3 nm low, 19 % in goal: ask for a proposal";
    expect(sentenceInBrief(sentence, 80)).toBe(sentence);
    expect(sentenceInBrief(sentence, 60)).toBe("4 runs since clean, thickness 2.3 nm low, 19 % in goal");
    expect(sentenceInBrief(sentence, 45)).toBe("4 runs since clean, thickness 2.3 nm low");
  });

  test("each need has a word of its own that begins in capitals, so that it reads without colour", () => {
    const row = new FakeDesk().overview().chambers[0];
    const needs = ["fault", "propose", "measure", "enter", "close", "keep", "no data"] as const;
    const texts = needs.map((attention) => due({ ...row, attention }).text);
    expect(new Set(texts).size).toBe(needs.length);
    for (const text of texts) expect(text).toMatch(/^[A-Z ]+: [a-z]/);
  });
});

describe("rows", () => {
  const plain = { colour: "none", ascii: false } as const;
  test("are cut and padded to exactly the width, tones kept", () => {
    const row = [{ text: "abc", tone: "strong" as const }, { text: "defgh" }];
    expect(rowText(toWidth(row, 6))).toBe("abcde…");
    expect(rowText(toWidth(row, 10))).toBe("abcdefgh  ");
    expect(toWidth(row, 6)[0].tone).toBe("strong");
    expect(rowCells(toWidth([words("漢字", plain)], 3))).toBe(3);
  });

  test("painted in ASCII hold nothing above 0x7e, even what was not spelled out before", () => {
    expect(painted([{ text: "a…b漢" }], { colour: "none", ascii: true })).toBe("a~b?");
  });
});

describe("numbers", () => {
  test("show a dash for what is not there and no minus before zero", () => {
    expect([
      fixed(null, 1),
      fixed(Number.NaN, 1),
      fixed(-0.0001, 2),
      signed(0.04, 1),
      signed(1.25, 1),
      signed(-2, 0),
    ]).toEqual(["-", "-", "0.00", "0.0", "+1.3", "-2"]);
  });

  test("show the larger half of a leaning interval", () => {
    expect(withHalf({ mean: 88, low: 86, high: 89 }, 1)).toBe("88.0 ±2.0");
  });

  test("show chances as whole percents with a word, the ends as bounds", () => {
    expect([0, 0.005, 0.31, 0.93, 0.999, null].map(chanceText)).toEqual(["<1 %", "<1 %", "31 %", "93 %", ">99 %", "-"]);
    expect([0.02, 0.31, 0.5, 0.8, 0.95, null].map(chanceWord)).toEqual([
      "very unlikely",
      "unlikely",
      "even odds",
      "likely",
      "very likely",
      "not known",
    ]);
  });

  test("show settings in the declared unit with the decimals of the smallest step", () => {
    const power = fakeSettings.find((setting) => setting.name === "power");
    const silane = fakeSettings.find((setting) => setting.name === "silane");
    expect(power && settingText(power, 8010)).toBe("8.01");
    expect(silane && settingText(silane, 812)).toBe("812");
  });
});

describe("the plain overview", () => {
  const overview = new FakeDesk().overview();
  test("names every chamber, what it needs, its chance and its trends in words", () => {
    const text = overviewText(overview, { colour: false, ascii: false, width: 80 });
    expect(text).toContain("A2 blue  OFF: ask for a proposal");
    expect(text).toContain("in goal 11 % (unlikely)");
    expect(text).toMatch(/thickness last read 83\.6 nm, 4\.4 nm low; \d+ of 14 runs outside the goal\./);
    expect(text.indexOf("A2 blue")).toBeLessThan(text.indexOf("A1 blue"));
    expect(text.endsWith("\n")).toBe(true);
  });

  test("says what was last read by the goal of the chamber's own recipe, and names that goal where it is another", () => {
    const [first] = overview.chambers;
    const own = { ...first, recipe: "thick", goal: { thicknessNm: { value: 84, within: 2 } }, cleaned: false };
    const text = overviewText({ ...overview, chambers: [own] }, { colour: false, ascii: false, width: 80 });
    expect(text).toContain("goal of thick: 84 ±2 nm");
    expect(text).toMatch(/thickness last read 83\.6 nm, in goal;/);
    expect(text).not.toContain("since clean:");
    expect(text).not.toMatch(/deposition/);
  });

  test("has no escape without colour, and only ASCII where asked", () => {
    const text = overviewText(overview, { colour: false, ascii: true, width: 60 });
    expect(text).toMatch(/^[\n -~]*$/);
    expect(overviewText(overview, { colour: true, ascii: false, width: 80 })).toContain("\u001b[");
  });

  test("keeps to the width", () => {
    for (const line of overviewText(overview, { colour: false, ascii: false, width: 50 }).split("\n"))
      expect(cells(line)).toBeLessThanOrEqual(50);
  });
});
