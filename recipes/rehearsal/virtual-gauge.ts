/**
 * How a virtual film is read: the gauge's own scatter, a day's offset, and now and then one of the gross slips that real
 * books contain. What a reflectometer sees comes through a function passed in, so that this file knows no optics.
 */
import { type Random, refuse } from "../../engine/index.ts";
import type { Deposited } from "./virtual-chamber.ts";
import type { World } from "./worlds.ts";

/**
 * What the coated, textured cell shows for a film of this index and this thickness on the facet. The engine's coated wafer
 * is one. The minimum is null where the spectrum has none.
 */
export interface CellLight {
  reflectanceMinimumNm(index: number, facetNm: number): number | null;
  weightedReflectancePercent(index: number, facetNm: number): number;
}

/** A gauge and what it reads: film on a polished witness or on a textured wafer, or light on the coated cell. */
export interface Gauge {
  reads: "film on polished" | "film on textured" | "light on cell";
  /** Standard deviation of one reading; the trade's usual ones when left out. */
  scatter?: { index: number; thicknessNm: number; reflectanceMinimumNm: number; weightedReflectancePercent: number };
  /** The day's offset of the gauge. */
  offset?: { index: number; thicknessNm: number };
  /** Where along the boat the wafer stood, 0 to 1; the middle when left out. */
  place?: number;
}

export type Slip = "heavy tail" | "wrong wafer" | "swapped rows" | "unit slip" | "missing value";

export interface Measured {
  index: number | null;
  thicknessNm: number | null;
  reflectanceMinimumNm: number | null;
  weightedReflectancePercent: number | null;
  /** What went wrong with this reading, which nobody wrote down. For the score, never for the advice. */
  slip: Slip | null;
}

/** Usual repeatabilities (common practice, no source). */
const USUAL = {
  "film on polished": { index: 0.002, thicknessNm: 0.3 },
  "film on textured": { index: 0.008, thicknessNm: 0.8 },
} as const;
const USUAL_LIGHT = { reflectanceMinimumNm: 1.5, weightedReflectancePercent: 0.1 };
const HEAVY = 6;
const SLIPS: readonly Slip[] = ["heavy tail", "wrong wafer", "swapped rows", "unit slip", "missing value"];

/** A reader of films with its own stream; slips come at the world's rate. Reading light without `cellLight` is refused. */
export function virtualGauge(world: World, source: Random, cellLight?: CellLight) {
  /** The reading before, film and light apart, for swapped rows. */
  const last: { film: Measured | null; light: Measured | null } = { film: null, light: null };

  function readLight(film: Deposited, gauge: Gauge, wide: number): Measured {
    if (!cellLight) refuse("no-light", "this virtual chamber was made without a function for the light on the cell");
    const { index, thicknessNm } = film.at(gauge.place ?? 0.5);
    const facetNm = (thicknessNm * film.facetNm) / film.thicknessNm;
    const minimum = cellLight.reflectanceMinimumNm(index, facetNm);
    const sd = gauge.scatter ?? USUAL_LIGHT;
    const a = wide * source.normal();
    const b = wide * source.normal();
    return {
      index: null,
      thicknessNm: null,
      reflectanceMinimumNm: minimum === null ? null : minimum + sd.reflectanceMinimumNm * a,
      weightedReflectancePercent:
        cellLight.weightedReflectancePercent(index, facetNm) + sd.weightedReflectancePercent * b,
      slip: null,
    };
  }

  function readFilm(film: Deposited, gauge: Gauge, wide: number, textured: boolean): Measured {
    const { index, thicknessNm } = film.at(gauge.place ?? 0.5);
    const sd = gauge.scatter ?? USUAL[textured ? "film on textured" : "film on polished"];
    const facet = textured ? film.facetNm / film.thicknessNm : 1;
    return {
      index: index + (gauge.offset?.index ?? 0) + wide * sd.index * source.normal(),
      thicknessNm: facet * thicknessNm + (gauge.offset?.thicknessNm ?? 0) + wide * sd.thicknessNm * source.normal(),
      reflectanceMinimumNm: null,
      weightedReflectancePercent: null,
      slip: null,
    };
  }

  return function measure(film: Deposited, gauge: Gauge): Measured {
    const textured = gauge.reads === "film on textured";
    const kind = gauge.reads === "light on cell" ? "light" : "film";
    // Both are drawn every time, so that the rate of slips does not shift the scatter of the readings that follow.
    const slipped = source.chance(world.slips.reading);
    const which = source.choice(SLIPS);
    const slip = slipped ? which : null;
    const wide = slip === "heavy tail" ? HEAVY : 1;
    const right =
      kind === "light"
        ? readLight(film, gauge, wide)
        : readFilm(film, gauge, wide, textured !== (slip === "wrong wafer"));
    const before = last[kind];
    last[kind] = right;
    switch (slip) {
      case "heavy tail":
        return { ...right, slip };
      case "wrong wafer":
        return kind === "light" ? right : { ...right, slip };
      case "swapped rows":
        return before ? { ...before, slip } : right;
      case "unit slip":
        return { ...inWrongUnit(right), slip };
      case "missing value":
        return { ...right, index: null, reflectanceMinimumNm: null, slip };
      default:
        return right;
    }
  };
}

/** Thickness in angstrom, or the minimum in micrometres, copied into a column of nanometres. */
function inWrongUnit(right: Measured): Measured {
  const { thicknessNm, reflectanceMinimumNm } = right;
  return {
    ...right,
    thicknessNm: thicknessNm === null ? null : thicknessNm * 10,
    reflectanceMinimumNm: reflectanceMinimumNm === null ? null : reflectanceMinimumNm / 1000,
  };
}
