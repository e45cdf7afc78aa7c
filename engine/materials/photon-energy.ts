/** Photon energy and vacuum wavelength, one into the other: absorption edges and oscillators are written in electronvolts. */
import { elementaryChargeC, lightSpeedMPerS, planckJs } from "../constants.ts";

/** Photon energy (eV) times vacuum wavelength (nm). */
export const energyTimesWavelengthEvNm = (1e9 * planckJs * lightSpeedMPerS) / elementaryChargeC;

/** Photon energy in eV of light of a vacuum wavelength in nm, and the other way round. */
export function photonEnergyEv(wavelengthNm: number): number {
  return energyTimesWavelengthEvNm / wavelengthNm;
}
