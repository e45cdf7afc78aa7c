/**
 * How long a chamber stays in goal if nothing is changed and nothing cleaned: the film's level (single runs' scatter left
 * out) followed deposition by deposition under what is believed of offset, drift and transient, with the walk of the offset,
 * on many drawn courses of the mixture; the first deposition at which a course is outside the goal is its exit. The draws
 * come from one fixed seed, so the same book always gives the same answer.
 */
import { type ChamberModel, type Courses, coursesOf, type Settings } from "../../calibration/index.ts";
import { random } from "../../engine/index.ts";
import type { Goal } from "../line/line.ts";
import type { CellLight } from "./cell-light.ts";
import { type GoalName, goalNames, isLight } from "./goal-region.ts";

/** A side of the goal that the level leaves by. */
export interface ExitSide {
  goal: GoalName;
  side: "low" | "high";
}

export interface Forecast {
  /** Chance that the level is outside already at the next deposition. */
  outNow: number;
  /**
   * Depositions from now (1 is the next) by which the level is out of goal with a chance of 5, 50 and 95 %; null beyond
   * `horizon`.
   */
  outBy: { early: number | null; half: number | null; late: number | null };
  /** The side most courses leave by, with its share of those that leave; null when under 5 % leave. */
  first: (ExitSide & { share: number }) | null;
  horizon: number;
  /** Why the goals of reflectance are not in it, or why there is no forecast. */
  cannotTell: string | null;
}

/** Depositions looked ahead. */
export const horizon = 500;
/** Courses drawn: a chance of one half comes out within 0.03 of the mixture's, 95 % (binomial). */
const drawn = 1000;

interface Asked {
  goal: Goal;
  light: CellLight;
}

/** The forecast of a chamber at settings; null where no goal can be judged. */
export function forecast(model: ChamberModel, settings: Settings, asked: Asked): Forecast | null {
  return forecastOf(coursesOf(model, settings), asked);
}

/** The same from the courses themselves. */
export function forecastOf(courses: Courses, { goal, light }: Asked): Forecast | null {
  const names = goalNames(goal).filter((name) => !isLight(name) || light.unjudged === null);
  if (names.length === 0) return null;
  const sideOut = sideOf(goal, names, light);
  const exits: number[] = [];
  const sides = new Map<string, { side: ExitSide; count: number }>();
  followed(
    courses,
    light,
    (exit, side) => {
      exits.push(exit);
      if (side === null) return;
      const key = `${side.goal} ${side.side}`;
      const known = sides.get(key) ?? { side, count: 0 };
      known.count++;
      sides.set(key, known);
    },
    sideOut,
  );
  exits.sort((a, b) => a - b);
  const by = (chance: number) => {
    const at = exits[Math.ceil(chance * exits.length) - 1];
    return at <= horizon ? at : null;
  };
  const left = exits.filter((e) => e <= horizon).length;
  const most = [...sides.values()].sort((a, b) => b.count - a.count)[0];
  return {
    outNow: exits.filter((e) => e === 1).length / exits.length,
    outBy: { early: by(0.05), half: by(0.5), late: by(0.95) },
    first: most && left >= 0.05 * exits.length ? { ...most.side, share: most.count / left } : null,
    horizon,
    cannotTell: names.length < goalNames(goal).length ? light.unjudged : null,
  };
}

type SideOut = (index: number, thicknessNm: number, facet: number) => ExitSide | null;

/** The side by which a film is outside, film goals first; null for one inside. */
function sideOf(goal: Goal, names: readonly GoalName[], light: CellLight): SideOut {
  const has = (name: GoalName) => names.includes(name);
  const around = (
    name: GoalName,
    value: number,
    aim: { value: number; within: number } | undefined,
  ): ExitSide | null =>
    aim === undefined || Math.abs(value - aim.value) <= aim.within
      ? null
      : { goal: name, side: value < aim.value ? "low" : "high" };
  const weighted = has("weighted_reflectance") ? goal.weightedReflectancePercent : undefined;
  const minimum = has("reflectance_minimum") ? goal.reflectanceMinimumNm : undefined;
  return (index, thicknessNm, facet) => {
    const film = around("index", index, goal.index) ?? around("thickness", thicknessNm, goal.thicknessNm);
    if (film || (!weighted && !minimum)) return film;
    if (minimum) {
      const at = light.minimum(index, thicknessNm * facet);
      if (at === null) return { goal: "reflectance_minimum", side: "high" };
      const out = around("reflectance_minimum", at, minimum);
      if (out) return out;
    }
    if (!weighted) return null;
    const at = light.weighted(index, thicknessNm * facet) ?? Number.POSITIVE_INFINITY;
    return at > weighted.atMost ? { goal: "weighted_reflectance", side: "high" } : null;
  };
}

/** Follows drawn courses to their exit, `horizon + 1` for those that stay. */
function followed(
  { courses, regressors }: Courses,
  { facet }: CellLight,
  tell: (exit: number, side: ExitSide | null) => void,
  sideOut: SideOut,
): void {
  const source = random("forecast");
  const along = Array.from({ length: horizon }, (_, j) => regressors(j + 1));
  const first = along[0].index.length;
  let at = 0;
  let reached = courses[0].weight;
  const total = courses.reduce((sum, c) => sum + c.weight, 0);
  for (let draw = 0; draw < drawn; draw++) {
    // Nodes by their weight, evenly spread over the draws.
    while (at < courses.length - 1 && (draw + 0.5) / drawn > reached / total) reached += courses[++at].weight;
    const { size, mean, factor, walk } = courses[at];
    const z = Array.from({ length: size }, () => source.normal());
    const numbers = Array.from({ length: size }, (_, i) => {
      let sum = mean[i];
      for (let j = 0; j <= i; j++) sum += factor[i * size + j] * z[j];
      return sum;
    });
    const ratio = facet.mean + facet.sd * source.normal();
    let [n, d] = [0, 0];
    let exit = horizon + 1;
    let side: ExitSide | null = null;
    for (let j = 0; j < horizon; j++) {
      n += walk[0] * source.normal();
      d += walk[1] * source.normal();
      const { index, lnThickness } = along[j];
      let film = n;
      let ln = d;
      for (let i = 0; i < index.length; i++) film += index[i] * numbers[i];
      for (let i = 0; i < lnThickness.length; i++) ln += lnThickness[i] * numbers[first + i];
      side = sideOut(film, Math.exp(ln), ratio);
      if (side !== null) {
        exit = j + 1;
        break;
      }
    }
    tell(exit, side);
  }
}
