/**
 * What optics alone would choose for one silicon-nitride film, and what it costs to hold its index elsewhere: the index is often
 * set by passivation, and an engineer should see in mA/cm2 what that choice costs the light. Quick enough to be asked with
 * every proposal; `improve-stack.ts` is the thorough one.
 */
import { finite, refuse } from "../errors.ts";
import type { FilmStackDescription } from "../film-stack.ts";
import { materialByName } from "../materials/library.ts";
import { siliconNitride } from "../materials/nitride-family.ts";
import type { WaferDescription } from "../wafer.ts";
import { StackFigures } from "./figures.ts";
import { searchStack } from "./search.ts";
import { checkUnknowns, type FilmUnknown } from "./varied-stack.ts";

export interface OpticsQuestion {
  /** n at 632.8 nm, lowest and highest. */
  indexRange: readonly [number, number];
  /** On the surface (on the facet, for pyramids), nm. */
  thicknessRange: readonly [number, number];
  /** The index something else than optics asks for; it may lie outside `indexRange`. */
  heldIndex?: number;
}

export interface ChosenFilm {
  index: number;
  thicknessNm: number;
  /** Reflected, absorbed in the film and in the cover: what does not reach the silicon. */
  lossMaCm2: number;
}

export interface OpticsChoice {
  free: ChosenFilm;
  /** True where the best index lies at an end of `indexRange`: optics would go further. */
  indexAtBound: boolean;
  thicknessAtBound: boolean;
  /** The best film of the held index; null without one. */
  held: ChosenFilm | null;
  /** Loss of `held` above that of `free`; below zero only for a held index outside the range. */
  costMaCm2: number | null;
}

/** Points of the scan and descents: the loss of one film has a single valley in index, and valleys in thickness 150 nm apart. */
const effortOf = (nm: number) => ({ scan: Math.max(9, Math.ceil(nm / 8)), descents: Math.max(1, Math.ceil(nm / 150)) });

/**
 * The film with the least loss on this wafer. Refuses as `coatedWafer` and `checkUnknowns` do, and a held index outside the
 * nitride family ("index-out-of-range").
 */
export function opticsChoice(wafer: WaferDescription, question: OpticsQuestion): OpticsChoice {
  const { indexRange, thicknessRange, heldIndex } = question;
  const [thinnest, thickest] = thicknessRange;
  for (const value of [...indexRange, ...thicknessRange]) finite(value, "range of the film");
  if (!(thinnest < thickest)) refuse("range-order", `thickness from ${thinnest} to ${thickest} nm does not rise`);
  const thickness: FilmUnknown = { layer: 0, what: "thickness", from: thinnest, to: thickest, start: null };
  const index: FilmUnknown = { layer: 0, what: "index", from: indexRange[0], to: indexRange[1], start: null };
  const effort = effortOf(thickest - thinnest);
  const of = (n: number): FilmStackDescription => filmOn(wafer, n, thinnest);
  /** The best thickness of one index. */
  const best = (n: number): ChosenFilm => {
    const { values, lossMaCm2 } = searchStack(new StackFigures(of(n), [thickness], {}), [thickness], [], effort)
      .optima[0];
    return { index: n, thicknessNm: values[0], lossMaCm2 };
  };
  const unknowns = [thickness, index];
  checkUnknowns(of(indexRange[0]), unknowns);
  const middle = (indexRange[0] + indexRange[1]) / 2;
  const held = heldIndex === undefined ? null : best(heldIndex);
  const near = held ?? best(middle);
  const start = [near.thicknessNm, Math.min(indexRange[1], Math.max(indexRange[0], near.index))];
  // The valley at one index goes on through all of them, so that one descent from its floor finds the best.
  const { values, lossMaCm2 } = searchStack(new StackFigures(of(middle), unknowns, {}), unknowns, [start], {
    scan: 0,
    descents: 0,
  }).optima[0];
  const free = { index: values[1], thicknessNm: values[0], lossMaCm2 };
  return {
    free,
    indexAtBound: free.index === indexRange[0] || free.index === indexRange[1],
    thicknessAtBound: free.thicknessNm === thinnest || free.thicknessNm === thickest,
    held,
    costMaCm2: held && held.lossMaCm2 - free.lossMaCm2,
  };
}

function filmOn({ surface, seenFrom, fromNm, toNm, stepNm = 10, weight }: WaferDescription, n: number, nm: number) {
  return {
    light: { fromNm, toNm, stepNm, angleDeg: 0, polarisation: "both", weight },
    seenFrom,
    film: [{ material: siliconNitride(n), thicknessNm: nm }],
    surface,
    substrate: materialByName("silicon"),
  } satisfies FilmStackDescription;
}
