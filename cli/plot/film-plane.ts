/**
 * The film plane: index across, thickness up. Behind, the weighted reflectance in shades between round values; on it the
 * goal as a box, the last runs as letters, the film now and the film asked about with the ellipse that holds 95 % of
 * either, and the way between. Told apart by shape: the one now is a closed line, the one after is broken.
 */
import type { FilmPoint, Goal } from "../../recipes/index.ts";
import type { Look, Tone } from "../palette.ts";
import { signs } from "../palette.ts";
import { fixed } from "../text/numbers.ts";
import type { Row } from "../text/rows.ts";
import { Canvas } from "./canvas.ts";
import { ellipseAt } from "./ellipse.ts";
import { Raster } from "./raster.ts";
import { type Shading, shadeOf, shading } from "./shading.ts";
import { type Axis, place, ticks, valueAt } from "./ticks.ts";

export interface PlanePlot {
  width: number;
  height: number;
  look: Look;
  index: Axis;
  thicknessNm: Axis;
  goal: Goal;
  /** values[j][i] at thicknessNm[j], index[i]; percent. */
  grid: {
    index: readonly number[];
    thicknessNm: readonly number[];
    weightedReflectancePercent: readonly (readonly number[])[];
  };
  /** Oldest first; the newest gets the last letter. */
  runs: readonly { index: number; thicknessNm: number }[];
  now: FilmPoint | null;
  after: FilmPoint | null;
}

/** Cells kept for the labels of the thickness axis, wall included. */
export const planeMargin = 5;

/** Rows of exactly the asked size; at least 16 by 6 or nothing is drawn. */
export function planeRows(plot: PlanePlot): Row[] {
  const { width, height, look } = plot;
  if (width < 16 || height < 6) return [[{ text: "too small" }]];
  const canvas = new Canvas(width, height);
  const columns = width - planeMargin;
  const rows = height - 3;
  const shades = shading(plot.grid, plot.index, plot.thicknessNm);
  drawShades(canvas, plot, shades, columns, rows);
  drawGoal(canvas, plot, columns, rows);
  drawFilms(canvas, plot, columns, rows);
  drawAxes(canvas, plot, columns, rows);
  canvas.put(0, height - 1, legend(shades, look, width), "plain");
  return canvas.rows();
}

/** The cell of a film, column and row from the top left of the drawn area; unclamped. */
export function planeCell(plot: PlanePlot, index: number, thicknessNm: number): { column: number; row: number } {
  const columns = plot.width - planeMargin;
  const rows = plot.height - 3;
  return {
    column: planeMargin + place(plot.index, index, columns),
    row: rows - 1 - place(plot.thicknessNm, thicknessNm, rows),
  };
}

function drawShades(canvas: Canvas, plot: PlanePlot, shades: Shading | null, columns: number, rows: number): void {
  if (shades === null) return;
  for (let row = 0; row < rows; row++) {
    const thicknessNm = valueAt(plot.thicknessNm, rows - 1 - row, rows);
    for (let column = 0; column < columns; column++) {
      const mark = shadeOf(shades, valueAt(plot.index, column, columns), thicknessNm, plot.look.ascii);
      if (mark !== " ") canvas.put(planeMargin + column, row, mark, "quiet");
    }
  }
}

/** What each shade means, in the words that fit. */
function legend(shades: Shading | null, look: Look, width: number): string {
  if (shades === null) return width < 30 ? "R not known" : "weighted reflectance not known";
  const marks = look.ascii ? shades.ascii : shades.signs;
  let text = "R %";
  shades.levels.forEach((level, i) => {
    text += ` ${marks[i] === " " ? "blank" : marks[i]} ${fixed(level, shades.decimals)}`;
  });
  text += ` ${marks[shades.levels.length]}`;
  if (text.length <= width) return text;
  // Without blanks: a level between the marks of what lies below and above it; whole levels only.
  let short = "R %";
  shades.levels.forEach((level, i) => {
    const next = `${i === 0 ? " " : marks[i]}${fixed(level, shades.decimals)}`;
    if (short.length + next.length + 1 <= width) short += next;
  });
  return `${short}${marks[shades.levels.length]}`.slice(0, width);
}

/** Box signs by corner; ASCII twins `+ - |`. */
function drawGoal(canvas: Canvas, plot: PlanePlot, columns: number, rows: number): void {
  const { index, thicknessNm } = plot.goal;
  const ascii = plot.look.ascii;
  if (index === undefined && thicknessNm === undefined) return;
  const lowIndex = index === undefined ? plot.index.low : index.value - index.within;
  const highIndex = index === undefined ? plot.index.high : index.value + index.within;
  const lowNm = thicknessNm === undefined ? plot.thicknessNm.low : thicknessNm.value - thicknessNm.within;
  const highNm = thicknessNm === undefined ? plot.thicknessNm.high : thicknessNm.value + thicknessNm.within;
  const lower = planeCell(plot, lowIndex, lowNm);
  const upper = planeCell(plot, highIndex, highNm);
  const inside = (column: number, row: number) =>
    column >= planeMargin && column < planeMargin + columns && row >= 0 && row < rows;
  const put = (column: number, row: number, mark: string) => {
    if (inside(column, row)) canvas.put(column, row, mark, "goal");
  };
  for (let column = lower.column; column <= upper.column; column++) {
    put(column, lower.row, ascii ? "-" : "─");
    put(column, upper.row, ascii ? "-" : "─");
  }
  for (let row = upper.row; row <= lower.row; row++) {
    put(lower.column, row, ascii ? "|" : "│");
    put(upper.column, row, ascii ? "|" : "│");
  }
  put(lower.column, upper.row, ascii ? "+" : "┌");
  put(upper.column, upper.row, ascii ? "+" : "┐");
  put(lower.column, lower.row, ascii ? "+" : "└");
  put(upper.column, lower.row, ascii ? "+" : "┘");
  for (let row = upper.row + 1; row < lower.row; row++)
    for (let column = lower.column + 1; column < upper.column; column++)
      if (inside(column, row)) canvas.put(column, row, " ");
}

function drawFilms(canvas: Canvas, plot: PlanePlot, columns: number, rows: number): void {
  const { now, after, look } = plot;
  const way = new Raster(columns, rows);
  const nowLine = new Raster(columns, rows);
  const afterLine = new Raster(columns, rows);
  const dots = (index: number, nm: number): [number, number] => [
    ((index - plot.index.low) / (plot.index.high - plot.index.low)) * way.dotsAcross,
    ((nm - plot.thicknessNm.low) / (plot.thicknessNm.high - plot.thicknessNm.low)) * way.dotsUp,
  ];
  if (now !== null) drawEllipse(nowLine, now, dots, 1, 0);
  if (after !== null) drawEllipse(afterLine, after, dots, 2, 3);
  if (now !== null && after !== null) {
    way.line(...dots(now.index, now.thicknessNm), ...dots(after.index, after.thicknessNm), 1, 2);
  }
  const lay = (raster: Raster, mark: string, tone: Tone) => {
    for (let row = 0; row < rows; row++)
      for (let column = 0; column < columns; column++) {
        const glyph = raster.glyph(column, row, look.ascii, mark);
        if (glyph !== "") canvas.put(planeMargin + column, row, glyph, tone);
      }
  };
  lay(way, ".", "plain");
  lay(nowLine, "o", "now");
  lay(afterLine, "x", "after");
  plot.runs.forEach((run, i) => {
    mark(canvas, plot, columns, rows, run, String.fromCharCode(97 + (i % 26)), "plain");
  });
  const sign = signs(look);
  if (now !== null) mark(canvas, plot, columns, rows, now, sign.now, "now");
  if (after !== null) mark(canvas, plot, columns, rows, after, sign.after, "after");
}

function drawEllipse(
  raster: Raster,
  film: FilmPoint,
  dots: (index: number, nm: number) => [number, number],
  on: number,
  off: number,
): void {
  const turn = 96;
  let phase = 0;
  let last = dots(...ellipseAt(film, 0));
  for (let i = 1; i <= turn; i++) {
    const next = dots(...ellipseAt(film, (2 * Math.PI * i) / turn));
    phase = raster.line(...last, ...next, on, off, phase);
    last = next;
  }
}

/** A mark on its cell; outside the drawn area, an arrow on the edge that it lies beyond. */
function mark(
  canvas: Canvas,
  plot: PlanePlot,
  columns: number,
  rows: number,
  film: { index: number; thicknessNm: number },
  text: string,
  tone: Tone,
): void {
  if (!Number.isFinite(film.index) || !Number.isFinite(film.thicknessNm)) return;
  const { column, row } = planeCell(plot, film.index, film.thicknessNm);
  const atColumn = Math.min(planeMargin + columns - 1, Math.max(planeMargin, column));
  const atRow = Math.min(rows - 1, Math.max(0, row));
  const sign = signs(plot.look);
  let shown = text;
  if (row < 0) shown = sign.high;
  else if (row >= rows) shown = sign.low;
  else if (column < planeMargin) shown = sign.leftOf;
  else if (column >= planeMargin + columns) shown = sign.rightOf;
  canvas.put(atColumn, atRow, shown, tone);
}

function drawAxes(canvas: Canvas, plot: PlanePlot, columns: number, rows: number): void {
  const ascii = plot.look.ascii;
  const up = ticks(plot.thicknessNm, Math.max(2, Math.floor(rows / 2.4)));
  for (let row = 0; row < rows; row++) canvas.put(planeMargin - 1, row, ascii ? "|" : "│", "quiet");
  for (const value of up.values) {
    const row = rows - 1 - place(plot.thicknessNm, value, rows);
    // The top row belongs to the unit.
    if (row < 1 || row >= rows) continue;
    canvas.put(
      0,
      row,
      fixed(value, up.decimals)
        .padStart(planeMargin - 1)
        .slice(-(planeMargin - 1)),
    );
    canvas.put(planeMargin - 1, row, ascii ? "+" : "┤", "quiet");
  }
  canvas.put(planeMargin - 1, rows, ascii ? "+" : "└", "quiet");
  for (let column = 0; column < columns; column++) canvas.put(planeMargin + column, rows, ascii ? "-" : "─", "quiet");
  const across = ticks(plot.index, Math.max(2, Math.floor(columns / 5.5)));
  for (const value of across.values) {
    const column = planeMargin + place(plot.index, value, columns);
    const text = fixed(value, Math.max(2, across.decimals));
    const at = column - Math.floor(text.length / 2);
    if (at < planeMargin || at + text.length > plot.width) continue;
    canvas.put(column, rows, ascii ? "+" : "┬", "quiet");
    canvas.put(at, rows + 1, text);
  }
  canvas.put(planeMargin - 3, 0, "nm");
  canvas.put(0, rows + 1, "index");
}

/** The picture in one sentence, for those who do not see it. */
export function planeSummary(plot: PlanePlot): string {
  const { now, after, goal } = plot;
  const film = (point: FilmPoint) => `index ${fixed(point.index, 3)}, ${fixed(point.thicknessNm, 1)} nm`;
  const parts: string[] = [];
  if (now === null) parts.push("the film now is not known");
  else parts.push(`film now ${film(now)}${whereFrom(now, goal)}`);
  if (after !== null) parts.push(`with the settings asked about ${film(after)}${whereFrom(after, goal)}`);
  const outside = plot.runs.filter((run) => whereFrom(run, goal) !== ", inside the goal box").length;
  if (plot.runs.length > 0) parts.push(`${outside} of the last ${plot.runs.length} runs outside the goal box`);
  return `${parts.join("; ")}.`;
}

function whereFrom(film: { index: number; thicknessNm: number }, goal: Goal): string {
  const far: string[] = [];
  if (goal.index !== undefined) {
    const off = film.index - goal.index.value;
    if (Math.abs(off) > goal.index.within + 1e-9)
      far.push(`index ${fixed(Math.abs(off), 3)} ${off > 0 ? "high" : "low"}`);
  }
  if (goal.thicknessNm !== undefined) {
    const off = film.thicknessNm - goal.thicknessNm.value;
    if (Math.abs(off) > goal.thicknessNm.within + 1e-9)
      far.push(`thickness ${fixed(Math.abs(off), 1)} nm ${off > 0 ? "high" : "low"}`);
  }
  if (goal.index === undefined && goal.thicknessNm === undefined) return "";
  return far.length === 0 ? ", inside the goal box" : `, ${far.join(" and ")}`;
}
