/** The colour of a stack as one of its layers grows, the others as they are: what `filmColours` makes a table of. */
import type { ColourOfThickness } from "../colour/film-colours.ts";
import { seenColour } from "../colour/lab.ts";
import { colourWavelengthNm } from "../colour/observer.ts";
import { refuse } from "../errors.ts";
import type { FilmStackDescription } from "../film-stack.ts";
import { type FilmUnknown, VariedStack } from "./varied-stack.ts";

/**
 * Colour of the stack by the thickness (nm, on the surface) of one layer, 0 the outermost. Refuses a layer that is not there
 * ("unknown-layer") and materials not known at 380 to 780 nm ("outside-table").
 */
export function colourOfLayer(description: FilmStackDescription, layer: number): ColourOfThickness {
  if (!description.film[layer])
    refuse("unknown-layer", `layer ${layer + 1} of ${description.film.length} is not there`);
  const thickness: FilmUnknown = { layer, what: "thickness", from: 0, to: Number.MAX_VALUE, start: null };
  const stack = new VariedStack(description, [thickness], colourWavelengthNm);
  return (thicknessNm) => {
    stack.evaluate([thicknessNm]);
    return seenColour(stack.reflectance);
  };
}
