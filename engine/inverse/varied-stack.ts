/**
 * A stack whose unknowns move: thicknesses of layers, and indices (at 632.8 nm) of silicon-nitride layers. Reflectance and
 * transmittance on one wavelength grid, and by the chain rule the slope of any weighted sum of them with each unknown.
 *
 * The nitride family is straight between its measured members and bends at them, so slopes with an index have two values
 * there. A `Piece` says from which side they are meant.
 */
import { radians } from "../constants.ts";
import { refuse } from "../errors.ts";
import type { FilmStackDescription } from "../film-stack.ts";
import { onGrid } from "../materials/material.ts";
import { nitrideIndexRange, nitrideMemberIndices, nitrideSlopes, siliconNitride } from "../materials/nitride-family.ts";
import { StackSurface } from "../surface/stack-surface.ts";

/** What may be moved: from `from` to `to` in nm for a thickness, as a number for an index. */
export interface FilmUnknown {
  /** 0 is the outermost. */
  readonly layer: number;
  /** "index" is n at 632.8 nm, of a silicon-nitride layer only. */
  readonly what: "thickness" | "index";
  readonly from: number;
  readonly to: number;
  /** The value it has now, inside the range; null when none was named. */
  readonly start: number | null;
}

/** The stretch of an unknown on which everything is smooth. */
export interface Piece {
  readonly low: number;
  readonly high: number;
}

/** How far inside a piece its slopes are taken when the value lies on its edge; far below what moves anything. */
const inside = 1e-9;

/** Most unknowns one search takes: beyond, no number of starts covers the box. */
const mostUnknowns = 8;

/** The smooth stretches of an unknown, in order; one for a thickness. */
export function piecesOf({ what, from, to }: FilmUnknown): Piece[] {
  const joins = what === "index" ? nitrideMemberIndices().filter((join) => join > from && join < to) : [];
  const edges = [from, ...joins, to];
  return edges.slice(1).map((high, i) => ({ low: edges[i], high }));
}

/**
 * Refuses no unknowns or more than 8 ("unknowns"), a layer that is not there, the same unknown twice, or an index of another
 * material ("unknown-layer"), a range that does not rise, is negative, or leaves the nitride family ("range-order",
 * "index-out-of-range"), and a start outside its range ("start-outside").
 */
export function checkUnknowns(description: FilmStackDescription, unknowns: readonly FilmUnknown[]): void {
  if (unknowns.length === 0 || unknowns.length > mostUnknowns)
    refuse("unknowns", `${unknowns.length} unknowns; 1 to ${mostUnknowns} can be searched together`);
  const seen = new Set<string>();
  for (const { layer, what, from, to, start } of unknowns) {
    const named = `${what} of layer ${layer + 1}`;
    const material = description.film[layer]?.material;
    if (!material || seen.has(named)) refuse("unknown-layer", `${named}: no such layer, or named twice`);
    if (what === "index" && material.name !== siliconNitride(2).name)
      refuse("unknown-layer", `${named}: only silicon nitride is a family of films keyed by its index`);
    if (!(from >= 0 && from < to && Number.isFinite(to)))
      refuse("range-order", `${named} may be ${from} to ${to}; a range starts at 0 or more and rises`);
    if (what === "index" && (from < nitrideIndexRange[0] || to > nitrideIndexRange[1]))
      refuse(
        "index-out-of-range",
        `${named} may be ${from} to ${to}, the family has ${nitrideIndexRange.join(" to ")}`,
      );
    if (start !== null && !(start >= from && start <= to))
      refuse("start-outside", `${named} starts at ${start}, outside ${from} to ${to}`);
    seen.add(named);
  }
}

/** The stack with these values of its unknowns, in their order. */
export function stackWith(
  description: FilmStackDescription,
  unknowns: readonly FilmUnknown[],
  values: ArrayLike<number>,
): FilmStackDescription {
  const film = description.film.map((layer) => ({ ...layer }));
  unknowns.forEach(({ layer, what }, u) => {
    if (what === "thickness") film[layer].thicknessNm = values[u];
    else film[layer].material = siliconNitride(values[u]);
  });
  return { ...description, film };
}

export class VariedStack {
  readonly wavelengthNm: Float64Array;
  private readonly surface: StackSurface;
  private readonly thicknessNm: Float64Array;
  /** The index each layer has now; NaN where it is no unknown. */
  private readonly index: Float64Array;
  private readonly indexSlopes: { n: Float64Array; k: Float64Array }[] = [];

  /** Refuses as `StackSurface` does. `coverOff` as there. */
  constructor(
    description: FilmStackDescription,
    private readonly unknowns: readonly FilmUnknown[],
    wavelengthNm: Float64Array,
    coverOff = false,
  ) {
    this.wavelengthNm = wavelengthNm;
    this.surface = new StackSurface({
      wavelengthNm,
      seenFrom: description.seenFrom,
      surface: description.surface,
      angleRad: radians(description.light.angleDeg),
      polarisation: description.light.polarisation,
      film: description.film.map(({ material }) => onGrid(material, wavelengthNm)),
      substrate: onGrid(description.substrate, wavelengthNm),
      coverOff,
    });
    this.thicknessNm = Float64Array.from(description.film, (layer) => layer.thicknessNm);
    this.index = new Float64Array(description.film.length).fill(Number.NaN);
  }

  get reflectance(): Float64Array {
    return this.surface.reflectance;
  }

  get transmittance(): Float64Array {
    return this.surface.transmittance;
  }

  /** Reflectance and transmittance at these values of the unknowns. */
  evaluate(values: ArrayLike<number>): void {
    this.move(values);
    this.surface.evaluate(this.thicknessNm);
  }

  /** The same, with slopes; `pieces`, one an unknown, say on which side of a join. */
  slopes(values: ArrayLike<number>, pieces: readonly Piece[]): void {
    this.move(values);
    this.unknowns.forEach(({ what }, u) => {
      if (what !== "index") return;
      const within = Math.min(pieces[u].high - inside, Math.max(pieces[u].low + inside, values[u]));
      this.indexSlopes[u] = nitrideSlopes(within, this.wavelengthNm);
    });
    this.surface.slopes(this.thicknessNm);
  }

  /** After `slopes`: the slope with each unknown of the sum over the grid of weight times reflectance (or transmittance). */
  slopesOf(weights: ArrayLike<number>, of: "reflectance" | "transmittance"): Float64Array {
    const { layers, wavelengths } = this.surface;
    const all = of === "reflectance" ? this.surface.reflectanceSlopes : this.surface.transmittanceSlopes;
    return Float64Array.from(this.unknowns, ({ layer, what }, u) => {
      let sum = 0;
      if (what === "thickness") {
        const at = layer * wavelengths;
        for (let i = 0; i < wavelengths; i++) sum += weights[i] * all[at + i];
        return sum;
      }
      const { n, k } = this.indexSlopes[u];
      const atN = (layers + layer) * wavelengths;
      const atK = (2 * layers + layer) * wavelengths;
      for (let i = 0; i < wavelengths; i++) sum += weights[i] * (all[atN + i] * n[i] + all[atK + i] * k[i]);
      return sum;
    });
  }

  private move(values: ArrayLike<number>): void {
    this.unknowns.forEach(({ layer, what }, u) => {
      if (what === "thickness") this.thicknessNm[layer] = values[u];
      else if (values[u] !== this.index[layer]) {
        this.surface.setLayer(layer, onGrid(siliconNitride(values[u]), this.wavelengthNm));
        this.index[layer] = values[u];
      }
    });
  }
}
