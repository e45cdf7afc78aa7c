/** Complex arithmetic for dielectric functions, written out: a handful of operations on two doubles. */

export interface Complex {
  readonly re: number;
  readonly im: number;
}

/** a + factor b, the factor real. */
export const sum = (a: Complex, b: Complex, factor = 1): Complex => ({
  re: a.re + factor * b.re,
  im: a.im + factor * b.im,
});

export const scaled = (a: Complex, factor: number): Complex => ({ re: factor * a.re, im: factor * a.im });

export const product = (a: Complex, b: Complex): Complex => ({
  re: a.re * b.re - a.im * b.im,
  im: a.re * b.im + a.im * b.re,
});

/** a / b; the square of b's modulus must neither overflow nor vanish. */
export function quotient(a: Complex, b: Complex): Complex {
  const square = b.re * b.re + b.im * b.im;
  return { re: (a.re * b.re + a.im * b.im) / square, im: (a.im * b.re - a.re * b.im) / square };
}

export const modulus = (a: Complex): number => Math.hypot(a.re, a.im);

/** In (-pi, pi]. */
export const angle = (a: Complex): number => Math.atan2(a.im, a.re);

/** Principal logarithm. */
export const logarithm = (a: Complex): Complex => ({ re: Math.log(modulus(a)), im: angle(a) });

/** Square root with re >= 0; the small part by division, so that no digits cancel. */
export function squareRoot(a: Complex): Complex {
  const large = Math.sqrt((modulus(a) + Math.abs(a.re)) / 2);
  if (large === 0) return { re: 0, im: 0 };
  const small = a.im / (2 * large);
  return a.re >= 0 ? { re: large, im: small } : { re: Math.abs(small), im: a.im >= 0 ? large : -large };
}
