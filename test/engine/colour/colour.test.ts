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
    [[32.3, 79.2, -107.9], "deep blue"],
    [[87.7, -86.2, 83.2], "light green"],
    [[97.1, -21.6, 94.5], "light yellow"],
    [[25, 18, -50], "deep blue"],
    [[62, -8, -30], "light blue"],
    [[40, 25, 40], "brown"],
    [[55, 1, 3], "grey"],
    [[20, 1, 1], "dark grey"],
    [[65, -4, -12], "pale blue"],
    [[45, -4, -12], "greyish blue"],
    [[66, -3, -8], "light bluish grey"],
    [[25, 20, -12], "dark purple"],
    [[8, 4, -14], "very dark blue"],
    [[3, 3, 5], "black"],
  ] as const)("%j is %s", (lab, words) => {
    expect(colourWords(lab)).toBe(words);
  });

  test("blue holds to a larger hue angle the stronger it is", () => {
    const at = (hueDeg: number, chroma: number) => {
      const hue = (hueDeg * Math.PI) / 180;
      return colourWords([30, chroma * Math.cos(hue), chroma * Math.sin(hue)]);
    };
    expect(at(303, 60)).toBe("deep blue");
    expect(at(303, 20)).toBe("dark purple");
    expect(at(310, 60)).toBe("deep purple");
  });

  test("every colour there is gets words of the vocabulary", () => {
    const seen = new Set<string>();
    for (let lightness = 0; lightness <= 100; lightness += 4) {
      for (let chroma = 0; chroma <= 130; chroma += 5) {
        for (let hueDeg = 0; hueDeg < 360; hueDeg += 5) {
          const hue = (hueDeg * Math.PI) / 180;
          seen.add(colourWords([lightness, chroma * Math.cos(hue), chroma * Math.sin(hue)]));
        }
      }
    }
    const hues = "red|orange|yellow|green|teal|blue|purple|purplish red|brown|olive";
    const tints = "reddish|brownish|yellowish|greenish|bluish|purplish";
    const vocabulary = new RegExp(
      `^(black|white|((very dark|dark|deep|pale|greyish|light) )?(${hues})|((dark|light) )?((${tints}) )?grey)$`,
    );
    for (const words of seen) expect(words).toMatch(vocabulary);
    for (const hue of [...hues.split("|"), ...tints.split("|")]) expect([...seen].join(";")).toContain(hue);
  });

  test("a colour at the edge of the screen is not called clipped for rounding", () => {
    expect(screenColour([100, 0, 0])).toEqual({ hex: "#ffffff", clipped: false });
  });
});
