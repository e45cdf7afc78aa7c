import { describe, expect, test } from "vitest";
import { colourWavelengthNm, colourWords, screenColour, seenColour, tristimulus } from "../../../engine/index.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("colour of a reflectance", () => {
  test("white is #ffffff, black is #000000, half the light is a neutral grey", () => {
    const flat = (r: number) => seenColour(new Float64Array(81).fill(r));
    expect(flat(1)).toMatchObject({ hex: "#ffffff", clipped: false, words: "white" });
    expect(flat(0)).toMatchObject({ hex: "#000000", clipped: false, words: "black" });
    // sRGB (IEC 61966-2-1): 0.5 linear is 187.5 of 255.
    expect(["#bbbbbb", "#bcbcbc"]).toContain(flat(0.5).hex);
  });

  test("a reflector of one end of the spectrum is blue or red, and marked as clipped when the screen cannot show it", () => {
    const blue = seenColour(colourWavelengthNm.map((wavelengthNm) => (wavelengthNm < 490 ? 1 : 0)));
    expect(blue.words).toMatch(/blue|purple/);
    expect(blue.clipped).toBe(true);
    const red = seenColour(colourWavelengthNm.map((wavelengthNm) => (wavelengthNm > 620 ? 1 : 0)));
    expect(red.words).toMatch(/red|orange/);
    const line = seenColour(colourWavelengthNm.map((wavelengthNm) => (wavelengthNm === 520 ? 1 : 0)));
    expect(line.clipped).toBe(true);
    expect(line.hex).toMatch(/^#[0-9a-f]{6}$/);
  });

  test("refuses a spectrum on another grid", () => {
    expect(refusalCode(() => tristimulus(new Float64Array(80)))).toBe("length-mismatch");
  });
});

describe("colour words", () => {
  test.each([
    // sRGB primaries and common swatches in CIELAB D65, from memory of published conversion tables.
    [[53.2, 80.1, 67.2], "red"],
    [[32.3, 79.2, -107.9], "deep purple"],
    [[87.7, -86.2, 83.2], "light green"],
    [[97.1, -21.6, 94.5], "light yellow"],
    [[25, 18, -50], "deep blue"],
    [[62, -8, -30], "light blue"],
    [[40, 25, 40], "brown"],
    [[55, 1, 3], "grey"],
    [[20, 1, 1], "dark grey"],
  ] as const)("%j is %s", (lab, words) => {
    expect(colourWords(lab)).toBe(words);
  });

  test("a colour at the edge of the screen is not called clipped for rounding", () => {
    expect(screenColour([100, 0, 0])).toEqual({ hex: "#ffffff", clipped: false });
  });
});
