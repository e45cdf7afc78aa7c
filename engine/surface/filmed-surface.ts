/**
 * One film on one surface over a wavelength grid: fast optics at each angle of incidence, the sum over bounce paths, and the
 * thick cover above, in that order. The wafer uses it for its spectra, its minimum and its colour alike.
 */
import { type Material, type OpticalConstantsOnGrid, onGrid } from "../materials/material.ts";
import { OneFilm } from "../optics/one-film.ts";
import { addPaths, type PathSum } from "./path-sum.ts";
import { type SeenFrom, type Surroundings, surroundings } from "./seen-from.ts";

/** Everything about a wafer that does not depend on its film, on one wavelength grid; light comes straight down. */
export interface BareSurface {
  wavelengthNm: Float64Array;
  paths: PathSum;
  around: Surroundings;
  silicon: OpticalConstantsOnGrid;
}

/** The same surface with the cover taken off, in the medium that touches the film. */
export function withoutCover(bare: BareSurface): BareSurface {
  return bare.around.cover ? { ...bare, around: { ...bare.around, cover: null } } : bare;
}

export function bareSurface(
  wavelengthNm: Float64Array,
  paths: PathSum,
  seenFrom: SeenFrom,
  silicon: Material,
): BareSurface {
  return { wavelengthNm, paths, around: surroundings(seenFrom, wavelengthNm), silicon: onGrid(silicon, wavelengthNm) };
}

/** A film of one material on a bare surface, ready for any thickness. */
export class FilmedSurface {
  /** Results of the last `evaluate`, one number a wavelength, fractions of the incident light. */
  readonly reflectance: Float64Array;
  /** Into the silicon. */
  readonly transmittance: Float64Array;
  /** In the film. What is in none of the three was absorbed in the cover. */
  readonly absorptance: Float64Array;
  private readonly film: OneFilm;
  private readonly bounceReflectance: Float64Array;
  private readonly bounceTransmittance: Float64Array;
  private readonly bare: BareSurface;

  constructor(bare: BareSurface, film: Material) {
    const count = bare.wavelengthNm.length;
    this.bare = bare;
    this.film = new OneFilm({
      wavelengthNm: bare.wavelengthNm,
      incidenceIndex: bare.around.incidenceIndex,
      film: onGrid(film, bare.wavelengthNm),
      substrate: bare.silicon,
      anglesRad: bare.paths.anglesRad,
    });
    this.reflectance = new Float64Array(count);
    this.transmittance = new Float64Array(count);
    this.absorptance = new Float64Array(count);
    this.bounceReflectance = new Float64Array(count * bare.paths.anglesRad.length);
    this.bounceTransmittance = new Float64Array(count * bare.paths.anglesRad.length);
  }

  /** Fills the three results for a thickness on the surface (on the facet, for pyramids), nm. Refuses as `OneFilm` does. */
  evaluate(thicknessNm: number): void {
    const { paths, wavelengthNm, around } = this.bare;
    this.film.evaluate(thicknessNm, this.bounceReflectance, this.bounceTransmittance);
    addPaths(
      paths,
      wavelengthNm.length,
      this.bounceReflectance,
      this.bounceTransmittance,
      this.reflectance,
      this.transmittance,
    );
    for (let i = 0; i < wavelengthNm.length; i++) {
      // Rounding can leave a film without extinction at minus 1e-16.
      this.absorptance[i] = Math.max(0, 1 - this.reflectance[i] - this.transmittance[i]);
      if (!around.cover) continue;
      const covered = around.cover.over(i, this.reflectance[i]);
      this.reflectance[i] = covered.reflectance;
      this.transmittance[i] *= covered.reach;
      this.absorptance[i] *= covered.reach;
    }
  }
}
