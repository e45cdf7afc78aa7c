/**
 * The eyeball gauge as a table: what colour a film shows at each thickness, and how fast the colour turns there, so that a
 * person beside the tool can tell a thickness from a colour, and knows where the colour tells nothing. Knows no optics: it asks
 * a function from thickness to colour, which a coated wafer or any stack gives.
 */
import { finite, refuse } from "../errors.ts";
import { colourDifference } from "./difference.ts";
import { type SeenColour, seenColour } from "./lab.ts";
import type { Triple } from "./observer.ts";

/** Colour of the film of a thickness, nm. */
export type ColourOfThickness = (thicknessNm: number) => SeenColour;

export interface ThicknessRange {
  fromNm: number;
  /** Always the last row, even where the step does not divide the range. */
  toNm: number;
  stepNm: number;
}

export interface FilmColour {
  thicknessNm: number;
  /** CIELAB under D65. */
  lab: Triple;
  /** Nearest colour a screen can show, "#rrggbb". */
  hex: string;
  /** True when the screen cannot show the colour and `hex` is the clipped nearest. */
  clipped: boolean;
  words: string;
  /** CIEDE2000 a nm of film: 1 is about just noticeable side by side (common practice, no source). */
  changePerNm: number;
}

/** Rows that follow one another under the same words. */
export interface ColourStretch {
  /** Thickness of the first and of the last such row, nm. */
  fromNm: number;
  toNm: number;
  words: string;
  /** Of the row in the middle. */
  hex: string;
}

export interface FilmColours {
  rows: FilmColour[];
  stretches: ColourStretch[];
}

/** Most rows a table may have: 1 um by 0.5 nm. */
const mostRows = 2001;

/** Half the distance, nm, over which the change of colour is taken: well under the width of any colour, well over rounding. */
const halfNm = 0.5;

/** The colour of a reflectance spectrum (0 to 1 on `colourWavelengthNm`) that depends on thickness. */
export function colourOfReflectance(reflectanceOf: (thicknessNm: number) => ArrayLike<number>): ColourOfThickness {
  return (thicknessNm) => seenColour(reflectanceOf(thicknessNm));
}

/**
 * Colours over a range of thickness. For a coated wafer: `filmColours((nm) => wafer.colour(index, nm), range)`; thickness is
 * on the surface the function names (on the facet, for pyramids).
 * Refuses a range that is negative or does not increase ("range-order"), a step that is not positive or gives over 2001 rows
 * ("range-step"), numbers that are not finite ("not-a-number"), and whatever `colourOf` refuses.
 */
export function filmColours(colourOf: ColourOfThickness, range: ThicknessRange): FilmColours {
  const rows = thicknesses(range).map((thicknessNm) => {
    const { lab, hex, clipped, words } = colourOf(thicknessNm);
    return { thicknessNm, lab, hex, clipped, words, changePerNm: changePerNm(colourOf, thicknessNm) };
  });
  return { rows, stretches: stretchesOf(rows) };
}

/** Across the thickness, half a nm to each side; less below where the film would end. */
function changePerNm(colourOf: ColourOfThickness, thicknessNm: number): number {
  const below = Math.max(0, thicknessNm - halfNm);
  const above = thicknessNm + halfNm;
  return colourDifference(colourOf(below).lab, colourOf(above).lab) / (above - below);
}

function stretchesOf(rows: readonly FilmColour[]): ColourStretch[] {
  const stretches: ColourStretch[] = [];
  for (let first = 0, next = 1; first < rows.length; first = next, next++) {
    const { words } = rows[first];
    while (next < rows.length && rows[next].words === words) next++;
    stretches.push({
      fromNm: rows[first].thicknessNm,
      toNm: rows[next - 1].thicknessNm,
      words,
      hex: rows[(first + next - 1) >> 1].hex,
    });
  }
  return stretches;
}

function thicknesses({ fromNm, toNm, stepNm }: ThicknessRange): number[] {
  for (const [name, value] of Object.entries({ from: fromNm, to: toNm, step: stepNm }))
    finite(value, `thickness ${name}`);
  if (!(fromNm >= 0 && fromNm < toNm)) {
    refuse("range-order", `thickness range ${fromNm} to ${toNm} nm; it starts at 0 or more and increases`);
  }
  if (stepNm <= 0) refuse("range-step", `thickness step ${stepNm} nm is not positive`);
  // The allowance keeps a step that divides the range but for rounding from adding a row of its own.
  const steps = Math.ceil((toNm - fromNm) / stepNm - 1e-9);
  if (steps + 1 > mostRows) refuse("range-step", `${steps + 1} thicknesses; at most ${mostRows} are shown`);
  return Array.from({ length: steps + 1 }, (_, i) => (i === steps ? toNm : fromNm + i * stepNm));
}
