/**
 * Optics of any stack of films, as the `film` verb shows them: spectra, weighted reflectance, minimum, currents and colour in
 * the shape of that verb's machine-readable answer. General and plain; the fast path for one nitride film is `wafer.ts`.
 */
import { seenColour } from "./colour/lab.ts";
import { colourWavelengthNm, type Triple } from "./colour/observer.ts";
import { radians } from "./constants.ts";
import { finite, refuse } from "./errors.ts";
import { type Material, onGrid } from "./materials/material.ts";
import type { Polarisation } from "./optics/fresnel.ts";
import { lowestMinimum, mainMinimum } from "./optics/reflectance-minimum.ts";
import { stackLight } from "./optics/stack.ts";
import { gridWeights, type SunlightWeight, weightedSum } from "./sunlight/weighting.ts";
import { pyramidPaths } from "./surface/pyramids.ts";
import { type SeenFrom, surroundings } from "./surface/seen-from.ts";
import { wavelengthGrid } from "./wavelength-grid.ts";

export interface FilmLayer {
  material: Material;
  /** On the surface: on the facet, for pyramids. */
  thicknessNm: number;
}

export interface FilmStackDescription {
  light: {
    fromNm: number;
    toNm: number;
    stepNm: number;
    /** From the wafer's normal, in the outermost medium. */
    angleDeg: number;
    polarisation: Polarisation | "both";
    weight: SunlightWeight;
  };
  seenFrom: SeenFrom;
  /** From the light inwards; may be empty. */
  film: readonly FilmLayer[];
  surface: { kind: "polished" } | { kind: "pyramids"; facetAngleDeg: number };
  substrate: Material;
}

/** Fractions are of the incident light, 0 to 1; arrays run along `wavelength_nm`. */
export interface FilmStackAnswer {
  wavelength_nm: number[];
  reflectance: number[];
  /** Into the substrate. */
  transmittance: number[];
  /** One array a film layer, from the light inwards. */
  absorptance: number[][];
  weighted_reflectance_percent: number;
  /** Null when the curve has no valley inside the range. */
  reflectance_minimum_nm: number | null;
  /** Photon currents; the parts add up to what is available. The cover is glass and encapsulant; without one it takes 0. */
  current_ma_cm2: {
    available: number;
    reflected: number;
    absorbed_in_cover: number;
    absorbed_in_film: number[];
    into_substrate: number;
  };
  /** Null when a material is not known over the whole visible range, 380 to 780 nm. */
  colour: { xyz: Triple; lab: Triple; hex: string; illuminant: "D65"; observer: "CIE 1931 2 degree" } | null;
}

interface StackSpectrum {
  reflectance: Float64Array;
  transmittance: Float64Array;
  absorptance: Float64Array[];
  /** Of the cover in front; zeros without one. */
  cover: Float64Array;
}

/** Rounding may carry a fraction 1e-16 beyond what a fraction can be. */
const fractions = (values: Float64Array): number[] => Array.from(values, (v) => Math.min(1, Math.max(0, v)));

/**
 * Computes a stack. Polished surfaces take any angle and polarisation; pyramids take light that comes straight down, on which
 * s and p are the same. The minimum is that of the main (quarter-wave) dip for one film, of the lowest valley for several.
 * Refuses light aslant on pyramids ("angle-on-pyramids"), wavelengths a material or the sunlight is not known at
 * ("outside-table"), and values as `stackLight`, `wavelengthGrid`, `gridWeights`, `pyramidPaths` do.
 */
export function filmStack(description: FilmStackDescription): FilmStackAnswer {
  const { light, film } = description;
  finite(light.angleDeg, "angle");
  if (description.surface.kind === "pyramids" && light.angleDeg !== 0) {
    refuse(
      "angle-on-pyramids",
      `light at ${light.angleDeg} deg on pyramids; their bounce paths are known for 0 deg only`,
      {
        hint: "use surface: polished, or angle: 0 deg",
      },
    );
  }
  const grid = wavelengthGrid(light.fromNm, light.toNm, light.stepNm);
  const weights = gridWeights(grid, light.fromNm, light.toNm, light.weight);
  const spectrum = spectrumOf(description, grid);
  return {
    wavelength_nm: Array.from(grid),
    reflectance: fractions(spectrum.reflectance),
    transmittance: fractions(spectrum.transmittance),
    absorptance: spectrum.absorptance.map(fractions),
    weighted_reflectance_percent: 100 * weightedSum(weights.average, spectrum.reflectance),
    reflectance_minimum_nm: film.length === 0 ? null : minimumOf(description, grid),
    current_ma_cm2: {
      available: weights.availableMaCm2,
      reflected: weightedSum(weights.currentMaCm2, spectrum.reflectance),
      absorbed_in_cover: weightedSum(weights.currentMaCm2, spectrum.cover),
      absorbed_in_film: spectrum.absorptance.map((layer) => weightedSum(weights.currentMaCm2, layer)),
      into_substrate: weightedSum(weights.currentMaCm2, spectrum.transmittance),
    },
    colour: colourOf(description),
  };
}

/** Of the coated surface itself, the cover taken off: glass and encapsulant make dips and steps of their own. */
function minimumOf(description: FilmStackDescription, grid: Float64Array): number | null {
  const bare = (on: Float64Array): Float64Array => spectrumOf(description, on, false).reflectance;
  const curve = (wavelengthNm: number): number => bare(Float64Array.of(wavelengthNm))[0];
  if (description.film.length > 1) return lowestMinimum(grid, bare(grid), curve);
  const [{ material, thicknessNm }] = description.film;
  return mainMinimum(grid, bare(grid), (i) => material.at(grid[i]).n * thicknessNm, curve);
}

function colourOf(description: FilmStackDescription): FilmStackAnswer["colour"] {
  const first = colourWavelengthNm[0];
  const last = colourWavelengthNm[colourWavelengthNm.length - 1];
  const materials = [description.substrate, ...description.film.map((layer) => layer.material)];
  if (materials.some(({ rangeNm }) => rangeNm[0] > first || rangeNm[1] < last)) return null;
  const { xyz, lab, hex } = seenColour(spectrumOf(description, colourWavelengthNm).reflectance);
  return { xyz, lab, hex, illuminant: "D65", observer: "CIE 1931 2 degree" };
}

/** The stack on a wavelength grid; for unpolarised light aslant, the mean of s and p. */
function spectrumOf(description: FilmStackDescription, grid: Float64Array, covered = true): StackSpectrum {
  const { polarisation, angleDeg } = description.light;
  if (polarisation !== "both") return polarised(description, grid, polarisation, covered);
  const s = polarised(description, grid, "s", covered);
  if (angleDeg === 0) return s;
  const p = polarised(description, grid, "p", covered);
  const mean = (a: Float64Array, b: Float64Array): Float64Array => a.map((value, i) => (value + b[i]) / 2);
  return {
    reflectance: mean(s.reflectance, p.reflectance),
    transmittance: mean(s.transmittance, p.transmittance),
    absorptance: s.absorptance.map((layer, j) => mean(layer, p.absorptance[j])),
    cover: mean(s.cover, p.cover),
  };
}

function polarised(
  description: FilmStackDescription,
  grid: Float64Array,
  polarisation: Polarisation,
  covered: boolean,
): StackSpectrum {
  const { light, film, surface } = description;
  const around = surroundings(description.seenFrom, grid, radians(light.angleDeg), polarisation);
  const substrate = onGrid(description.substrate, grid);
  const indices = film.map((layer) => onGrid(layer.material, grid));
  // At each bounce on pyramids the light counts as unpolarised; see surface/pyramids.ts.
  const paths = surface.kind === "pyramids" ? pyramidPaths("random", surface.facetAngleDeg) : null;
  const spectrum: StackSpectrum = {
    reflectance: new Float64Array(grid.length),
    transmittance: new Float64Array(grid.length),
    absorptance: film.map(() => new Float64Array(grid.length)),
    cover: new Float64Array(grid.length),
  };
  for (let i = 0; i < grid.length; i++) {
    const layers = film.map((layer, j) => ({ n: indices[j].n[i], k: indices[j].k[i], thicknessNm: layer.thicknessNm }));
    const one = (angleRad: number, kind: Polarisation | "both") =>
      stackLight({
        wavelengthNm: grid[i],
        angleRad,
        incidenceIndex: around.incidenceIndex[i],
        layers,
        substrate: { n: substrate.n[i], k: substrate.k[i] },
        polarisation: kind,
      });
    for (const path of paths ?? [{ anglesRad: [around.angleRad[i]], fraction: 1 }]) {
      let left = path.fraction;
      for (const angleRad of path.anglesRad) {
        const bounce = one(angleRad, paths ? "both" : polarisation);
        spectrum.transmittance[i] += left * bounce.transmittance;
        for (let j = 0; j < film.length; j++) spectrum.absorptance[j][i] += left * bounce.absorptance[j];
        left *= bounce.reflectance;
      }
      spectrum.reflectance[i] += left;
    }
    if (!around.cover || !covered) continue;
    const below = spectrum.reflectance[i];
    const { reflectance, reach } = around.cover.over(i, below);
    // What neither comes back out of the cover nor stays below it.
    spectrum.cover[i] = 1 - reflectance - reach * (1 - below);
    spectrum.reflectance[i] = reflectance;
    spectrum.transmittance[i] *= reach;
    for (const layer of spectrum.absorptance) layer[i] *= reach;
  }
  return spectrum;
}
