/**
 * Where a plan wants the chamber to be known: the goal box, seen as settings. Every film of the box can be laid in many
 * ways, so the levers go through their moves and time and gas ratio bring the film back to a point of the box; an effect that
 * no run has shown counts there, because a recipe that used it would have to be foretold. Deterministic.
 */
import { type Belief, type BeliefRows, beliefRows, type ChamberModel, type Settings } from "../../calibration/index.ts";
import type { Chamber, Goal, Line } from "../line/line.ts";
import { outside } from "../line/window.ts";
import { addMoments } from "./design.ts";
import { moved, type PlannedLever, type Scales } from "./plan-candidates.ts";

export interface GoalBox {
  /** Mean of h h' over the box, index and ln thickness each in units of its tolerance squared. */
  region: Float64Array;
  /** Settings looked at, inside the window. */
  points: number;
}

/** Points tried: with twice as many the mean moved by under 2 %, with eight times by under 1 % (measured on the demo line). */
const tried = 64;
/** Newton steps to bring a film back to its point of the box; they left under 1e-6 of index and of thickness (measured on the demo line). */
const corrections = 4;

/** Mean film that a belief expects: index, ln thickness. */
export function meanFilm(belief: Belief, { index, lnThickness, known }: BeliefRows): [number, number] {
  let [n, d] = [0, known];
  for (let i = 0; i < belief.n; i++) {
    n += index[i] * belief.mean[i];
    d += lnThickness[i] * belief.mean[i];
  }
  return [n, d];
}

/** The goal box about the settings that reach the goal, `k` depositions after the clean. */
export function goalBox(
  model: ChamberModel,
  belief: Belief,
  at: Settings,
  levers: readonly PlannedLever[],
  context: { goal: Goal; line: Line; chamber: Chamber; scales: Scales; k: number },
): GoalBox {
  const { goal, line, chamber, scales, k } = context;
  const region = new Float64Array(belief.n ** 2);
  const film = (s: Settings) => meanFilm(belief, beliefRows(model, s, k));
  const [n0, d0] = film(at);
  const aim = [goal.index?.value ?? n0, goal.thicknessNm ? Math.log(goal.thicknessNm.value) : d0];
  const found: Settings[] = [at];
  for (let r = 1; r < tried; r++) {
    const u = recurrence(r, levers.length + 2);
    const start = moved(at, levers, u);
    const target = [0, 1].map((o) => aim[o] + u[levers.length + o] * scales.tolerance[o]) as [number, number];
    const settings = broughtTo(target, start, levers, film);
    if (outside(settings, chamber, line).length === 0) found.push(settings);
  }
  for (const settings of found) {
    const rows = beliefRows(model, settings, k);
    addMoments(region, belief.n, rows.index, 1 / (found.length * scales.tolerance[0] ** 2));
    addMoments(region, belief.n, rows.lnThickness, 1 / (found.length * scales.tolerance[1] ** 2));
  }
  return { region, points: found.length };
}

/** Point `r` of an additive recurrence in [-1, 1]^size, with the roots of x^(size+1) = x + 1 (M. Roberts 2018, from memory). */
function recurrence(r: number, size: number): number[] {
  let g = 2;
  for (let i = 0; i < 30; i++) g = (1 + g) ** (1 / (size + 1));
  return Array.from({ length: size }, (_, i) => 2 * ((0.5 + r * g ** -(i + 1)) % 1) - 1);
}

/** The settings with gas ratio and time moved, as far as they are levers, until the film expected is the target. */
function broughtTo(
  [index, lnThickness]: readonly [number, number],
  start: Settings,
  levers: readonly PlannedLever[],
  film: (s: Settings) => [number, number],
): Settings {
  const named = (meaning: string) => levers.find((l) => l.setting.meaning === meaning)?.name;
  const gas = named("ammonia") ?? named("silane");
  const clock = named("time") ?? named("belt_speed");
  const scaled = (s: Settings, name: string, ln: number) =>
    new Map(s).set(name, (s.get(name) as number) * Math.exp(ln));
  const small = 0.005;
  let now = start;
  for (let i = 0; i < corrections; i++) {
    for (const [name, output, target] of [
      [gas, 0, index],
      [clock, 1, lnThickness],
    ] as const) {
      if (name === undefined) continue;
      const here = film(now)[output];
      const slope = (film(scaled(now, name, small))[output] - here) / small;
      if (Math.abs(slope) < 1e-3) continue;
      // No step over 10 %: from there on the next correction sees the slope anew.
      now = scaled(now, name, Math.max(-0.1, Math.min(0.1, (target - here) / slope)));
    }
  }
  return now;
}
