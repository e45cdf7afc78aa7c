/** The wavelength grid a wafer or a stack is computed on. */
import { finite, refuse } from "./errors.ts";

/** Most points a grid may have: 0.5 nm steps over the whole spectrum, with room. */
const mostPoints = 5000;

/**
 * Wavelengths fromNm, fromNm + stepNm, ... up to toNm, which is always the last point even when the step does not divide the
 * range. Refuses a range that does not increase ("range-order"), a step that is not positive or gives over 5000 points
 * ("range-step"), and numbers that are not finite ("not-a-number").
 */
export function wavelengthGrid(fromNm: number, toNm: number, stepNm: number): Float64Array {
  for (const [name, value] of Object.entries({ from: fromNm, to: toNm, step: stepNm }))
    finite(value, `wavelength ${name}`);
  if (!(fromNm > 0 && fromNm < toNm))
    refuse("range-order", `wavelength range ${fromNm} to ${toNm} nm does not increase`);
  if (stepNm <= 0) refuse("range-step", `wavelength step ${stepNm} nm is not positive`);
  const steps = Math.ceil((toNm - fromNm) / stepNm - 1e-9);
  if (steps + 1 > mostPoints) refuse("range-step", `${steps + 1} wavelengths; at most ${mostPoints} are computed`);
  return Float64Array.from({ length: steps + 1 }, (_, i) => (i === steps ? toNm : fromNm + i * stepNm));
}
