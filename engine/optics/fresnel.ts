/**
 * One flat interface, in plain numbers: no complex objects, because the stack code calls this tens of thousands of times.
 *
 * Convention: N = n - ik, time factor exp(+iwt). Inside a medium light goes as exp(-i 2 pi q z / lambda) with
 * q = N cos(theta) = sqrt(N^2 - (n0 sin theta0)^2), and the root is the one in the fourth quadrant (Re q >= 0, Im q <= 0):
 * the wave that travels onwards and dies out, which also is right for total internal reflection (q = -i|q|).
 * The admittance that matches tangential fields is q for s light and N^2 / q for p light (Born and Wolf, Principles of Optics,
 * 7th ed., section 1.6).
 */

/**
 * Least |q^2|. Exactly at the critical angle q = 0 and the p admittance N^2 / q is infinite; this much more is an angle off by
 * under 1e-12 rad, and costs 1e-10 in the balance of powers there and nothing elsewhere.
 */
const smallestSquare = 1e-12;

/**
 * Writes Re q, Im q of a medium with index n - ik at `out[at]`, `out[at + 1]`. `along` is (n0 sin theta0)^2, dimensionless.
 */
export function writeNormalIndex(n: number, k: number, along: number, out: Float64Array, at: number): void {
  if (along === 0 && n > 0) {
    // Straight down q is the index itself.
    out[at] = n;
    out[at + 1] = k === 0 ? 0 : -k;
    return;
  }
  const re = n * n - k * k - along;
  const im = -2 * n * k;
  const size = Math.sqrt(re * re + im * im);
  if (size < smallestSquare) {
    out[at] = Math.sqrt(smallestSquare);
    out[at + 1] = 0;
  } else if (re >= 0) {
    // The larger part by the root, the other by division: no cancellation at small k.
    const root = Math.sqrt((size + re) / 2);
    out[at] = root;
    out[at + 1] = im === 0 ? 0 : im / (2 * root);
  } else {
    const root = Math.sqrt((size - re) / 2);
    out[at] = im === 0 ? 0 : -im / (2 * root);
    out[at + 1] = -root;
  }
}

export type Polarisation = "s" | "p";

/**
 * Writes the Fresnel reflection coefficient (a - b)/(a + b) of light going from medium a to medium b at `out[at]`
 * (real part) and `out[at + 1]`; a and b stand for the admittances of the polarisation. Media are given by n, k and q.
 * The p form is multiplied out by both q, which saves two complex divisions.
 */
export function writeReflection(
  polarisation: Polarisation,
  na: number,
  ka: number,
  qaRe: number,
  qaIm: number,
  nb: number,
  kb: number,
  qbRe: number,
  qbIm: number,
  out: Float64Array,
  at: number,
): void {
  let aRe = qaRe;
  let aIm = qaIm;
  let bRe = qbRe;
  let bIm = qbIm;
  if (polarisation === "p") {
    const ea = na * na - ka * ka;
    const fa = -2 * na * ka;
    const eb = nb * nb - kb * kb;
    const fb = -2 * nb * kb;
    aRe = ea * qbRe - fa * qbIm;
    aIm = ea * qbIm + fa * qbRe;
    bRe = eb * qaRe - fb * qaIm;
    bIm = eb * qaIm + fb * qaRe;
  }
  const downRe = aRe + bRe;
  const downIm = aIm + bIm;
  const size = downRe * downRe + downIm * downIm;
  const upRe = aRe - bRe;
  const upIm = aIm - bIm;
  out[at] = (upRe * downRe + upIm * downIm) / size;
  out[at + 1] = (upIm * downRe - upRe * downIm) / size;
}
