/**
 * Minimum of a function of several variables inside a box, without derivatives. Role: few-dimensional searches whose
 * function has kinks (limits, rounded settings) that a Newton step cannot see. J. A. Nelder and R. Mead, Computer
 * Journal 7 (1965) 308-313 (from memory); points outside the box are moved to its wall. Deterministic.
 */
import { refuse } from "../errors.ts";

/** Where the search ended. */
export interface BoxMinimum {
  readonly x: Float64Array;
  readonly value: number;
  readonly evaluations: number;
  /** False when `maxEvaluations` ended it. */
  readonly converged: boolean;
}

/** Choices of the search. */
export interface NelderMeadOptions {
  /** First step in each variable as a share of its interval; default 0.1. */
  firstStep?: number;
  /** Ends when the simplex is within this share of every interval; default 1e-7. */
  tolerance?: number;
  /** Default 400 per variable. */
  maxEvaluations?: number;
}

interface Vertex {
  x: Float64Array;
  value: number;
}

/**
 * A local minimum of f on lower <= x <= upper (finite, lower < upper, else `bad-bounds`) from `start`, by a simplex
 * that is rebuilt once around its first answer, because a simplex may flatten against a wall. NaN counts as +Infinity on the way and is refused at the start
 * (`not-a-number`).
 */
export function nelderMead(
  f: (x: Float64Array) => number,
  start: ArrayLike<number>,
  lower: ArrayLike<number>,
  upper: ArrayLike<number>,
  options: NelderMeadOptions = {},
): BoxMinimum {
  const n = start.length;
  if (n < 1 || lower.length !== n || upper.length !== n) {
    refuse("bad-bounds", `${n} variables, ${lower.length} lower and ${upper.length} upper bounds`);
  }
  for (let j = 0; j < n; j++) {
    if (!(lower[j] < upper[j]) || !Number.isFinite(upper[j] - lower[j]) || !Number.isFinite(start[j])) {
      refuse("bad-bounds", `variable ${j + 1} starts at ${start[j]} and runs from ${lower[j]} to ${upper[j]}`);
    }
  }
  const most = options.maxEvaluations ?? 400 * n;
  const tolerance = options.tolerance ?? 1e-7;
  let evaluations = 0;
  const vertexAt = (x: Float64Array): Vertex => {
    for (let j = 0; j < n; j++) x[j] = Math.min(upper[j], Math.max(lower[j], x[j]));
    evaluations++;
    const value = f(x);
    return { x, value: Number.isNaN(value) ? Infinity : value };
  };
  const simplexAround = (centre: Vertex, share: number): Vertex[] => {
    const simplex = [centre];
    for (let j = 0; j < n; j++) {
      const x = Float64Array.from(centre.x);
      const step = share * (upper[j] - lower[j]);
      // Away from the nearer wall.
      x[j] += x[j] - lower[j] > upper[j] - x[j] ? -step : step;
      simplex.push(vertexAt(x));
    }
    return simplex;
  };
  const isSmall = (simplex: Vertex[]) =>
    simplex.every(({ x }) => x.every((v, j) => Math.abs(v - simplex[0].x[j]) <= tolerance * (upper[j] - lower[j])));

  let best = vertexAt(Float64Array.from(start));
  if (best.value === Infinity) refuse("not-a-number", "the function to minimise has no value at the start");
  let converged = false;
  for (let round = 0; round < 2; round++) {
    const simplex = simplexAround(best, (options.firstStep ?? 0.1) * (round === 0 ? 1 : 0.25));
    converged = false;
    while (evaluations < most) {
      simplex.sort((p, q) => p.value - q.value);
      if (isSmall(simplex)) {
        converged = true;
        break;
      }
      improve(simplex, vertexAt);
    }
    simplex.sort((p, q) => p.value - q.value);
    best = simplex[0];
    if (!converged) break;
  }
  return { x: Float64Array.from(best.x), value: best.value, evaluations, converged };
}

/** One move of a sorted simplex: reflect, then expand, contract or shrink. */
function improve(simplex: Vertex[], vertexAt: (x: Float64Array) => Vertex): void {
  const n = simplex.length - 1;
  const worst = simplex[n];
  const centre = new Float64Array(n);
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) centre[j] += simplex[i].x[j] / n;
  const along = (factor: number) => vertexAt(centre.map((c, j) => c + factor * (worst.x[j] - c)));
  const reflected = along(-1);
  if (reflected.value < simplex[0].value) {
    const expanded = along(-2);
    simplex[n] = expanded.value < reflected.value ? expanded : reflected;
    return;
  }
  if (reflected.value < simplex[n - 1].value) {
    simplex[n] = reflected;
    return;
  }
  const contracted = reflected.value < worst.value ? along(-0.5) : along(0.5);
  if (contracted.value < Math.min(reflected.value, worst.value)) {
    simplex[n] = contracted;
    return;
  }
  for (let i = 1; i <= n; i++) simplex[i] = vertexAt(simplex[i].x.map((v, j) => (v + simplex[0].x[j]) / 2));
}
