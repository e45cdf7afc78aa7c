/**
 * What lies between the eye and the coated wafer: air, another medium, the front of a module, or any list of thick incoherent
 * layers. `cover.ts` works out what it does to light.
 */
import { finite, refuse } from "../errors.ts";
import { materialByName } from "../materials/library.ts";
import type { ThickLayer } from "../optics/thick-layers.ts";

/** `thick`: outermost first, with air outside. "glass": soda-lime glass 3.2 mm, then encapsulant 0.45 mm. */
export type SeenFrom = "air" | "glass" | { index: number } | { thick: readonly ThickLayer[] };

/** Thicknesses of a module's front, mm (common practice, no source). */
const glassMm = 3.2;
const encapsulantMm = 0.45;

/** The thick layers in front, outermost first; null for air or a medium of one index. */
export function thickLayersOf(seenFrom: SeenFrom): readonly ThickLayer[] | null {
  if (seenFrom === "glass") {
    return [
      { material: materialByName("glass"), thicknessMm: glassMm },
      { material: materialByName("encapsulant"), thicknessMm: encapsulantMm },
    ];
  }
  return typeof seenFrom === "object" && "thick" in seenFrom ? seenFrom.thick : null;
}

/**
 * Real index of the medium that touches the film, at any wavelength (nm). Refuses an index that is not positive
 * ("stack-value"); the answer refuses wavelengths that medium is not known at ("outside-table").
 */
export function innermostIndex(seenFrom: SeenFrom): (wavelengthNm: number) => number {
  const innermost = thickLayersOf(seenFrom)?.at(-1)?.material;
  if (innermost) {
    return (wavelengthNm) => innermost.indexAt?.(wavelengthNm) ?? innermost.at(wavelengthNm).n;
  }
  const index = typeof seenFrom === "object" && "index" in seenFrom ? finite(seenFrom.index, "incidence index") : 1;
  if (index <= 0) refuse("stack-value", `incidence index ${index} is not positive`);
  return () => index;
}
