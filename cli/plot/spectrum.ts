/**
 * Reflectance over wavelength: the wafer now as a solid line, as asked about as a broken one, the band the film's 95 %
 * spans as a shade behind, the minimum of each marked, the goal for the minimum drawn on the axis.
 */
import type { Goal, Outlook } from "../../recipes/index.ts";
import { type Look, signs, type Tone } from "../palette.ts";
import { fixed } from "../text/numbers.ts";
import type { Row } from "../text/rows.ts";
import { Canvas } from "./canvas.ts";
import { Raster } from "./raster.ts";
import { type Axis, place, ticks } from "./ticks.ts";

export type Spectrum = NonNullable<Outlook["spectrum"]>;

export interface SpectrumPlot {
  width: number;
  height: number;
  look: Look;
  now: Spectrum | null;
  after: Spectrum | null;
  goal: Goal;
}

/** Cells kept for the labels of the reflectance axis, wall included. */
export const spectrumMargin = 4;

export function spectrumRows(plot: SpectrumPlot): Row[] {
  const { width, height, look } = plot;
  if (plot.now === null && plot.after === null) return [[{ text: "no reflectance to show: the film is not known" }]];
  if (width < 20 || height < 5) return [[{ text: "too small" }]];
  const canvas = new Canvas(width, height);
  const columns = width - spectrumMargin;
  const rows = height - 2;
  const { wavelength, percent } = axesOf(plot);
  drawBand(canvas, plot, wavelength, percent, columns, rows);
  const draw = (spectrum: Spectrum | null, on: number, off: number, mark: string, tone: Tone) => {
    if (spectrum === null) return;
    const raster = new Raster(columns, rows);
    trace(raster, spectrum, wavelength, percent, on, off);
    for (let row = 0; row < rows; row++)
      for (let column = 0; column < columns; column++) {
        const glyph = raster.glyph(column, row, look.ascii, mark);
        if (glyph !== "") canvas.put(spectrumMargin + column, row, glyph, tone);
      }
    spectrum.wavelengthNm.forEach((wavelengthNm, i) => {
      if (!(spectrum.reflectance[i] * 100 > percent.high)) return;
      const column = Math.min(columns - 1, place(wavelength, wavelengthNm, columns));
      canvas.put(spectrumMargin + column, 0, signs(look).high, tone);
    });
  };
  draw(plot.now, 1, 0, "o", "now");
  draw(plot.after, 2, 3, "x", "after");
  drawAxes(canvas, plot, wavelength, percent, columns, rows);
  return canvas.rows();
}

/** Shared axes: the wavelengths of either curve, reflectance from 0 to a round value above most of it. */
function axesOf(plot: SpectrumPlot): { wavelength: Axis; percent: Axis } {
  const curves = [plot.now, plot.after].filter((curve): curve is Spectrum => curve !== null);
  const nm = curves.flatMap((curve) => [curve.wavelengthNm[0], curve.wavelengthNm[curve.wavelengthNm.length - 1]]);
  const wavelength = { low: Math.min(...nm), high: Math.max(...nm) };
  const values = curves.flatMap((curve) => curve.reflectance.filter((r) => Number.isFinite(r))).map((r) => r * 100);
  values.sort((a, b) => a - b);
  // The steep ends would flatten the minimum, which is what one looks for: they may run out at the top, and are marked.
  const most = values[values.length - 1] ?? 1;
  const usual = values[Math.floor(values.length * 0.85)] ?? 1;
  const high = Math.max(1, Math.min(most, usual * 1.4));
  const step = high > 40 ? 10 : high > 12 ? 5 : high > 5 ? 2 : 1;
  return { wavelength, percent: { low: 0, high: Math.ceil(high / step) * step } };
}

function trace(raster: Raster, curve: Spectrum, nm: Axis, percent: Axis, on: number, off: number): void {
  let last: [number, number] | null = null;
  let phase = 0;
  curve.wavelengthNm.forEach((wavelengthNm, i) => {
    const value = curve.reflectance[i] * 100;
    if (!Number.isFinite(value)) {
      last = null;
      return;
    }
    const dot: [number, number] = [
      ((wavelengthNm - nm.low) / (nm.high - nm.low)) * (raster.dotsAcross - 1),
      ((value - percent.low) / (percent.high - percent.low)) * (raster.dotsUp - 1),
    ];
    if (last !== null) phase = raster.line(...last, ...dot, on, off, phase);
    last = dot;
  });
}

function drawBand(canvas: Canvas, plot: SpectrumPlot, nm: Axis, percent: Axis, columns: number, rows: number): void {
  const curve = plot.after ?? plot.now;
  if (curve === null) return;
  for (let column = 0; column < columns; column++) {
    const wavelengthNm = nm.low + ((column + 0.5) / columns) * (nm.high - nm.low);
    const low = at(curve.wavelengthNm, curve.low, wavelengthNm);
    const high = at(curve.wavelengthNm, curve.high, wavelengthNm);
    if (low === null || high === null) continue;
    const top = place(percent, high * 100, rows);
    for (let up = Math.max(0, place(percent, low * 100, rows)); up <= Math.min(rows - 1, top); up++)
      canvas.put(spectrumMargin + column, rows - 1 - up, plot.look.ascii ? ":" : "░", "quiet");
  }
}

/** Linear between points; null outside. */
function at(x: readonly number[], y: readonly number[], value: number): number | null {
  let i = 0;
  while (i < x.length - 2 && value > x[i + 1]) i++;
  if (!(value >= x[i]) || !(value <= x[i + 1])) return null;
  const result = y[i] + ((y[i + 1] - y[i]) * (value - x[i])) / (x[i + 1] - x[i]);
  return Number.isFinite(result) ? result : null;
}

/** Wavelength of the lowest reflectance of a curve, and the value in percent; the ends do not count as a minimum. */
export function lowest(curve: Spectrum): { wavelengthNm: number; percent: number } | null {
  let best = -1;
  for (let i = 1; i < curve.reflectance.length - 1; i++) {
    if (!Number.isFinite(curve.reflectance[i])) continue;
    if (best < 0 || curve.reflectance[i] < curve.reflectance[best]) best = i;
  }
  if (best < 0) return null;
  return { wavelengthNm: curve.wavelengthNm[best], percent: curve.reflectance[best] * 100 };
}

function drawAxes(canvas: Canvas, plot: SpectrumPlot, nm: Axis, percent: Axis, columns: number, rows: number): void {
  const ascii = plot.look.ascii;
  const up = ticks(percent, Math.max(2, Math.floor(rows / 2)));
  for (let row = 0; row < rows; row++) canvas.put(spectrumMargin - 1, row, ascii ? "|" : "│", "quiet");
  for (const value of up.values) {
    const row = Math.min(rows - 1, Math.max(0, rows - 1 - place(percent, value, rows)));
    canvas.put(0, row, fixed(value, up.decimals).padStart(spectrumMargin - 1));
    canvas.put(spectrumMargin - 1, row, ascii ? "+" : "┤", "quiet");
  }
  canvas.put(spectrumMargin - 1, rows, ascii ? "+" : "└", "quiet");
  for (let column = 0; column < columns; column++)
    canvas.put(spectrumMargin + column, rows, ascii ? "-" : "─", "quiet");
  const goal = plot.goal.reflectanceMinimumNm;
  if (goal !== undefined) {
    const from = place(nm, goal.value - goal.within, columns);
    const to = place(nm, goal.value + goal.within, columns);
    for (let c = Math.max(0, from); c <= Math.min(columns - 1, to); c++)
      canvas.put(spectrumMargin + c, rows, ascii ? "=" : "━", "goal");
  }
  const sign = signs(plot.look);
  const foot = (curve: Spectrum | null, mark: string, tone: Tone) => {
    const bottom = curve === null ? null : lowest(curve);
    if (bottom === null) return;
    const column = Math.min(columns - 1, Math.max(0, place(nm, bottom.wavelengthNm, columns)));
    canvas.put(spectrumMargin + column, rows, mark, tone);
  };
  foot(plot.now, sign.now, "now");
  foot(plot.after, sign.after, "after");
  canvas.put(0, rows + 1, "%");
  const across = ticks(nm, Math.max(2, Math.floor(columns / 7)));
  for (const value of across.values) {
    const text = fixed(value, across.decimals);
    const start = spectrumMargin + place(nm, value, columns) - Math.floor(text.length / 2);
    const end = start + text.length;
    if (start >= 2 && end <= plot.width - 3) canvas.put(start, rows + 1, text);
  }
  canvas.put(plot.width - 2, rows + 1, "nm");
}

/** The picture in one sentence. */
export function spectrumSummary(plot: SpectrumPlot): string {
  const say = (curve: Spectrum) => {
    const bottom = lowest(curve);
    if (bottom === null) return "no minimum inside the range";
    return `lowest at ${fixed(bottom.wavelengthNm, 0)} nm (${fixed(bottom.percent, 2)} %)`;
  };
  const parts: string[] = [];
  if (plot.now !== null) parts.push(`reflectance now ${say(plot.now)}`);
  if (plot.after !== null) parts.push(`with the settings asked about ${say(plot.after)}`);
  const goal = plot.goal.reflectanceMinimumNm;
  if (goal !== undefined) parts.push(`goal ${fixed(goal.value, 0)} within ${fixed(goal.within, 0)} nm`);
  return parts.length === 0 ? "no reflectance to show: the film is not known." : `${parts.join("; ")}.`;
}
