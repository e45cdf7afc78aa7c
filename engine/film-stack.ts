/**
 * Optics of any stack of films, as the `film` verb shows them: spectra, weighted reflectance, minimum, currents and colour in
 * the shape of that verb's machine-readable answer. General and plain; the fast path for one nitride film is `wafer.ts`.
 */
import { seenColour } from "./colour/lab.ts";
import { colourWavelengthNm, type Triple } from "./colour/observer.ts";
import { radians } from "./constants.ts";
import { finite, refuse } from "./errors.ts";
import { type LightShares, type LossLedger, lossLedger } from "./loss-ledger.ts";
import { extrapolationSentence } from "./materials/extrapolate.ts";
import { type Material, onGrid } from "./materials/material.ts";
import type { NitrideMaterial } from "./materials/nitride-family.ts";
import type { Polarisation } from "./optics/fresnel.ts";
import { lowestMinimum, mainMinimum } from "./optics/reflectance-minimum.ts";
import { stackLight } from "./optics/stack.ts";
import { gridWeights, type SunlightWeight, weightedSum } from "./sunlight/weighting.ts";
import { coverLight, uncovered } from "./surface/cover.ts";
import { type Arrangement, pyramidPaths } from "./surface/pyramids.ts";
import { type SeenFrom, thickLayersOf } from "./surface/seen-from.ts";
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
  surface: { kind: "polished" } | { kind: "pyramids"; facetAngleDeg: number; arrangement?: Arrangement };
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
  /** Photon currents, see `loss-ledger.ts`. */
  current_ma_cm2: LossLedger;
  /** Null when a material is not known over the whole visible range, 380 to 780 nm. */
  colour: { xyz: Triple; lab: Triple; hex: string; illuminant: "D65"; observer: "CIE 1931 2 degree" } | null;
  /** A sentence for each material used beyond the wavelengths it is known at; empty when none is. */
  extrapolated: string[];
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
    current_ma_cm2: lossLedger(spectrum, weights, light),
    colour: colourOf(description),
    extrapolated: extrapolationsOf(description),
  };
}

/** All materials the light meets, in its order. */
function materialsOf({ seenFrom, film, substrate }: FilmStackDescription): Material[] {
  return [...(thickLayersOf(seenFrom) ?? []), ...film].map((layer) => layer.material).concat(substrate);
}

/** What was used beyond its range for light of this range, each said once. */
function extrapolationsOf(description: FilmStackDescription): string[] {
  const { light } = description;
  const said = materialsOf(description).flatMap((material) => [
    extrapolationSentence(material, light.fromNm, light.toNm),
    beyondMembers(material),
  ]);
  return [...new Set(said.filter((sentence) => sentence !== null))];
}

/** A nitride whose index lies beyond those that were measured. */
function beyondMembers(material: Material | NitrideMaterial): string | null {
  if (!("extrapolated" in material && material.extrapolated)) return null;
  return `${material.name} of index ${material.index} lies beyond the films measured; their trend is carried on`;
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
  if (materialsOf(description).some(({ rangeNm }) => rangeNm[0] > first || rangeNm[1] < last)) return null;
  const { xyz, lab, hex } = seenColour(spectrumOf(description, colourWavelengthNm).reflectance);
  return { xyz, lab, hex, illuminant: "D65", observer: "CIE 1931 2 degree" };
}

/** The stack on a wavelength grid; for unpolarised light aslant, the mean of s and p. */
function spectrumOf(description: FilmStackDescription, grid: Float64Array, covered = true): LightShares {
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
    cover: s.cover.map((layer, j) => mean(layer, p.cover[j])),
  };
}

function polarised(
  description: FilmStackDescription,
  grid: Float64Array,
  polarisation: Polarisation,
  covered: boolean,
): LightShares {
  const { light, film, surface, seenFrom } = description;
  const angleRad = radians(light.angleDeg);
  const paths =
    surface.kind === "pyramids" ? pyramidPaths(surface.arrangement ?? "random", surface.facetAngleDeg) : null;
  const exitsRad = paths ? paths.map((path) => path.exitRad ?? 0) : "mirror";
  const whole = coverLight({ seenFrom, wavelengthNm: grid, exitsRad, angleRad, polarisation });
  const cover = covered ? whole : uncovered(whole);
  const substrate = onGrid(description.substrate, grid);
  const indices = film.map((layer) => onGrid(layer.material, grid));
  const arrays = (many: number) => Array.from({ length: many }, () => new Float64Array(grid.length));
  const [reflectance, transmittance] = arrays(2);
  const absorptance = arrays(film.length);
  const inCover = arrays(cover.layers);
  for (let i = 0; i < grid.length; i++) {
    const layers = film.map((layer, j) => ({ n: indices[j].n[i], k: indices[j].k[i], thicknessNm: layer.thicknessNm }));
    const one = (bounceRad: number, kind: Polarisation | "both") =>
      stackLight({
        wavelengthNm: grid[i],
        angleRad: bounceRad,
        incidenceIndex: cover.innerIndex[i],
        layers,
        substrate: { n: substrate.n[i], k: substrate.k[i] },
        polarisation: kind,
      });
    /** Of the light that reaches the surface once: what goes up each way, and what of it leaves and comes down again. */
    const upwards: number[] = [];
    let leaving = 0;
    let returning = 0;
    (paths ?? [{ anglesRad: [cover.innerAngleRad[i]], fraction: 1 }]).forEach((path, way) => {
      let left = path.fraction;
      for (const bounceRad of path.anglesRad) {
        // At each bounce on pyramids the light counts as unpolarised; see surface/pyramids.ts.
        const bounce = one(bounceRad, paths ? "both" : polarisation);
        transmittance[i] += left * bounce.transmittance;
        for (let j = 0; j < film.length; j++) absorptance[j][i] += left * bounce.absorptance[j];
        left *= bounce.reflectance;
      }
      upwards.push(left);
      leaving += left * cover.leaves[way][i];
      returning += left * cover.returns[way][i];
    });
    // All the light that reaches the surface, first and later passes added.
    const reach = cover.enters[i] / (1 - returning);
    reflectance[i] = cover.front[i] + reach * leaving;
    transmittance[i] *= reach;
    for (const layer of absorptance) layer[i] *= reach;
    inCover.forEach((layer, j) => {
      const onTheWayOut = upwards.reduce((sum, up, way) => sum + up * cover.absorbedLeaving[way][j][i], 0);
      layer[i] = cover.absorbedGoingIn[j][i] + reach * onTheWayOut;
    });
  }
  return { reflectance, transmittance, absorptance, cover: inCover };
}
