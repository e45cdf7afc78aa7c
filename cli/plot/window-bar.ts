/**
 * A setting inside what the chamber may be given: a bar from the lowest to the highest value, with the value now and the
 * value asked about on it.
 */
import { type Look, signs } from "../palette.ts";
import type { Row } from "../text/rows.ts";
import { Canvas } from "./canvas.ts";

export interface BarPlot {
  width: number;
  look: Look;
  low: number;
  high: number;
  now: number;
  after: number;
}

/** One row of exactly `width` cells; a value outside shows as an arrow at that end. */
export function barRow(plot: BarPlot): Row {
  const { width, look } = plot;
  const canvas = new Canvas(width, 1);
  const sign = signs(look);
  for (let column = 0; column < width; column++) canvas.put(column, 0, look.ascii ? "-" : "─", "quiet");
  canvas.put(0, 0, look.ascii ? "[" : "├", "quiet");
  canvas.put(width - 1, 0, look.ascii ? "]" : "┤", "quiet");
  canvas.put(barCell(plot, plot.now), 0, outside(plot, plot.now) ?? sign.now, "now");
  if (Math.abs(plot.after - plot.now) > 1e-9 * Math.max(1, Math.abs(plot.now)))
    canvas.put(barCell(plot, plot.after), 0, outside(plot, plot.after) ?? sign.after, "after");
  return canvas.rows()[0] ?? [];
}

/** The cell of a value, clamped to the bar. */
export function barCell(plot: BarPlot, value: number): number {
  const share = (value - plot.low) / (plot.high - plot.low);
  return Math.min(plot.width - 1, Math.max(0, Math.round(share * (plot.width - 1))));
}

function outside(plot: BarPlot, value: number): string | null {
  const sign = signs(plot.look);
  if (value < plot.low - 1e-9) return sign.leftOf;
  return value > plot.high + 1e-9 ? sign.rightOf : null;
}
