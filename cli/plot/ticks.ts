/**
 * Round values for axes, and the axis itself as a map from values to dots. All tick labels of an axis have the same
 * number of decimals.
 */

export interface Axis {
  low: number;
  high: number;
}

/** Round steps 1, 2, 5 times a power of ten: the largest number of ticks not above `most`, all inside the axis. */
export function ticks(axis: Axis, most: number): { values: number[]; decimals: number } {
  const span = axis.high - axis.low;
  if (!(span > 0) || most < 1) return { values: [], decimals: 0 };
  const rough = span / Math.max(1, most);
  const power = 10 ** Math.floor(Math.log10(rough) + 1e-9);
  for (const factor of [1, 2, 5, 10, 20]) {
    const step = factor * power;
    const first = Math.ceil(axis.low / step - 1e-9);
    const last = Math.floor(axis.high / step + 1e-9);
    if (last - first + 1 > most) continue;
    const decimals = Math.max(0, -Math.floor(Math.log10(step) + 1e-9));
    const values: number[] = [];
    for (let i = first; i <= last; i++) values.push(Number((i * step).toFixed(decimals + 2)));
    return { values, decimals };
  }
  return { values: [], decimals: 0 };
}

/** Position of a value on `count` cells or dots: 0 is the low end's cell, count - 1 the high end's. Not clamped. */
export function place(axis: Axis, value: number, count: number): number {
  return Math.floor(((value - axis.low) / (axis.high - axis.low)) * count);
}

/** The value at the middle of a cell or dot. */
export function valueAt(axis: Axis, position: number, count: number): number {
  return axis.low + ((position + 0.5) / count) * (axis.high - axis.low);
}
