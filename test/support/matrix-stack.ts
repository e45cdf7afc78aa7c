/**
 * A second way to the optics of a stack: the characteristic matrices of Abeles multiplied out with complex numbers, as the
 * textbooks print them (Born and Wolf, Principles of Optics, 1.6). Slow, plain, and it overflows for thick absorbers; an oracle for the engine's
 * recursive code and written without looking at it. Convention N = n - ik, exp(+iwt).
 */

export type Complex = readonly [number, number];

export const add = (a: Complex, b: Complex): Complex => [a[0] + b[0], a[1] + b[1]];
export const subtract = (a: Complex, b: Complex): Complex => [a[0] - b[0], a[1] - b[1]];
export const times = (a: Complex, b: Complex): Complex => [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]];
export const over = (a: Complex, b: Complex): Complex => {
  const size = b[0] * b[0] + b[1] * b[1];
  return [(a[0] * b[0] + a[1] * b[1]) / size, (a[1] * b[0] - a[0] * b[1]) / size];
};
const squared = (a: Complex): number => a[0] * a[0] + a[1] * a[1];

/** Square root in the fourth quadrant: the wave goes on and dies out. */
function root(a: Complex): Complex {
  const size = Math.sqrt(Math.sqrt(squared(a)));
  const half = Math.atan2(a[1], a[0]) / 2;
  const r: Complex = [size * Math.cos(half), size * Math.sin(half)];
  return r[1] > 1e-14 * size || r[0] < -1e-14 * size ? [-r[0], -r[1]] : r;
}
const cosine = (a: Complex): Complex => [Math.cos(a[0]) * Math.cosh(a[1]), -Math.sin(a[0]) * Math.sinh(a[1])];
const sine = (a: Complex): Complex => [Math.sin(a[0]) * Math.cosh(a[1]), Math.cos(a[0]) * Math.sinh(a[1])];

export interface MatrixQuestion {
  wavelengthNm: number;
  angleRad: number;
  incidenceIndex: number;
  layers: readonly { n: number; k: number; thicknessNm: number }[];
  substrate: { n: number; k: number };
}

/** R, T, and the absorptance of each layer, as fractions, for one polarisation. */
export function matrixStack(question: MatrixQuestion, polarisation: "s" | "p"): { R: number; T: number; A: number[] } {
  const along = question.incidenceIndex * Math.sin(question.angleRad);
  const admittance = (index: Complex): { q: Complex; y: Complex } => {
    const square = times(index, index);
    const q = root(subtract(square, [along * along, 0]));
    return { q, y: polarisation === "s" ? q : over(square, q) };
  };
  const y0 = admittance([question.incidenceIndex, 0]).y;
  const ys = admittance([question.substrate.n, -question.substrate.k]).y;
  // Tangential fields (E, H) at the substrate for E = 1 there, then up through each layer.
  let e: Complex = [1, 0];
  let h: Complex = ys;
  const powers = [e[0] * h[0] + e[1] * h[1]];
  for (const layer of [...question.layers].reverse()) {
    const { q, y } = admittance([layer.n, -layer.k]);
    const phase = times(q, [(2 * Math.PI * layer.thicknessNm) / question.wavelengthNm, 0]);
    const c = cosine(phase);
    const is = times([0, 1], sine(phase));
    [e, h] = [add(times(c, e), times(over(is, y), h)), add(times(times(is, y), e), times(c, h))];
    powers.push(e[0] * h[0] + e[1] * h[1]);
  }
  const incident = over(add(times(y0, e), h), times([2, 0], y0));
  const r = over(subtract(times(y0, e), h), add(times(y0, e), h));
  const scale = y0[0] * squared(incident);
  const A = question.layers.map((_, j) => {
    const fromBelow = question.layers.length - 1 - j;
    return (powers[fromBelow + 1] - powers[fromBelow]) / scale;
  });
  return { R: squared(r), T: powers[0] / scale, A };
}
