/**
 * The plain way to the reflectance of thin films, as an independent second route for tests and as the yardstick of the
 * benches: complex numbers as objects, a characteristic matrix a layer (Born and Wolf, Principles of Optics, section 1.6.2;
 * Abeles' matrices), one wavelength, angle and polarisation at a time. Shares nothing with the engine. N = n - ik.
 */

export interface Complex {
  re: number;
  im: number;
}

const of = (re: number, im = 0): Complex => ({ re, im });
const add = (a: Complex, b: Complex) => of(a.re + b.re, a.im + b.im);
const subtract = (a: Complex, b: Complex) => of(a.re - b.re, a.im - b.im);
const times = (a: Complex, b: Complex) => of(a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re);
const over = (a: Complex, b: Complex) => {
  const size = b.re * b.re + b.im * b.im;
  return of((a.re * b.re + a.im * b.im) / size, (a.im * b.re - a.re * b.im) / size);
};
const power = (a: Complex) => a.re * a.re + a.im * a.im;
const cosine = (a: Complex) => of(Math.cos(a.re) * Math.cosh(a.im), -Math.sin(a.re) * Math.sinh(a.im));
const sine = (a: Complex) => of(Math.sin(a.re) * Math.cosh(a.im), Math.cos(a.re) * Math.sinh(a.im));

/**
 * The square root with the imaginary part that lets a wave die inwards (negative or zero under exp(+iwt)). The larger part
 * comes from a root, the smaller from the product of the two, so that a weak absorption is not lost in a difference.
 */
function decayingRoot(a: Complex): Complex {
  const size = Math.hypot(a.re, a.im);
  if (size === 0) return of(0);
  if (a.re >= 0) {
    const re = Math.sqrt((size + a.re) / 2);
    return of(re, -Math.abs(a.im) / (2 * re));
  }
  const im = -Math.sqrt((size - a.re) / 2);
  return of(Math.abs(a.im) / (-2 * im), im);
}

/** N cos(theta) in a medium, from Snell's law: sqrt(N^2 - (n0 sin theta0)^2). */
function normalIndex(index: Complex, along: number): Complex {
  return decayingRoot(subtract(times(index, index), of(along * along)));
}

function admittance(index: Complex, normal: Complex, polarisation: "s" | "p"): Complex {
  return polarisation === "s" ? normal : over(times(index, index), normal);
}

export interface PlainLayer {
  n: number;
  k: number;
  thicknessNm: number;
}

/** Reflectance of a coherent stack; layers from the light inwards. */
export function plainReflectance(
  wavelengthNm: number,
  angleRad: number,
  incidenceIndex: number,
  layers: readonly PlainLayer[],
  substrate: { n: number; k: number },
  polarisation: "s" | "p",
): number {
  const along = incidenceIndex * Math.sin(angleRad);
  const deep = of(substrate.n, -substrate.k);
  let electric = of(1);
  let magnetic = admittance(deep, normalIndex(deep, along), polarisation);
  for (let j = layers.length - 1; j >= 0; j--) {
    const index = of(layers[j].n, -layers[j].k);
    const normal = normalIndex(index, along);
    const phase = times(normal, of((2 * Math.PI * layers[j].thicknessNm) / wavelengthNm));
    const own = admittance(index, normal, polarisation);
    const iSine = times(of(0, 1), sine(phase));
    const nextElectric = add(times(cosine(phase), electric), over(times(iSine, magnetic), own));
    magnetic = add(times(times(iSine, own), electric), times(cosine(phase), magnetic));
    electric = nextElectric;
  }
  const outside = admittance(of(incidenceIndex), normalIndex(of(incidenceIndex), along), polarisation);
  const seen = over(magnetic, electric);
  return power(over(subtract(outside, seen), add(outside, seen)));
}
