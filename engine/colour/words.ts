/**
 * Colours in the words people use beside the tool: "deep blue", "light blue", "purple", "brown", "dark bluish grey". The words
 * are an aid, not a measurement. Names and limits lean on the colour blocks of the ISCC-NBS system (K. L. Kelly and D. B. Judd,
 * NBS Special Publication 440, 1976; their central colours are a test of this file), made coarser; where exactly a limit lies
 * is a judgement.
 */
import type { Triple } from "./observer.ts";

interface Hue {
  /** CIELAB hue angle, degrees, from which the name holds, up to the next. */
  fromDeg: number;
  name: string;
  /** What a grey with a breath of it is called. */
  tint: string;
}

const blueToPurpleDeg = 302;
/** Hue angles of what is brown when dark: orange wholly, the red beside it when darker still. */
const reddishBrownDeg = 28;
const brownDeg = 47;
const oliveDeg = 93;
const greenDeg = 115;
const hues: readonly Hue[] = [
  { fromDeg: 0, name: "red", tint: "reddish" },
  { fromDeg: 20, name: "red", tint: "brownish" },
  { fromDeg: brownDeg, name: "orange", tint: "brownish" },
  { fromDeg: 75, name: "yellow", tint: "yellowish" },
  { fromDeg: greenDeg, name: "green", tint: "greenish" },
  { fromDeg: 175, name: "teal", tint: "greenish" },
  { fromDeg: 220, name: "blue", tint: "bluish" },
  { fromDeg: blueToPurpleDeg, name: "purple", tint: "purplish" },
  { fromDeg: 338, name: "purplish red", tint: "reddish" },
  { fromDeg: 356, name: "red", tint: "reddish" },
];

/** Chroma below which no hue is seen at all, and the range in which a colour is a tinted grey, wider when it is light. */
const neutralChroma = 4;
const tintedChroma = (lightness: number): number => Math.min(11, Math.max(5, lightness / 4.5));

/** Lightness below which all is near black, a colour is dark, a grey is dark; and from which colours and greys are light. */
const nearBlack = 12;
const dark = 35;
const darkGrey = 42;
const light = 60;
/** Chroma below which a colour is weak (pale, greyish), and from which a dark colour is deep. */
const weak = 18;
const strong = 25;

/** Plain English for a CIELAB (D65) colour, for instance "deep blue". */
export function colourWords([lightness, a, b]: Triple): string {
  const chroma = Math.hypot(a, b);
  const hueDeg = ((Math.atan2(b, a) * 180) / Math.PI + 360) % 360;
  if (lightness < nearBlack && chroma < 8) return "black";
  if (chroma < neutralChroma) return greyWords(lightness, "");
  const hue = hueOf(hueDeg, chroma);
  const earth = earthName(lightness, chroma, hueDeg);
  if (chroma < tintedChroma(lightness)) return greyWords(lightness, earth === "brown" ? "brownish" : hue.tint);
  return `${shadeOf(lightness, chroma)}${earth ?? hue.name}`;
}

/**
 * CIELAB bends its blues: of colours that look equally blue, the stronger one has the larger hue angle (G. Hung and R. S. Berns,
 * Color Res. Appl. 20, 285 (1995), from memory), so blue holds longer the stronger it is: the screen's own blue lies at 306 deg.
 */
function hueOf(hueDeg: number, chroma: number): Hue {
  const bend = chroma / 30;
  let hue = hues[0];
  for (const next of hues) if (hueDeg >= next.fromDeg + (next.fromDeg === blueToPurpleDeg ? bend : 0)) hue = next;
  return hue;
}

/** Dark orange is brown, dark yellow brown or olive, a duller red on the orange side brown when darker still; null for others. */
function earthName(lightness: number, chroma: number, hueDeg: number): string | null {
  if (hueDeg < reddishBrownDeg || hueDeg >= greenDeg) return null;
  if (hueDeg < brownDeg) return lightness < darkGrey && chroma < 60 ? "brown" : null;
  // A strong orange or yellow keeps its name down to a lower lightness.
  if (lightness >= (chroma < 35 ? 57 : 50)) return null;
  return hueDeg < oliveDeg ? "brown" : "olive";
}

function greyWords(lightness: number, tint: string): string {
  const grey = tint ? `${tint} grey` : "grey";
  if (lightness < nearBlack) return "black";
  if (lightness < darkGrey) return `dark ${grey}`;
  if (lightness < light) return grey;
  return lightness < 92 ? `light ${grey}` : "white";
}

/** The word before the hue, with its space; empty when none is needed. */
function shadeOf(lightness: number, chroma: number): string {
  if (lightness < dark && chroma >= strong) return "deep ";
  if (lightness < nearBlack) return "very dark ";
  if (lightness < dark) return "dark ";
  if (chroma < weak) return lightness < light ? "greyish " : "pale ";
  return lightness < light ? "" : "light ";
}
