/**
 * A quantity run by run in three lanes: above the goal, in it, below it. A lane is one row of text with four heights of
 * dots, so a glance tells which side and how far; a dot beyond the lanes becomes an arrow on the edge. Cleans are drawn
 * as a broken upright between runs.
 */
import { type Look, signs } from "../palette.ts";
import { fixed } from "../text/numbers.ts";
import type { Row } from "../text/rows.ts";
import { Canvas } from "./canvas.ts";

export interface LanePoint {
  /** NaN or null leaves a gap. */
  value: number | null;
  /** Depositions since the clean: a fall from one point to the next means that a clean lies between. */
  sinceClean: number;
  /** Believed to be a bad measurement. */
  suspect: boolean;
}

export interface LanePlot {
  width: number;
  look: Look;
  points: readonly LanePoint[];
  goal: { value: number; within: number };
}

const dots = ["⣀", "⠤", "⠒", "⠉"];
const asciiDots = ["_", "-", "=", '"'];

/** Which lane (0 above, 1 in, 2 below) and which of four heights in it; `beyond` when it lies outside the three. */
export function laneOf(
  value: number,
  goal: { value: number; within: number },
): { lane: number; height: number; beyond: boolean } {
  const inTolerances = (value - goal.value) / goal.within;
  // Three lanes of two tolerances each: from -3 to +3 tolerances. Goal edges count as inside.
  const edge = Math.abs(Math.abs(inTolerances) - 1) < 1e-9;
  const lane = edge || Math.abs(inTolerances) <= 1 ? 1 : inTolerances > 0 ? 0 : 2;
  const bottom = [1, -1, -3][lane];
  const height = Math.min(3, Math.max(0, Math.floor(((inTolerances - bottom) / 2) * 4)));
  return { lane, height, beyond: Math.abs(inTolerances) > 3 };
}

/** Three rows of exactly `width`; the newest run at the right. */
export function laneRows(plot: LanePlot): Row[] {
  const { width, look, goal } = plot;
  const canvas = new Canvas(width, 3);
  const sign = signs(look);
  for (let column = 0; column < width; column++) canvas.put(column, 1, look.ascii ? "." : "·", "quiet");
  let column = width;
  for (let i = plot.points.length - 1; i >= 0; i--) {
    column--;
    if (column < 0) break;
    const point = plot.points[i];
    if (point.value !== null && Number.isFinite(point.value)) {
      const { lane, height, beyond } = laneOf(point.value, goal);
      const dot = look.ascii ? asciiDots[height] : dots[height];
      const shown = point.suspect ? "?" : beyond ? (lane === 0 ? sign.high : sign.low) : dot;
      canvas.put(column, lane, shown, lane === 1 ? "good" : "watch");
    }
    const before = plot.points[i - 1];
    if (before !== undefined && before.sinceClean >= point.sinceClean) {
      column--;
      for (let lane = 0; lane < 3; lane++) canvas.put(column, lane, sign.clean, "plain");
    }
  }
  return canvas.rows();
}

/** The picture in one sentence. */
export function laneSummary(name: string, unit: string, decimals: number, plot: LanePlot): string {
  const seen = plot.points.filter((point) => point.value !== null && Number.isFinite(point.value));
  const last = seen.at(-1);
  if (last === undefined || last.value === null) return `${name}: not measured yet.`;
  const outside = seen.filter((point) => laneOf(point.value as number, plot.goal).lane !== 1).length;
  const shown = `${fixed(last.value, decimals)}${unit === "" ? "" : ` ${unit}`}`;
  return `${name} last read ${shown}, ${offGoal(last.value, plot.goal, unit, decimals)}; ${outside} of ${seen.length} runs outside the goal.`;
}

/** "2.9 nm low", or "in goal". */
export function offGoal(
  value: number,
  goal: { value: number; within: number },
  unit: string,
  decimals: number,
): string {
  const off = value - goal.value;
  if (Math.abs(off) <= goal.within + 1e-9) return "in goal";
  const tail = unit === "" ? "" : ` ${unit}`;
  return `${fixed(Math.abs(off), decimals)}${tail} ${off > 0 ? "high" : "low"}`;
}
