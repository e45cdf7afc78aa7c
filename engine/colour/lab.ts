/**
 * From tristimulus values to CIELAB and to the colour of a swatch on screen (sRGB), by the library culori. Lab is taken
 * against the white of our own sums, so that a perfect white is exactly L = 100, a = b = 0.
 */
import {
  clampRgb,
  convertLab65ToRgb,
  convertXyz65ToLab65,
  formatHex,
  modeRgb,
  useMode as registerMode,
} from "culori/fn";
import { type Triple, tristimulus, whitePoint } from "./observer.ts";
import { colourWords } from "./words.ts";

// The converters are called directly; `formatHex` and `clampRgb` look their colour space up in culori's register.
registerMode(modeRgb);

/** The white culori measures XYZ against (x = 0.3127, y = 0.3290), Y = 1. */
const libraryWhite: Triple = [0.3127 / 0.329, 1, (1 - 0.3127 - 0.329) / 0.329];

export interface SeenColour {
  /** Tristimulus values under D65, 2 degree observer, perfect white Y = 100. */
  xyz: Triple;
  /** CIELAB under D65. */
  lab: Triple;
  /** Nearest colour a screen can show, "#rrggbb". */
  hex: string;
  /** True when the screen cannot show the colour and `hex` is the clipped nearest. */
  clipped: boolean;
  /** Plain English. */
  words: string;
}

/** CIELAB (D65) of tristimulus values given with white Y = 100. */
export function labOf(xyz: Triple): Triple {
  const { l, a, b } = convertXyz65ToLab65({
    x: (xyz[0] / whitePoint[0]) * libraryWhite[0],
    y: xyz[1] / whitePoint[1],
    z: (xyz[2] / whitePoint[2]) * libraryWhite[2],
  });
  return [l, a, b];
}

/** Hex of the nearest colour a screen can show, and whether it had to be clipped. */
export function screenColour(lab: Triple): { hex: string; clipped: boolean } {
  const rgb = convertLab65ToRgb({ l: lab[0], a: lab[1], b: lab[2] });
  // Half a step of 8 bits: what rounding to hex would hide anyway is not called clipped.
  const slack = 0.5 / 255;
  const clipped = [rgb.r, rgb.g, rgb.b].some((channel) => channel < -slack || channel > 1 + slack);
  return { hex: formatHex(clampRgb(rgb)), clipped };
}

/** The colour of a reflectance spectrum, 0 to 1 on `colourWavelengthNm`. */
export function seenColour(reflectance: ArrayLike<number>): SeenColour {
  const xyz = tristimulus(reflectance);
  const lab = labOf(xyz);
  return { xyz, lab, ...screenColour(lab), words: colourWords(lab) };
}
