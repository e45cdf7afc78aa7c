/**
 * What part of the film plane to show: the goal with room around it, the film now, the proposed one, and the last runs.
 * It follows from what is on record only, never from a what-if, so the picture stands still while settings are tried.
 */
import type { FilmPoint, Goal } from "../../recipes/index.ts";
import { ellipseHalf } from "./ellipse.ts";
import type { Axis } from "./ticks.ts";

export interface RangeFrom {
  goal: Goal;
  films: readonly (FilmPoint | null)[];
  runs: readonly { index: number; thicknessNm: number }[];
}

/** Room on each side of the goal, in tolerances; less and a film just outside would stick to the edge. */
const roomInTolerances = 3;
/** How far, in tolerances, something may pull the range; farther things are marked on the edge. */
const reachInTolerances = 9;

export function planeRange(from: RangeFrom): { index: Axis; thicknessNm: Axis } {
  const index = from.goal.index ?? { value: middle(from, "index") ?? 2.06, within: 0.02 };
  const thickness = from.goal.thicknessNm ?? { value: middle(from, "thicknessNm") ?? 80, within: 2 };
  const indexMarks: number[] = [];
  const thicknessMarks: number[] = [];
  for (const film of from.films) {
    if (film === null) continue;
    const half = ellipseHalf(film);
    indexMarks.push(film.index - half.index, film.index + half.index);
    thicknessMarks.push(film.thicknessNm - half.thicknessNm, film.thicknessNm + half.thicknessNm);
  }
  for (const run of from.runs) {
    indexMarks.push(run.index);
    thicknessMarks.push(run.thicknessNm);
  }
  return { index: span(index, indexMarks), thicknessNm: span(thickness, thicknessMarks) };
}

function span(goal: { value: number; within: number }, marks: readonly number[]): Axis {
  const reach = {
    low: goal.value - reachInTolerances * goal.within,
    high: goal.value + reachInTolerances * goal.within,
  };
  let low = goal.value - roomInTolerances * goal.within;
  let high = goal.value + roomInTolerances * goal.within;
  for (const mark of marks) {
    if (!Number.isFinite(mark)) continue;
    low = Math.min(low, Math.max(reach.low, mark - goal.within / 2));
    high = Math.max(high, Math.min(reach.high, mark + goal.within / 2));
  }
  return { low, high };
}

function middle(from: RangeFrom, key: "index" | "thicknessNm"): number | null {
  const film = from.films.find((one) => one !== null);
  if (film !== undefined && film !== null) return film[key];
  const run = from.runs.at(-1);
  return run === undefined ? null : run[key];
}
