/**
 * A surface as few shades between round values, so that its contours show as the borders of shades. The table is read by
 * bilinear interpolation inside its edges and not at all outside: nothing is drawn where nothing is known.
 */
import { type Axis, ticks } from "./ticks.ts";

type Grid = {
  index: readonly number[];
  thicknessNm: readonly number[];
  weightedReflectancePercent: readonly (readonly number[])[];
};

export interface Shading {
  grid: Grid;
  /** Round values between shades, rising. */
  levels: readonly number[];
  decimals: number;
  /** One more than there are levels, lightest (lowest reflectance) first. */
  signs: readonly string[];
  ascii: readonly string[];
}

const shadeSigns = [" ", "·", "░", "▒", "▓"];
const shadeAscii = [" ", ".", ":", "%", "#"];

/** Shades over the part of the table that the axes show; null when nothing of it is shown. */
export function shading(grid: Grid, index: Axis, thicknessNm: Axis): Shading | null {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  const steps = 16;
  for (let j = 0; j <= steps; j++)
    for (let i = 0; i <= steps; i++) {
      const x = index.low + ((index.high - index.low) * i) / steps;
      const y = thicknessNm.low + ((thicknessNm.high - thicknessNm.low) * j) / steps;
      const value = surfaceAt(grid, x, y);
      if (value === null) continue;
      low = Math.min(low, value);
      high = Math.max(high, value);
    }
  if (!Number.isFinite(low)) return null;
  const { values, decimals } = levelsBetween(low, high);
  return {
    grid,
    levels: values,
    decimals,
    signs: shadeSigns.slice(0, values.length + 1),
    ascii: shadeAscii.slice(0, values.length + 1),
  };
}

/** Round values strictly inside, as many as there are shades to part; at an end they would part nothing. */
function levelsBetween(low: number, high: number): { values: number[]; decimals: number } {
  const most = shadeSigns.length - 1;
  for (let asked = most + 2; asked > 0; asked--) {
    const found = ticks({ low, high }, asked);
    const inside = found.values.filter((value) => value > low && value < high);
    if (inside.length <= most) return { values: inside, decimals: found.decimals };
  }
  return { values: [], decimals: 0 };
}

/** The shade at a film, a blank outside the table. */
export function shadeOf(shades: Shading, index: number, thicknessNm: number, ascii: boolean): string {
  const value = surfaceAt(shades.grid, index, thicknessNm);
  if (value === null) return " ";
  let level = 0;
  while (level < shades.levels.length && value >= shades.levels[level]) level++;
  return (ascii ? shades.ascii : shades.signs)[level];
}

/** Bilinear value, null outside the table or beside a hole in it. */
export function surfaceAt(grid: Grid, index: number, thicknessNm: number): number | null {
  const i = cellOf(grid.index, index);
  const j = cellOf(grid.thicknessNm, thicknessNm);
  if (i === null || j === null) return null;
  const u = (index - grid.index[i]) / (grid.index[i + 1] - grid.index[i]);
  const v = (thicknessNm - grid.thicknessNm[j]) / (grid.thicknessNm[j + 1] - grid.thicknessNm[j]);
  const z = grid.weightedReflectancePercent;
  const value = (1 - v) * ((1 - u) * z[j][i] + u * z[j][i + 1]) + v * ((1 - u) * z[j + 1][i] + u * z[j + 1][i + 1]);
  return Number.isFinite(value) ? value : null;
}

function cellOf(grid: readonly number[], value: number): number | null {
  const last = grid.length - 1;
  if (last < 1 || !(value >= grid[0]) || !(value <= grid[last])) return null;
  let i = 0;
  while (i < last - 1 && value >= grid[i + 1]) i++;
  return i;
}
