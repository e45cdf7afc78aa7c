/**
 * Our colour words against the ISCC-NBS colour names: K. L. Kelly, Central notations for the revised ISCC-NBS color-name blocks,
 * J. Res. Natl. Bur. Stand. 61, 427 (1958); K. L. Kelly and D. B. Judd, NBS Special Publication 440 (1976). The central colours
 * are carried as the sRGB values in which they are usually passed on. Our words are coarser: violet goes with purple, greenish
 * and purplish blue with blue, grey-brown with either.
 */
import { convertRgbToXyz65, convertXyz65ToLab65, parseHex } from "culori/fn";
import { describe, expect, test } from "vitest";
import { colourWords } from "../../engine/index.ts";

const words = (hex: string): string => {
  const rgb = parseHex(hex);
  if (!rgb) throw new Error(`${hex} is no colour`);
  const { l, a, b } = convertXyz65ToLab65(convertRgbToXyz65(rgb));
  return colourWords([l, a, b]);
};

describe("central colours of the ISCC-NBS names", () => {
  test.each([
    ["strong blue", "#0067a5", "blue"],
    ["deep blue", "#00416a", "deep blue"],
    ["dark blue", "#00304e", "dark blue"],
    ["light blue", "#70a3cc", "light blue"],
    ["moderate blue", "#436b95", "blue"],
    ["greyish blue", "#536878", "greyish blue"],
    ["dark bluish grey", "#51585e", "dark bluish grey"],
    ["vivid purplish blue", "#30267a", "deep blue"],
    ["deep purplish blue", "#272458", "deep blue"],
    ["dark purplish blue", "#252440", "dark blue"],
    ["dark greenish blue", "#004958", "dark blue"],
    ["strong violet", "#604e97", "purple"],
    ["deep violet", "#32174d", "deep purple"],
    ["dark violet", "#2f2140", "dark purple"],
    ["moderate violet", "#604e81", "purple"],
    ["deep purple", "#602f6b", "deep purple"],
    ["dark purple", "#563c5c", "dark purple"],
    ["deep purplish red", "#78184a", "deep purplish red"],
    ["deep red", "#841b2d", "deep red"],
    ["deep reddish brown", "#56070c", "deep brown"],
    ["strong brown", "#80461b", "brown"],
    ["deep brown", "#593319", "deep brown"],
    ["dark brown", "#422518", "dark brown"],
    ["moderate brown", "#6f4e37", "brown"],
    ["greyish brown", "#635147", "greyish brown"],
    ["light brownish grey", "#8e8279", "brownish grey"],
    ["brownish grey", "#5b504f", "dark brownish grey"],
    ["strong yellowish brown", "#996515", "brown"],
    ["moderate olive brown", "#6c541e", "brown"],
    ["moderate olive", "#665d1e", "olive"],
    ["strong yellow", "#d4af37", "light yellow"],
    ["strong orange", "#ed872d", "light orange"],
    ["strong green", "#007959", "green"],
    ["light green", "#6aab8e", "light green"],
    ["greenish grey", "#7d8984", "greenish grey"],
    ["strong bluish green", "#007a74", "teal"],
    ["medium grey", "#848482", "grey"],
    ["dark grey", "#555555", "dark grey"],
    ["light grey", "#b9b8b5", "light grey"],
    ["white", "#f2f3f4", "white"],
  ])("%s (%s) is %s", (_, hex, ours) => {
    expect(words(hex)).toBe(ours);
  });
});
