/**
 * Colours in the words people use beside the tool: "deep blue", "light blue", "purple", "brown", "grey". Our own wording;
 * the limits are a judgement (common practice, no source), not a standard. The words are an aid, not a measurement.
 */
import type { Triple } from "./observer.ts";

/** Hue names by CIELAB hue angle, degrees: each holds from its own angle up to the next. */
const hues: readonly (readonly [number, string])[] = [
  [0, "red"],
  [50, "orange"],
  [75, "yellow"],
  [115, "green"],
  [175, "teal"],
  [220, "blue"],
  [300, "purple"],
  [338, "magenta"],
  [352, "red"],
];

/** Below this chroma the eye sees a grey. */
const greyChroma = 7;

/** Plain English for a CIELAB colour, for instance "deep blue". */
export function colourWords([lightness, a, b]: Triple): string {
  const chroma = Math.hypot(a, b);
  if (chroma < greyChroma) return greyWords(lightness);
  const hueDeg = ((Math.atan2(b, a) * 180) / Math.PI + 360) % 360;
  let hue = hues[0][1];
  for (const [from, name] of hues) if (hueDeg >= from) hue = name;
  // Dark orange and dark yellow have their own name.
  if (lightness < 50 && (hue === "orange" || hue === "yellow")) hue = "brown";
  const shade = shadeOf(lightness, chroma);
  return shade ? `${shade} ${hue}` : hue;
}

function greyWords(lightness: number): string {
  if (lightness < 12) return "black";
  if (lightness < 35) return "dark grey";
  if (lightness < 65) return "grey";
  return lightness < 92 ? "light grey" : "white";
}

function shadeOf(lightness: number, chroma: number): string {
  if (lightness < 12) return "very dark";
  if (lightness < 35) return chroma >= 25 ? "deep" : "dark";
  if (lightness >= 60) return "light";
  return chroma < 18 ? "pale" : "";
}
