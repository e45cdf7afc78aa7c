/**
 * The coated wafer: what a silicon-nitride film of a given index and thickness does to sunlight on this surface. This is the
 * observation model of the rest of the program, so it is built once a surface and range, and then asked many thousand times.
 *
 * Thickness is always on the surface named: on the facet for pyramids. Light comes straight down on the wafer, the silicon is
 * half-infinite (no light comes back from the rear, which adds to measured reflectance above about 1000 nm). Under thick layers
 * the light pyramids send back passes them aslant, way by way, and is partly or totally reflected down again; light that comes
 * down again is taken to meet the texture straight down, as the first did (`surface/cover.ts`).
 */
import { type SeenColour, seenColour } from "./colour/lab.ts";
import { colourWavelengthNm } from "./colour/observer.ts";
import { materialByName } from "./materials/library.ts";
import { onGrid } from "./materials/material.ts";
import { type NitrideMaterial, siliconNitride } from "./materials/nitride-family.ts";
import { mainMinimum, mainStretch } from "./optics/reflectance-minimum.ts";
import { weightedMap } from "./optics/weighted-map.ts";
import { type GridWeights, gridWeights, type SunlightWeight, weightedSum } from "./sunlight/weighting.ts";
import { type BareSurface, bareSurface, FilmedSpot, FilmedSurface, withoutCover } from "./surface/filmed-surface.ts";
import { pathSum } from "./surface/path-sum.ts";
import { type Arrangement, pyramidPaths } from "./surface/pyramids.ts";
import { innermostIndex, type SeenFrom } from "./surface/seen-from.ts";
import { type WaferTable, waferTable } from "./wafer-table.ts";
import { wavelengthGrid } from "./wavelength-grid.ts";

export type WaferSurface =
  | { kind: "polished" }
  | { kind: "pyramids"; facetAngleDeg: number; arrangement?: Arrangement };

export interface WaferDescription {
  surface: WaferSurface;
  seenFrom: SeenFrom;
  fromNm: number;
  toNm: number;
  /** Spacing of the wavelength grid, nm; 10 when left out. */
  stepNm?: number;
  weight: SunlightWeight;
}

/** Fractions of the incident light, one number a wavelength of the wafer's grid. */
export interface WaferSpectrum {
  reflectance: Float64Array;
  /** Into the silicon. */
  transmittance: Float64Array;
  /** In the film. */
  absorptance: Float64Array;
}

/** Photon currents over the wafer's range, mA/cm2; the parts sum to `available`. */
export interface WaferCurrents {
  available: number;
  reflected: number;
  absorbedInFilm: number;
  intoSilicon: number;
  /** In glass and encapsulant; 0 without them. */
  absorbedInCover: number;
}

/** `index` is n at 632.8 nm, `thicknessNm` on the surface; both refused out of range as `siliconNitride` and `OneFilm` do. */
export interface CoatedWafer {
  readonly wavelengthNm: Float64Array;
  /** True when the nitride of this index lies beyond the measured members. */
  extrapolated(index: number): boolean;
  nitride(index: number, thicknessNm: number): WaferSpectrum;
  weightedReflectancePercent(index: number, thicknessNm: number): number;
  /**
   * Main (first-order, quarter-wave) minimum, nm; null when it does not lie inside the wavelength range. Under glass, that of
   * the coated wafer in the encapsulant: the cover's front reflection and absorption make dips and steps of their own.
   */
  reflectanceMinimumNm(index: number, thicknessNm: number): number | null;
  /**
   * Weighted reflectance over a plane of films, percent, at [row * columns + column]: a row an index, thicknesses fromNm,
   * fromNm + stepNm and so on. Far cheaper than asking film by film. Refuses as `weightedMap` and `siliconNitride` do.
   */
  weightedReflectanceMap(
    indices: readonly number[],
    thickness: { fromNm: number; stepNm: number; columns: number },
  ): Float64Array;
  currents(index: number, thicknessNm: number): WaferCurrents;
  colour(index: number, thicknessNm: number): SeenColour;
  /** The fast smooth stand-in for the two numbers above that are asked most. */
  table(): WaferTable;
}

/** Grid on which the minimum is first looked for, nm: a tenth of the width of the dip. */
const scanStepNm = 10;

/** Films kept ready, by index. */
const keptFilms = 64;

interface ReadyFilm {
  material: NitrideMaterial;
  surface: FilmedSurface;
  /** Built when first asked. */
  scan: FilmedSurface | null;
  colour: FilmedSurface | null;
}

/**
 * Builds a coated wafer. Refuses wavelengths that silicon, the nitride family (250 to 1240 nm), sunlight or the cover are not
 * known at ("outside-table"), a range or step that makes no grid ("range-order", "range-step"), a facet angle outside 50 to
 * 56 deg ("facet-angle").
 */
export function coatedWafer(description: WaferDescription): CoatedWafer {
  const { surface, seenFrom, fromNm, toNm, weight } = description;
  const silicon = materialByName("silicon");
  const paths = pathSum(
    surface.kind === "polished"
      ? [{ anglesRad: [0], fraction: 1 }]
      : pyramidPaths(surface.arrangement ?? "random", surface.facetAngleDeg),
  );
  const on = (grid: Float64Array): BareSurface => bareSurface(grid, paths, seenFrom, silicon);
  const stepNm = description.stepNm ?? 10;
  // Refuses now, not at the first question, a range the nitride family does not cover.
  for (const wavelengthNm of [fromNm, toNm]) siliconNitride(2).at(wavelengthNm);
  const bare = on(wavelengthGrid(fromNm, toNm, stepNm));
  const scanBare = withoutCover(stepNm <= scanStepNm ? bare : on(wavelengthGrid(fromNm, toNm, scanStepNm)));
  const spot = new FilmedSpot(paths, silicon, innermostIndex(seenFrom));
  let colourBare: BareSurface | null = null;
  const weights: GridWeights = gridWeights(bare.wavelengthNm, fromNm, toNm, weight);
  const films = new Map<number, ReadyFilm>();
  let table: WaferTable | null = null;

  function filmOf(index: number): ReadyFilm {
    let film = films.get(index);
    if (film) return film;
    const material = siliconNitride(index);
    film = { material, surface: new FilmedSurface(bare, material), scan: null, colour: null };
    if (films.size >= keptFilms) films.delete(films.keys().next().value as number);
    films.set(index, film);
    return film;
  }
  function evaluated(index: number, thicknessNm: number): FilmedSurface {
    const { surface: filmed } = filmOf(index);
    filmed.evaluate(thicknessNm);
    return filmed;
  }

  const wafer: CoatedWafer = {
    wavelengthNm: bare.wavelengthNm,
    extrapolated: (index) => filmOf(index).material.extrapolated,
    nitride(index, thicknessNm) {
      const { reflectance, transmittance, absorptance } = evaluated(index, thicknessNm);
      return {
        reflectance: reflectance.slice(),
        transmittance: transmittance.slice(),
        absorptance: absorptance.slice(),
      };
    },
    weightedReflectancePercent(index, thicknessNm) {
      const { surface: filmed } = filmOf(index);
      filmed.reflect(thicknessNm);
      return 100 * weightedSum(weights.average, filmed.reflectance);
    },
    reflectanceMinimumNm(index, thicknessNm) {
      const film = filmOf(index);
      film.scan ??= scanBare === bare ? film.surface : new FilmedSurface(scanBare, film.material);
      const { scan, material } = film;
      const opticalNm = (i: number) => scan.filmIndex[i] * thicknessNm;
      const [first, last] = mainStretch(scanBare.wavelengthNm, opticalNm);
      scan.reflect(thicknessNm, first, last + 1);
      return mainMinimum(
        scanBare.wavelengthNm,
        scan.reflectance,
        opticalNm,
        (wavelengthNm) => spot.reflectance(material, thicknessNm, wavelengthNm),
        [first, last],
      );
    },
    weightedReflectanceMap(indices, thickness) {
      const { wavelengthNm, paths: ways, cover, silicon: substrate } = bare;
      const shape = { wavelengthNm, weight: weights.average, paths: ways, cover, substrate };
      const films = indices.map((index) => onGrid(siliconNitride(index), wavelengthNm));
      return weightedMap({ ...shape, films, ...thickness }).map((fraction) => 100 * fraction);
    },
    currents(index, thicknessNm) {
      const { reflectance, transmittance, absorptance } = evaluated(index, thicknessNm);
      const available = weights.availableMaCm2;
      const reflected = weightedSum(weights.currentMaCm2, reflectance);
      const absorbedInFilm = weightedSum(weights.currentMaCm2, absorptance);
      const intoSilicon = weightedSum(weights.currentMaCm2, transmittance);
      const absorbedInCover = bare.cover.layers > 0 ? available - reflected - absorbedInFilm - intoSilicon : 0;
      return { available, reflected, absorbedInFilm, intoSilicon, absorbedInCover };
    },
    colour(index, thicknessNm) {
      const film = filmOf(index);
      colourBare ??= on(colourWavelengthNm);
      film.colour ??= new FilmedSurface(colourBare, film.material);
      film.colour.reflect(thicknessNm);
      return seenColour(film.colour.reflectance);
    },
    table() {
      table ??= waferTable(wafer);
      return table;
    },
  };
  return wafer;
}
