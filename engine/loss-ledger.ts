/**
 * Where the light goes, as current: each incident photon is reflected, absorbed in a thick layer in front, absorbed in a film
 * layer, or enters the substrate, and would there give at most one electron. `film-stack.ts` puts it in its answer.
 */
import {
  type GridWeights,
  gridWeights,
  type QuantumEfficiency,
  type SunlightWeight,
  weightedSum,
} from "./sunlight/weighting.ts";

/** Fractions of the incident light along a wavelength grid. */
export interface LightShares {
  reflectance: Float64Array;
  /** Into the substrate. */
  transmittance: Float64Array;
  /** Of each film layer, from the light inwards. */
  absorptance: readonly Float64Array[];
  /** Of each thick layer in front, outermost first; empty without them. */
  cover: readonly Float64Array[];
}

/**
 * Photon currents in mA/cm2, whatever the weight of averages. `reflected`, `absorbed_in_cover`, `absorbed_in_film` and
 * `into_substrate` add up to `available`, to rounding.
 */
export interface LossLedger {
  available: number;
  reflected: number;
  /** In all thick layers in front together; 0 without them. */
  absorbed_in_cover: number;
  /** The same one by one, outermost first. */
  absorbed_in_cover_layers: number[];
  absorbed_in_film: number[];
  into_substrate: number;
  /** What of `into_substrate` the cell's internal quantum efficiency collects; only where the weight is one. */
  collected?: number;
}

/** The ledger of light over `fromNm` to `toNm`, by the rule of `sunlight/weighting.ts`. Refuses as `gridWeights` does. */
export function lossLedger(
  shares: LightShares,
  weights: GridWeights,
  light: { fromNm: number; toNm: number; weight: SunlightWeight },
): LossLedger {
  const current = (values: Float64Array): number => weightedSum(weights.currentMaCm2, values);
  const inCover = shares.cover.map(current);
  return {
    available: weights.availableMaCm2,
    reflected: current(shares.reflectance),
    absorbed_in_cover: inCover.reduce((sum, layer) => sum + layer, 0),
    absorbed_in_cover_layers: inCover,
    absorbed_in_film: shares.absorptance.map(current),
    into_substrate: current(shares.transmittance),
    ...(typeof light.weight === "string"
      ? {}
      : {
          collected:
            weightedSum(weights.average, shares.transmittance) * perfectCurrent(light.weight, light.fromNm, light.toNm),
        }),
  };
}

/** What the quantum efficiency would collect if all light entered the substrate, mA/cm2. */
function perfectCurrent({ wavelengthNm, efficiency }: QuantumEfficiency, fromNm: number, toNm: number): number {
  return weightedSum(gridWeights(Float64Array.from(wavelengthNm), fromNm, toNm, "photons").currentMaCm2, efficiency);
}
