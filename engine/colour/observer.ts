/**
 * From a reflectance spectrum to what the eye sees of it in daylight: tristimulus values under D65 for the CIE 1931
 * 2 degree observer, summed on the 5 nm tables of ISO/CIE 11664 and scaled so that a perfect white has Y = 100.
 */
import { refuse } from "../errors.ts";
import { d65, xBar, yBar, zBar } from "./data/observer.ts";

/** Wavelengths of the sums, nm: 380, 385, ... 780. */
export const colourWavelengthNm: Float64Array = Float64Array.from(xBar, (_, i) => 380 + 5 * i);

export type Triple = readonly [number, number, number];

const scale = 100 / yBar.reduce((sum, y, i) => sum + y * d65[i], 0);

/** X, Y, Z (white has Y = 100) of a reflectance, 0 to 1 on `colourWavelengthNm`. Refuses another length ("length-mismatch"). */
export function tristimulus(reflectance: ArrayLike<number>): Triple {
  if (reflectance.length !== colourWavelengthNm.length) {
    refuse(
      "length-mismatch",
      `${reflectance.length} reflectances, ${colourWavelengthNm.length} are needed (380 to 780 nm by 5)`,
    );
  }
  let x = 0;
  let y = 0;
  let z = 0;
  for (let i = 0; i < reflectance.length; i++) {
    const light = reflectance[i] * d65[i];
    x += light * xBar[i];
    y += light * yBar[i];
    z += light * zBar[i];
  }
  return [x * scale, y * scale, z * scale];
}

/** X, Y, Z of the perfect white under D65 by the same sums. */
export const whitePoint: Triple = tristimulus(new Float64Array(colourWavelengthNm.length).fill(1));
