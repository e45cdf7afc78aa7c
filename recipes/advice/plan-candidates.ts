/**
 * The runs a plan may choose from: the recipe in force and points of a small factorial and a star about it, in values that
 * can be typed in, never outside range or window: a point that would be is drawn back to the edge, and dropped where little
 * of its move is left.
 */
import { type BeliefRows, beliefRows, type ChamberModel, type Settings } from "../../calibration/index.ts";
import type { Chamber, Goal, Line, Setting } from "../line/line.ts";
import { snapInside } from "../line/settings.ts";
import { outside } from "../line/window.ts";

/** A lever of the plan with the move that its runs make. */
export interface PlannedLever {
  name: string;
  setting: Setting;
  /** By logarithm (silane, time, ...) or straight (temperatures, and what may be zero). */
  how: "log" | "linear";
  /** The move: a fraction of the value, or canonical units where straight. */
  step: number;
}

/** A reading's noise (process and gauge) and the goal's tolerances, in index and ln thickness. */
export interface Scales {
  noise: readonly [index: number, lnThickness: number];
  tolerance: readonly [index: number, lnThickness: number];
}

/** A move should show this many times the noise of one reading in what it acts on. */
const clear = 4;
/** But not move the film by more than this many tolerances: the model is local. */
const farthest = 5;
/** Nor a setting by more than this fraction of it, or of its range where it moves straight (common practice, no source). */
const most = { log: 0.1, linear: 0.25 } as const;
/** A point drawn back to the edge keeps its place with this share of its move left. */
const leastLeft = 1 / 3;
/** Up to this many levers every combination of signs is a candidate; beyond it, pairs. */
const wholeFactorial = 4;

/** Tolerances used where the goal has none of its own: those usual on a line (common practice, no source). */
export const usualTolerance = { index: 0.02, relative: 2 / 88 } as const;

export function tolerancesOf(goal: Goal): [number, number] {
  const d = goal.thicknessNm;
  return [goal.index?.within ?? usualTolerance.index, d ? d.within / d.value : usualTolerance.relative];
}

/** The settings with levers moved by multiples of their steps; not snapped. */
export function moved(from: Settings, levers: readonly PlannedLever[], by: readonly number[]): Map<string, number> {
  const out = new Map(from);
  levers.forEach(({ name, how, step }, i) => {
    const value = from.get(name) as number;
    if (by[i] !== 0) out.set(name, how === "log" ? value * (1 + step) ** by[i] : value + by[i] * step);
  });
  return out;
}

/** The levers with the step that noise and goal suggest at these settings. */
export function plannedLevers(
  model: ChamberModel,
  from: Settings,
  settings: readonly Setting[],
  { noise, tolerance }: Scales,
): PlannedLever[] {
  return settings.map((setting): PlannedLever => {
    const { name, low, high } = setting;
    const value = from.get(name) as number;
    const how = low > 0 && value > 0 && setting.dimension !== "temperature" ? "log" : "linear";
    const unit = how === "log" ? 0.01 * value : 0.01 * (high - low);
    const effect = model.effect(from, new Map(from).set(name, value + unit));
    const cap = most[how];
    let wanted = 0;
    let allowed: number = cap;
    [effect.index, effect.lnThickness].forEach(({ mean, sd }, o) => {
      // What it may do, known or not: an effect thought to be zero is one to be looked for.
      const size = Math.hypot(mean, sd) / 0.01;
      if (size < 1e-6) return;
      wanted = Math.max(wanted, (clear * noise[o]) / size);
      allowed = Math.min(allowed, (farthest * tolerance[o]) / Math.max(Math.abs(mean) / 0.01, 1e-9));
    });
    const share = Math.min(wanted > 0 ? wanted : cap, allowed);
    const grid = setting.smallest / (how === "log" ? value : high - low);
    const rounded = Math.max(share, grid);
    return { name, setting, how, step: how === "log" ? rounded : rounded * (high - low) };
  });
}

export interface PlanCandidate {
  settings: Settings;
  /** Signs of the levers' moves, 0 for those that stay. */
  signs: readonly number[];
}

/** Candidates about a recipe inside range and window, the recipe itself first; no two alike. */
export function planCandidates(
  base: Settings,
  levers: readonly PlannedLever[],
  where: { line: Line; chamber: Chamber },
): PlanCandidate[] {
  const out: PlanCandidate[] = [{ settings: base, signs: levers.map(() => 0) }];
  const seen = new Set([keyOf(base)]);
  for (const signs of directions(levers.length)) {
    const settings = drawnIn(base, levers, signs, where);
    if (!settings || seen.has(keyOf(settings))) continue;
    seen.add(keyOf(settings));
    // Drawing back and the grid may have left a lever where it was.
    const real = levers.map(({ name }, i) => (settings.get(name) === base.get(name) ? 0 : signs[i]));
    out.push({ settings, signs: real });
  }
  return out;
}

const keyOf = (s: Settings) => [...s.values()].join(" ");

/** Star points, then the factorial's: all sign combinations of few levers, pairs of many. */
function directions(count: number): number[][] {
  const still = new Array<number>(count).fill(0);
  const out: number[][] = [];
  for (let i = 0; i < count; i++) for (const s of [1, -1]) out.push(still.with(i, s));
  if (count < 2) return out;
  for (let i = 0; i < count; i++)
    for (let j = i + 1; j < count; j++)
      for (const [a, b] of [
        [1, 1],
        [1, -1],
        [-1, 1],
        [-1, -1],
      ])
        out.push(still.with(i, a).with(j, b));
  if (count > 2 && count <= wholeFactorial)
    for (let corner = 0; corner < 2 ** count; corner++) out.push(still.map((_, i) => ((corner >> i) & 1 ? -1 : 1)));
  return out;
}

/** The point in values that can be typed in, drawn back towards the base until range and window hold it; null: too little is left. */
function drawnIn(
  base: Settings,
  levers: readonly PlannedLever[],
  signs: readonly number[],
  { line, chamber }: { line: Line; chamber: Chamber },
): Settings | null {
  for (let share = 1; share >= leastLeft; share -= 0.02) {
    const out = moved(
      base,
      levers,
      signs.map((s) => s * share),
    );
    let room = true;
    levers.forEach(({ name, setting }, i) => {
      if (signs[i] === 0) return;
      const wanted = out.get(name) as number;
      // Each lever is held to its own range first; the share draws all of them back for the window.
      const typed = snapInside(wanted, setting);
      if (Math.abs(typed - (base.get(name) as number)) < leastLeft * Math.abs(moveOf(base, levers, signs, i)))
        room = false;
      out.set(name, typed);
    });
    if (!room) return null;
    if (outside(out, chamber, line).length === 0) return out;
  }
  return null;
}

const moveOf = (base: Settings, levers: readonly PlannedLever[], signs: readonly number[], i: number) =>
  (moved(base, levers, signs).get(levers[i].name) as number) - (base.get(levers[i].name) as number);

/** Rows of a candidate run as the `at`-th of a plan. */
export const candidateRows = (model: ChamberModel, c: PlanCandidate, at: number): BeliefRows =>
  beliefRows(model, c.settings, model.k + at);
