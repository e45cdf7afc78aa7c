/**
 * Which settings to propose: the fewest levers that do, inside the window and inside what corrections may still add up to.
 * Also the runner-up an engineer asks about: what the fuller (or the simpler) set of levers would give.
 */
import type { ChamberModel, Settings } from "../../calibration/index.ts";
import type { Chamber, Goal, Line } from "../line/line.ts";
import type { CellLight } from "./cell-light.ts";
import { chanceAt } from "./expectation.ts";
import type { TunedLever } from "./levers.ts";
import { bestSettings, type Candidate } from "./search.ts";
import { type Steering, steeredLevers, unsteered } from "./steering.ts";

export interface ChooseContext {
  line: Line;
  chamber: Chamber;
  goal: Goal;
  model: ChamberModel;
  light: CellLight;
  before: Settings;
  anchor: Settings | null;
  /** What the engineer holds, allows and limits; all that the line tunes when left out. */
  steering?: Steering;
}

export interface Choice {
  settings: Settings;
  /** False only when nothing inside the window (and the anchor, when it counts) was found. */
  inside: boolean;
  /** Another set of levers worth naming, with its chance; null when there is none. */
  runnerUp: { settings: Settings; chance: number } | null;
}

/** A set of fewer levers is taken when its chance in goal falls short of the best by no more than this. */
const closeEnough = 0.02;

/** Is this film inside the film goals? */
export function filmInside(goal: Goal, index: number, thicknessNm: number): boolean {
  return (
    (!goal.index || Math.abs(index - goal.index.value) <= goal.index.within) &&
    (!goal.thicknessNm || Math.abs(thicknessNm - goal.thicknessNm.value) <= goal.thicknessNm.within)
  );
}

const meanInside = (c: ChooseContext, settings: Settings): boolean => {
  const film = c.model.quick(settings);
  return filmInside(c.goal, film.index, Math.exp(film.lnThickness));
};

/**
 * Time alone, then time with one gas, then both gases; power, pressure and the rest only when those do not bring the film
 * inside. The simplest set within `closeEnough` of the fullest one's chance is taken.
 */
export function choose(c: ChooseContext): Choice {
  const levers = steeredLevers(c.chamber, c.before, c.steering ?? unsteered);
  const usual = levers.filter((l) => !l.reserve);
  const best = (set: readonly TunedLever[]) => bestSettings({ ...c, levers: set });
  const full = best(usual.length > 0 ? usual : levers);
  if (usual.length < levers.length && !(full.inside && meanInside(c, full.settings))) {
    const wide = best(levers);
    return { settings: wide.settings, inside: wide.inside, runnerUp: null };
  }
  const fullChance = chanceAt(c.model, full.settings, c);
  for (const set of simplerSets(usual)) {
    const simple = best(set);
    if (!simple.inside || !meanInside(c, simple.settings)) continue;
    const chance = chanceAt(c.model, simple.settings, c);
    if (chance >= fullChance - closeEnough) return { ...picked(simple), runnerUp: named(full, fullChance, simple) };
  }
  return { ...picked(full), runnerUp: timeAlone(c, usual, full) };
}

const picked = ({ settings, inside }: Candidate) => ({ settings, inside });
const same = (a: Settings, b: Settings) => [...a].every(([name, value]) => b.get(name) === value);
const isTime = (l: TunedLever) => l.setting.meaning === "time" || l.setting.meaning === "belt_speed";

function simplerSets(usual: readonly TunedLever[]): TunedLever[][] {
  const time = usual.filter(isTime);
  const gases = usual.filter((l) => !isTime(l));
  const sets = [time, ...(gases.length > 1 ? gases.map((g) => [...time, g]) : [])];
  return sets.filter((s) => s.length > 0 && s.length < usual.length);
}

const named = (other: Candidate, chance: number, than: Candidate) =>
  same(other.settings, than.settings) ? null : { settings: other.settings, chance };

/** What time alone would give, where more than time is proposed. */
function timeAlone(c: ChooseContext, usual: readonly TunedLever[], than: Candidate): Choice["runnerUp"] {
  const time = usual.filter(isTime);
  if (time.length === 0 || time.length === usual.length) return null;
  const best = bestSettings({ ...c, levers: time });
  if (!best.inside || same(best.settings, c.before)) return null;
  return named(best, chanceAt(c.model, best.settings, c), than);
}
