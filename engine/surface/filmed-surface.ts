/**
 * One film on one surface over a wavelength grid: fast optics at each angle of incidence, the sum over bounce paths, and the
 * thick cover above, in that order. The wafer uses it for its spectra, its minimum and its colour alike.
 */
import { type Material, type OpticalConstantsOnGrid, onGrid } from "../materials/material.ts";
import { OneFilm } from "../optics/one-film.ts";
import { type CoverLight, coverLight, uncovered } from "./cover.ts";
import { addLeaving, addPaths, addReflections, type PathSum } from "./path-sum.ts";
import type { SeenFrom } from "./seen-from.ts";

/** Everything about a wafer that does not depend on its film, on one wavelength grid; light comes straight down. */
export interface BareSurface {
  wavelengthNm: Float64Array;
  paths: PathSum;
  cover: CoverLight;
  silicon: OpticalConstantsOnGrid;
}

/** The same surface with the cover taken off, in the medium that touches the film. */
export function withoutCover(bare: BareSurface): BareSurface {
  return bare.cover.layers > 0 ? { ...bare, cover: uncovered(bare.cover) } : bare;
}

export function bareSurface(
  wavelengthNm: Float64Array,
  paths: PathSum,
  seenFrom: SeenFrom,
  silicon: Material,
): BareSurface {
  const exitsRad = paths.paths.map((path) => path.exitRad);
  const cover = coverLight({ seenFrom, wavelengthNm, exitsRad });
  return { wavelengthNm, paths, cover, silicon: onGrid(silicon, wavelengthNm) };
}

/** A film of one material on a bare surface, ready for any thickness. */
export class FilmedSurface {
  /** Results of the last `evaluate`, one number a wavelength, fractions of the incident light. */
  readonly reflectance: Float64Array;
  /** Into the silicon. */
  readonly transmittance: Float64Array;
  /** In the film. What is in none of the three was absorbed in the cover. */
  readonly absorptance: Float64Array;
  /** Index of the film along the grid. */
  readonly filmIndex: Float64Array;
  private readonly film: OneFilm;
  private readonly bounceReflectance: Float64Array;
  private readonly bounceTransmittance: Float64Array;
  /** Working space under a cover: of the light at the surface, what leaves and what comes down again. */
  private readonly leaving: Float64Array;
  private readonly returning: Float64Array;
  private readonly bare: BareSurface;

  constructor(bare: BareSurface, film: Material) {
    const count = bare.wavelengthNm.length;
    const constants = onGrid(film, bare.wavelengthNm);
    this.bare = bare;
    this.filmIndex = constants.n;
    this.film = new OneFilm({
      wavelengthNm: bare.wavelengthNm,
      incidenceIndex: bare.cover.innerIndex,
      film: constants,
      substrate: bare.silicon,
      anglesRad: bare.paths.anglesRad,
    });
    this.reflectance = new Float64Array(count);
    this.transmittance = new Float64Array(count);
    this.absorptance = new Float64Array(count);
    this.bounceReflectance = new Float64Array(count * bare.paths.anglesRad.length);
    this.bounceTransmittance = new Float64Array(count * bare.paths.anglesRad.length);
    this.leaving = new Float64Array(bare.cover.layers > 0 ? count : 0);
    this.returning = new Float64Array(bare.cover.layers > 0 ? count : 0);
  }

  /**
   * Fills `reflectance` alone, at the wavelengths from place `first` to before `end`: all when left out. Refuses as `evaluate`.
   */
  reflect(thicknessNm: number, first = 0, end = this.reflectance.length): void {
    const { paths, wavelengthNm, cover } = this.bare;
    const { bounceReflectance, reflectance, leaving, returning } = this;
    this.film.evaluate(thicknessNm, bounceReflectance, null, first, end);
    if (cover.layers === 0) {
      addReflections(paths, wavelengthNm.length, bounceReflectance, reflectance, first, end);
      return;
    }
    addLeaving(paths, cover, wavelengthNm.length, bounceReflectance, leaving, returning, first, end);
    for (let i = first; i < end; i++) {
      reflectance[i] = cover.front[i] + (cover.enters[i] * leaving[i]) / (1 - returning[i]);
    }
  }

  /** Fills the three results for a thickness on the surface (on the facet, for pyramids), nm. Refuses as `OneFilm` does. */
  evaluate(thicknessNm: number): void {
    const { paths, wavelengthNm, cover } = this.bare;
    const { bounceReflectance, reflectance, transmittance, absorptance, leaving, returning } = this;
    const count = wavelengthNm.length;
    this.film.evaluate(thicknessNm, bounceReflectance, this.bounceTransmittance);
    addPaths(paths, count, bounceReflectance, this.bounceTransmittance, reflectance, transmittance);
    // Rounding can leave a film without extinction at minus 1e-16.
    for (let i = 0; i < count; i++) absorptance[i] = Math.max(0, 1 - reflectance[i] - transmittance[i]);
    if (cover.layers === 0) return;
    addLeaving(paths, cover, count, bounceReflectance, leaving, returning);
    for (let i = 0; i < count; i++) {
      // All the light that reaches the surface, first and later passes added.
      const reach = cover.enters[i] / (1 - returning[i]);
      reflectance[i] = cover.front[i] + reach * leaving[i];
      transmittance[i] *= reach;
      absorptance[i] *= reach;
    }
  }
}

/** One wavelength, any film: the curve a minimum is closed in on. Built once a wafer; the cover is left off. */
export class FilmedSpot {
  private readonly film: OneFilm;
  private readonly bounceReflectance: Float64Array;
  private readonly reflected = new Float64Array(1);

  constructor(
    private readonly paths: PathSum,
    private readonly silicon: Material,
    private readonly incidenceIndexAt: (wavelengthNm: number) => number,
  ) {
    const nowhere = { n: Float64Array.of(1), k: Float64Array.of(0) };
    this.film = new OneFilm({
      wavelengthNm: Float64Array.of(1),
      incidenceIndex: Float64Array.of(1),
      film: nowhere,
      substrate: nowhere,
      anglesRad: paths.anglesRad,
    });
    this.bounceReflectance = new Float64Array(paths.anglesRad.length);
  }

  /** Reflectance (fraction) of a film at a wavelength, nm. Refuses as the materials and `OneFilm` do. */
  reflectance(film: Material, thicknessNm: number, wavelengthNm: number): number {
    const { bounceReflectance, reflected, paths } = this;
    const on = film.at(wavelengthNm);
    const under = this.silicon.at(wavelengthNm);
    this.film.aim(0, wavelengthNm, this.incidenceIndexAt(wavelengthNm), on.n, on.k, under.n, under.k);
    this.film.evaluate(thicknessNm, bounceReflectance, null);
    addReflections(paths, 1, bounceReflectance, reflected);
    return reflected[0];
  }
}
