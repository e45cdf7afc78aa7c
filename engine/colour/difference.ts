/**
 * How different two colours look: CIEDE2000, by the library culori, checked on the published pairs of Sharma, Wu and Dalal
 * (2005) in the tests.
 */
import { differenceCiede2000, modeLab65, useMode as registerMode } from "culori/fn";
import type { Triple } from "./observer.ts";

registerMode(modeLab65);
const difference = differenceCiede2000();

/**
 * CIEDE2000 difference of two CIELAB (D65) colours; about 1 is just noticeable side by side (common practice, no source).
 * Source: G. Sharma, W. Wu, E. N. Dalal, Color Res. Appl. 30, 21-30 (2005).
 */
export function colourDifference(one: Triple, other: Triple): number {
  return difference(
    { mode: "lab65", l: one[0], a: one[1], b: one[2] },
    { mode: "lab65", l: other[0], a: other[1], b: other[2] },
  );
}
