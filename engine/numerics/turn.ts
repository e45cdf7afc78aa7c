/**
 * Sine and cosine of one angle together, for the inner loops of the optics: about half the cost of asking the library for one
 * after the other, because the angle is brought near zero once. Error under 2.3e-16, the last digit of a number near 1.
 *
 * The angle is brought within pi/4 of a multiple of pi/2 by subtracting pi/2 in three parts (the first two short, so that
 * their products are exact); there Taylor's series to x^15 and x^16 leave less than 5e-17. Pairs of terms are worked out side
 * by side (Estrin), which a processor does faster than one after the other. Angles beyond what the subtraction can carry are
 * left to the library.
 */

/** Writes cos at `out[at]` and sin at `out[at + 1]` of an angle in radians; NaN of what is not finite. */
export function writeTurn(angleRad: number, out: Float64Array, at: number): void {
  // The numbers stand in the code, not in names: read from names they would be fetched anew for every angle.
  if (!(angleRad < 3e5 && angleRad > -3e5)) {
    out[at] = Math.cos(angleRad);
    out[at + 1] = Math.sin(angleRad);
    return;
  }
  const quarters = Math.floor(angleRad * 0.6366197723675814 + 0.5);
  // pi/2 = 33 bits + 33 bits + the rest.
  const x =
    angleRad - quarters * 1.5707963267341256 - quarters * 6.077100506303966e-11 - quarters * 2.0222662487959506e-21;
  const y = x * x;
  const y2 = y * y;
  const y4 = y2 * y2;
  const sine =
    x +
    x *
      y *
      (-1 / 6 +
        (1 / 120) * y +
        (-1 / 5040 + (1 / 362880) * y) * y2 +
        (-1 / 39916800 + (1 / 6227020800) * y - (1 / 1307674368000) * y2) * y4);
  const cosine =
    1 +
    y *
      (-1 / 2 +
        (1 / 24) * y +
        (-1 / 720 + (1 / 40320) * y) * y2 +
        (-1 / 3628800 + (1 / 479001600) * y + (-1 / 87178291200 + (1 / 20922789888000) * y) * y2) * y4);
  // Odd quarters swap the two; the products with 0 and 1 are exact, and there is no branch to guess wrong.
  const swap = quarters & 1;
  const keep = 1 - swap;
  out[at] = (1 - ((quarters + 1) & 2)) * (keep * cosine + swap * sine);
  out[at + 1] = (1 - (quarters & 2)) * (keep * sine + swap * cosine);
}
