/**
 * Curves through tables: straight lines and the monotone cubic. Role: optical constants, spectra and rate tables are
 * read between their rows by these and nothing else, and never outside them.
 */
import { refuse } from "../errors.ts";

/** Value of a tabulated curve at one abscissa; refuses (`outside-table`) beyond the table's first and last row. */
export type Curve = (at: number) => number;

/**
 * Refuses a table that is not a function: lengths differ or under two rows (`bad-table`), a value that is not finite
 * (`not-a-number`), abscissae not strictly increasing (`not-increasing`). Rows count from 1.
 */
export function checkTable(x: ArrayLike<number>, y: ArrayLike<number>): void {
  if (x.length !== y.length) refuse("bad-table", `a table needs as many y as x: ${x.length} x, ${y.length} y`);
  if (x.length < 2) refuse("bad-table", `a table needs at least two rows, this one has ${x.length}`);
  for (let i = 0; i < x.length; i++) {
    if (!Number.isFinite(x[i]) || !Number.isFinite(y[i])) {
      refuse("not-a-number", `row ${i + 1} of the table is (${x[i]}, ${y[i]})`, { row: i + 1 });
    }
    if (i > 0 && x[i] <= x[i - 1]) {
      refuse("not-increasing", `x must increase: row ${i + 1} has ${x[i]} after ${x[i - 1]}`, { row: i + 1 });
    }
  }
}

/**
 * Index i of the interval [x_i, x_(i+1)] that holds `at`, by bisection, for strictly increasing x of two or more.
 * The last abscissa belongs to the last interval. Refuses (`outside-table`) when no interval holds it.
 */
export function intervalOf(x: ArrayLike<number>, at: number): number {
  const last = x.length - 1;
  // Written so that NaN is refused too.
  if (!(at >= x[0] && at <= x[last])) {
    refuse("outside-table", `${at} is outside the table, which runs from ${x[0]} to ${x[last]}`);
  }
  let low = 0;
  let high = last;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (x[middle] <= at) low = middle;
    else high = middle;
  }
  return low;
}

/** Straight lines between the rows. x strictly increasing; refuses as `checkTable`, and outside the table. */
export function piecewiseLinear(x: ArrayLike<number>, y: ArrayLike<number>): Curve {
  checkTable(x, y);
  const xs = Float64Array.from(x);
  const ys = Float64Array.from(y);
  return (at) => {
    const i = intervalOf(xs, at);
    const share = (at - xs[i]) / (xs[i + 1] - xs[i]);
    // The two-sided form returns both ends exactly.
    return ys[i] * (1 - share) + ys[i + 1] * share;
  };
}

/**
 * Cubic Hermite curve that is monotone wherever the rows are, so it never overshoots a table. Slopes start as the
 * three-point derivative and are shrunk into the circle alpha^2 + beta^2 <= 9. x strictly increasing; refuses as
 * `checkTable`, and outside the table. F. N. Fritsch and R. E. Carlson, SIAM J. Numer. Anal. 17 (1980) 238-246.
 */
export function monotoneCubic(x: ArrayLike<number>, y: ArrayLike<number>): Curve {
  checkTable(x, y);
  const xs = Float64Array.from(x);
  const ys = Float64Array.from(y);
  const slopes = monotoneSlopes(xs, ys);
  return (at) => {
    const i = intervalOf(xs, at);
    const width = xs[i + 1] - xs[i];
    const t = (at - xs[i]) / width;
    const u = 1 - t;
    return (
      u * u * (ys[i] * (1 + 2 * t) + width * t * slopes[i]) +
      t * t * (ys[i + 1] * (1 + 2 * u) - width * u * slopes[i + 1])
    );
  };
}

function monotoneSlopes(xs: Float64Array, ys: Float64Array): Float64Array {
  const last = xs.length - 1;
  const width = new Float64Array(last);
  const secant = new Float64Array(last);
  for (let i = 0; i < last; i++) {
    width[i] = xs[i + 1] - xs[i];
    secant[i] = (ys[i + 1] - ys[i]) / width[i];
  }
  const slopes = new Float64Array(last + 1);
  if (last === 1) return slopes.fill(secant[0]);
  for (let i = 1; i < last; i++) {
    // Derivative of the parabola through three rows; flat at a local extreme.
    const parabola = (secant[i - 1] * width[i] + secant[i] * width[i - 1]) / (width[i - 1] + width[i]);
    slopes[i] = secant[i - 1] * secant[i] > 0 ? parabola : 0;
  }
  slopes[0] = endSlope(width[0], width[1], secant[0], secant[1]);
  slopes[last] = endSlope(width[last - 1], width[last - 2], secant[last - 1], secant[last - 2]);
  for (let i = 0; i < last; i++) {
    if (secant[i] === 0) {
      slopes[i] = 0;
      slopes[i + 1] = 0;
      continue;
    }
    const radius = Math.hypot(slopes[i] / secant[i], slopes[i + 1] / secant[i]);
    if (radius > 3) {
      // Shrinking one interval's slopes keeps its neighbours inside their own circles: the order does not matter for
      // monotonicity.
      slopes[i] *= 3 / radius;
      slopes[i + 1] *= 3 / radius;
    }
  }
  return slopes;
}

function endSlope(width: number, nextWidth: number, secant: number, nextSecant: number): number {
  const parabola = secant + ((secant - nextSecant) * width) / (width + nextWidth);
  return parabola * secant > 0 ? parabola : 0;
}
