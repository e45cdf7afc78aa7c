/**
 * Constants of nature and of the trade that more than one file of the engine needs.
 * The first three are exact by definition of the SI (BIPM, 9th SI brochure, 2019).
 */

/** Planck constant, J s. */
export const planckJs = 6.62607015e-34;
/** Speed of light in vacuum, m/s. */
export const lightSpeedMPerS = 299_792_458;
/** Elementary charge, C. */
export const elementaryChargeC = 1.602176634e-19;

/** The wavelength at which an index is quoted in this trade, nm: the red helium-neon line of ellipsometers. */
export const indexWavelengthNm = 632.8;

/** Facet angle of upright alkaline-etched pyramids on (100) silicon, degrees: atan(sqrt 2), between (100) and (111) planes. */
export const crystalFacetAngleDeg = (Math.atan(Math.SQRT2) * 180) / Math.PI;

/** Degrees to radians. */
export function radians(angleDeg: number): number {
  return (angleDeg * Math.PI) / 180;
}

/** Radians to degrees. */
export function degrees(angleRad: number): number {
  return (angleRad * 180) / Math.PI;
}
