/**
 * The search for the settings worth most: a pattern search over what can be typed in, along directions an engineer would
 * try (gas ratio at fixed total flow, time, each lever alone, ratio with the time that keeps the thickness), inside ranges
 * and window, finished by trying every neighbour on the grid. Deterministic, no derivatives: the loss has kinks where a
 * reflectance limit starts to bind.
 */
import type { ChamberModel, Settings } from "../../calibration/index.ts";
import { evaluate } from "../line/expression.ts";
import type { Chamber, Goal, Line } from "../line/line.ts";
import { snapInside, typeable } from "../line/settings.ts";
import { anchorUse, outside } from "../line/window.ts";
import type { CellLight } from "./cell-light.ts";
import type { TunedLever } from "./levers.ts";
import { loss } from "./objective.ts";

export interface SearchContext {
  model: ChamberModel;
  line: Line;
  chamber: Chamber;
  goal: Goal;
  light: CellLight;
  before: Settings;
  levers: readonly TunedLever[];
  /** Given, corrections may not add up past the line's anchor from this recipe. */
  anchor?: Settings | null;
}

export interface Candidate {
  settings: Settings;
  loss: number;
  inside: boolean;
}

/** Weight of being outside the window: beyond any loss inside it, growing with the excess so that the search finds its way in. */
const outsidePrice = 1e4;

/** The best candidate; `inside` is false only when nothing inside the window was found at all. */
export function bestSettings(context: SearchContext): Candidate {
  const seen = new Map<string, Candidate>();
  const judge = (settings: Settings): Candidate => {
    const key = context.levers.map((l) => settings.get(l.name)).join(" ");
    const known = seen.get(key);
    if (known) return known;
    const findings = certainlyInside(settings, context) ? [] : outside(settings, context.chamber, context.line);
    const excess = findings.reduce(
      (sum, f) => sum + Math.abs(f.value - (f.value > f.high ? f.high : f.low)) / Math.max(Math.abs(f.value), 1e-9),
      0,
    );
    let past = 0;
    if (context.anchor)
      for (const use of anchorUse(context.anchor, settings, context.line))
        if (use.past) past += Math.abs(use.used) - use.limit;
    const inside = findings.length === 0 && past === 0;
    const value = loss(context.model, settings, context) + (inside ? 0 : outsidePrice * (1 + excess + past));
    const candidate = { settings, loss: value, inside };
    seen.set(key, candidate);
    return candidate;
  };
  const grids = context.levers.map((lever) => gridOf(lever));
  const typed = (values: Settings): Settings => {
    const out = new Map(values);
    context.levers.forEach((lever, i) => {
      const value = out.get(lever.name);
      if (value !== undefined) out.set(lever.name, onGrid(value, grids[i]));
    });
    return out;
  };
  const moves = directions(context);
  let best = judge(context.before);
  for (const start of [typed(context.before)]) if (judge(start).loss < best.loss) best = judge(start);
  // Steps as fractions of a lever's value: 12 % down to well under one typeable step, halving when nothing improves.
  for (let size = 0.12; size > 2e-4; size /= 2) {
    for (let improved = true, round = 0; improved && round < 40; round++) {
      improved = false;
      for (const move of moves)
        for (const sign of [1, -1]) {
          const next = judge(typed(move(best.settings, sign * size)));
          if (next.loss < best.loss - 1e-12) {
            best = next;
            improved = true;
          }
        }
    }
  }
  best = neighbours(context, best, judge);
  // The grid above is floating-point dust away from what can be typed in; the answer is not.
  const clean = new Map(best.settings);
  for (const lever of context.levers)
    if (clean.has(lever.name) && clean.get(lever.name) !== context.before.get(lever.name))
      clean.set(lever.name, snapInside(clean.get(lever.name) as number, lever.setting));
  return { ...best, settings: clean };
}

/**
 * Is every limit kept without any slack? Then `outside`, which words its findings, need not be asked: nearly all of the
 * thousands of candidates are inside.
 */
function certainlyInside(settings: Settings, { chamber, line }: SearchContext): boolean {
  for (const [name, value] of settings) {
    const setting = chamber.settings.get(name);
    if (setting && !(value >= setting.low && value <= setting.high)) return false;
  }
  return line.window.every((limit) => {
    const value = evaluate(limit, settings);
    return value === null || (value >= limit.low && value <= limit.high);
  });
}

/** Multiples of a lever's smallest step inside its range, for a search that asks thousands of times. */
interface Grid {
  step: number;
  first: number;
  last: number;
}

function gridOf({ setting }: TunedLever): Grid {
  const inside = typeable(setting) ?? { first: setting.low, last: setting.low };
  return { step: setting.smallest, ...inside };
}

const onGrid = (value: number, { step, first, last }: Grid) =>
  Math.min(last, Math.max(first, Math.round(value / step) * step));

type Move = (settings: Settings, by: number) => Settings;

function directions({ levers, model }: SearchContext): Move[] {
  const scale =
    (name: string): Move =>
    (s, by) =>
      new Map(s).set(name, (s.get(name) ?? 0) * (1 + by));
  const moves: Move[] = [];
  const named = (meaning: string) => levers.find((l) => l.setting.meaning === meaning)?.name;
  const silane = named("silane");
  const ammonia = named("ammonia");
  const time = named("time") ?? named("belt_speed");
  const timeSign = named("time") ? 1 : -1;
  if (silane && ammonia) {
    const atTotal: Move = (s, by) => {
      const a = s.get(silane) ?? 0;
      const b = s.get(ammonia) ?? 0;
      const moved = a * (1 + by);
      return new Map(s).set(silane, moved).set(ammonia, Math.max(a + b - moved, 0));
    };
    moves.push(atTotal);
    if (time)
      moves.push((s, by) => {
        const moved = atTotal(s, by);
        const thicker = model.quick(moved).lnThickness - model.quick(s).lnThickness;
        return new Map(moved).set(time, (s.get(time) ?? 0) * Math.exp(-timeSign * thicker));
      });
  }
  if (time) moves.push(scale(time));
  for (const lever of levers) {
    if (lever.name === time) continue;
    const at = lever.setting;
    // A lever that can be zero or negative moves by its range, not by its value.
    if (at.low > 0) moves.push(scale(lever.name));
    else moves.push((s, by) => new Map(s).set(lever.name, (s.get(lever.name) ?? 0) + by * lever.span));
  }
  return moves;
}

/** Every combination of a few steps either way of the gas and time levers: the exhaustive end of the search. */
function neighbours({ levers }: SearchContext, from: Candidate, judge: (s: Settings) => Candidate): Candidate {
  const reach = levers.filter((l) => !l.reserve).slice(0, 3);
  let best = from;
  const visit = (i: number, settings: Settings): void => {
    if (i === reach.length) {
      const here = judge(settings);
      if (here.loss < best.loss - 1e-12) best = here;
      return;
    }
    const lever = reach[i];
    const width = lever.setting.meaning === "ammonia" ? 2 : 1;
    for (let step = -width; step <= width; step++) {
      const value = (settings.get(lever.name) ?? 0) + step * lever.setting.smallest;
      if (value < lever.setting.low || value > lever.setting.high) continue;
      visit(i + 1, new Map(settings).set(lever.name, value));
    }
  };
  visit(0, from.settings);
  return best;
}
