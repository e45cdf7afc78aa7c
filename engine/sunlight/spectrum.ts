/**
 * Sunlight as the rest of the engine sees it: AM1.5 global (ASTM G173-03, the spectrum of IEC 60904-3) on its own points,
 * 280 to 1300 nm, as power and as a flux of photons.
 */
import { elementaryChargeC, lightSpeedMPerS, planckJs } from "../constants.ts";
import { am15gHalfNm, am15gOneNm } from "./data/am15g.ts";

/** Wavelengths of the spectrum's own points, nm: every 0.5 nm to 400, every 1 nm from 401 to 1300. */
export const sunlightWavelengthNm: Float64Array = Float64Array.from([
  ...am15gHalfNm.map((_, i) => 280 + i / 2),
  ...am15gOneNm.map((_, i) => 401 + i),
]);

/** Irradiance at those points, W m^-2 nm^-1. */
export const sunlightPower: Float64Array = Float64Array.from([...am15gHalfNm, ...am15gOneNm]);

/** First and last wavelength of the spectrum carried here, nm. */
export const sunlightRangeNm: readonly [number, number] = [
  sunlightWavelengthNm[0],
  sunlightWavelengthNm[sunlightWavelengthNm.length - 1],
];

/**
 * Current a cell would give if each photon of this irradiance gave one electron, mA cm^-2 nm^-1: q N = q l E / (h c).
 * `power` in W m^-2 nm^-1, wavelength in nm.
 */
export function photonCurrent(power: number, wavelengthNm: number): number {
  // 1 A/m^2 is 0.1 mA/cm^2; the wavelength comes in nm.
  return (power * wavelengthNm * 1e-9 * elementaryChargeC * 0.1) / (planckJs * lightSpeedMPerS);
}
