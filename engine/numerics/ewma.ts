/**
 * The exponentially weighted moving average and its control limits. Role: the alarm on standardised innovations, and
 * the usual practice a rehearsal compares with. S. W. Roberts, Technometrics 1 (1959) 239-250; NIST/SEMATECH e-Handbook
 * of Statistical Methods, section 6.3.2.4.
 */
import { finite, refuse } from "../errors.ts";

function checkLambda(lambda: number): void {
  if (!(lambda > 0 && lambda <= 1)) refuse("bad-weight", `the weight lambda lies in (0, 1], got ${lambda}`);
}

/** z_t = lambda x_t + (1 - lambda) z_(t-1) with z_0 = start; one result per value, z_0 not among them. */
export function ewma(values: ArrayLike<number>, lambda: number, start: number): Float64Array {
  checkLambda(lambda);
  const averages = new Float64Array(values.length);
  let z = finite(start, "the start of the average");
  for (let i = 0; i < values.length; i++) {
    z += lambda * (finite(values[i], `value ${i + 1}`) - z);
    averages[i] = z;
  }
  return averages;
}

/** Control limits in the unit of the values. */
export interface EwmaLimits {
  readonly lower: number;
  readonly upper: number;
}

/**
 * centre +- width x sd x sqrt(lambda/(2 - lambda) x (1 - (1 - lambda)^(2 t))) after t values; t = Infinity (default)
 * gives the limits of a long series. sd is that of one value; width in standard deviations, usually 3.
 */
export function ewmaLimits(
  centre: number,
  sd: number,
  lambda: number,
  width = 3,
  t = Number.POSITIVE_INFINITY,
): EwmaLimits {
  checkLambda(lambda);
  if (!(sd >= 0) || !(width > 0) || !(t >= 1)) refuse("out-of-domain", `sd ${sd}, width ${width}, after ${t} values`);
  const half = width * sd * Math.sqrt((lambda / (2 - lambda)) * (1 - (1 - lambda) ** (2 * t)));
  return { lower: finite(centre, "the centre") - half, upper: centre + half };
}
