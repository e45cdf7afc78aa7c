/**
 * Kramers-Kronig by plain numerical integration, the oracle of dispersion formulas: eps1(E) - eps1(infinity) =
 * (2 / pi) P int x eps2(x) / (x^2 - E^2) dx. The pole is taken out by subtraction; what is left is smooth and goes to
 * Gauss-Legendre panels. Shares nothing with the closed forms.
 */

const points = 40;

/** Nodes and weights on [-1, 1], by Newton's method on the three-term recurrence. */
const rule = Array.from({ length: points }, (_, i) => {
  let x = Math.cos((Math.PI * (i + 0.75)) / (points + 0.5));
  let slope = 0;
  for (let step = 0; step < 30; step++) {
    let [before, here] = [1, x];
    for (let k = 2; k <= points; k++) [before, here] = [here, ((2 * k - 1) * x * here - (k - 1) * before) / k];
    slope = (points * (x * here - before)) / (x * x - 1);
    x -= here / slope;
  }
  return { x, weight: 2 / ((1 - x * x) * slope * slope) };
});

function panel(f: (x: number) => number, from: number, to: number): number {
  const half = (to - from) / 2;
  return half * rule.reduce((sum, { x, weight }) => sum + weight * f(from + half * (1 + x)), 0);
}

/**
 * The integral for an eps2 that is zero below `gap` and smooth above it. `breaks` are energies around which it moves fast: panels
 * halve towards each. The tail beyond the last panel is taken in 1 / x.
 */
export function kramersKronig(
  eps2: (energy: number) => number,
  energy: number,
  gap: number,
  breaks: readonly number[],
): number {
  const f = (x: number) => x * eps2(x);
  const atPole = energy > gap ? f(energy) : 0;
  const integrand = (x: number) => (f(x) - atPole) / ((x - energy) * (x + energy));
  const far = 100 * Math.max(energy, gap, ...breaks);
  const cuts = new Set([gap, far]);
  for (const centre of [...breaks, energy, gap]) {
    if (centre >= gap) cuts.add(centre);
    for (let reach = far; reach > 1e-3; reach /= 2) {
      for (const cut of [centre - reach, centre + reach]) if (cut > gap && cut < far) cuts.add(cut);
    }
  }
  const edges = [...cuts].sort((a, b) => a - b);
  let sum = 0;
  for (let i = 1; i < edges.length; i++) sum += panel(integrand, edges[i - 1], edges[i]);
  // int from far of (f - atPole) / (x^2 - E^2) dx with x = 1 / s; the part of atPole is joined below, over the whole range
  sum += panel((s) => f(1 / s) / (1 - (energy * s) ** 2), 0, 1 / far);
  const poleFrom = (start: number) => Math.log((start + energy) / Math.abs(start - energy)) / (2 * energy);
  if (atPole !== 0) sum += atPole * (poleFrom(gap) - poleFrom(far));
  return (2 / Math.PI) * sum;
}
