/** Reasons as sentences with numbers: what was read, what is expected, what each move does, what it leans on. */
import type { ChamberModel, Settings } from "../../calibration/index.ts";
import type { Chamber, Goal } from "../line/line.ts";
import { shown } from "../line/settings.ts";
import type { CellLight } from "./cell-light.ts";
import type { Expectation } from "./expectation.ts";
import type { MeasuredRun } from "./mode.ts";

export const asIndex = (v: number) => v.toFixed(3);
export const asNm = (v: number) => v.toFixed(1);
export const asPercent = (chance: number) =>
  chance > 0.995 ? "over 99 %" : chance < 0.005 ? "under 1 %" : `${Math.round(100 * chance)} %`;
const signed = (v: number, digits: number) => `${v < 0 ? "-" : "+"}${Math.abs(v).toFixed(digits)}`;
const average = (values: (number | null)[]): number | null => {
  const read = values.filter((v): v is number => v !== null);
  return read.length === 0 ? null : read.reduce((a, b) => a + b, 0) / read.length;
};
export const list = (names: readonly string[]) =>
  names.length < 2 ? names.join("") : `${names.slice(0, -1).join(", ")} and ${names.at(-1)}`;
export const runsWord = (count: number) => `${count} run${count === 1 ? "" : "s"}`;

/**
 * "thickness 2.9 nm low" and the like, for a film beside its goal; misses within `from` of the tolerance are not worth a
 * word.
 */
export function missWords(
  film: { index: number | null; thicknessNm: number | null },
  goal: Goal,
  from = 0.6,
): string[] {
  const out: string[] = [];
  if (goal.thicknessNm && film.thicknessNm !== null) {
    const miss = film.thicknessNm - goal.thicknessNm.value;
    if (Math.abs(miss) > from * goal.thicknessNm.within)
      out.push(`thickness ${asNm(Math.abs(miss))} nm ${miss < 0 ? "low" : "high"}`);
  }
  if (goal.index && film.index !== null) {
    const miss = film.index - goal.index.value;
    if (Math.abs(miss) > from * goal.index.within)
      out.push(`index ${asIndex(Math.abs(miss))} ${miss < 0 ? "low" : "high"}`);
  }
  return out;
}

/** What the latest readings were: of this cycle, at most five. */
export function readSentence(runs: readonly MeasuredRun[], goal: Goal, sinceClean: boolean): string | null {
  const last = runs.slice(-5);
  const index = average(last.map((r) => r.index));
  const thicknessNm = average(last.map((r) => r.thicknessNm));
  if (last.length === 0 || (index === null && thicknessNm === null)) return null;
  const misses = missWords({ index, thicknessNm }, goal, 0.1);
  const which = `${last.length === 1 ? "The last measured run" : `The last ${last.length} measured runs`}${sinceClean ? " since the clean" : ""}`;
  const values = [
    index === null ? null : `index ${asIndex(index)}`,
    thicknessNm === null ? null : `${asNm(thicknessNm)} nm`,
  ]
    .filter(Boolean)
    .join(", ");
  return `${which} read ${values}${last.length > 1 ? " on average" : ""}${misses.length ? `: ${misses.join(", ")}` : ": on goal"}.`;
}

export function expectSentence(lead: string, e: Expectation, light: CellLight): string {
  const i = e.predicted.index;
  const d = e.predicted.thickness_nm;
  const parts: string[] = [];
  if (i) parts.push(`index ${asIndex(i.mean)} (${asIndex(i.low)}-${asIndex(i.high)})`);
  if (d) parts.push(`${asNm(d.mean)} nm (${asNm(d.low)}-${asNm(d.high)})`);
  const m = e.predicted.reflectance_minimum_nm;
  if (m) parts.push(`minimum ${m.mean.toFixed(0)} nm${light.surface === "pyramids" ? " on the cell" : ""}`);
  const chance = e.chanceInGoal ?? e.chanceJudged;
  const of = e.chanceInGoal === null ? "of the film in goal (reflectance not judged)" : "in goal";
  return `${lead} the next run should read ${parts.join(", ")}; the chance ${e.chanceInGoal === null ? of : "to be in goal"} is ${asPercent(chance)}.`;
}

/** "silane 812 -> 835 sccm (+2.8 %)" for every setting moved. */
export function moveWords(chamber: Chamber, before: Settings, after: Settings): string[] {
  const out: string[] = [];
  for (const setting of chamber.settings.values()) {
    const from = before.get(setting.name);
    const to = after.get(setting.name);
    if (from === undefined || to === undefined || from === to) continue;
    const relative = from !== 0 ? ` (${signed((100 * (to - from)) / from, 1)} %)` : "";
    out.push(`${setting.name} ${shown(setting, from)} to ${shown(setting, to)}${relative}`);
  }
  return out;
}

/** What the gas moves do and what the time does, each on its own. */
export function effectSentences(model: ChamberModel, chamber: Chamber, before: Settings, after: Settings): string[] {
  const d0 = Math.exp(model.quick(before).lnThickness);
  const middle = new Map(before);
  const gas: string[] = [];
  let timeName: string | null = null;
  for (const setting of chamber.settings.values()) {
    const to = after.get(setting.name);
    if (to === undefined || to === before.get(setting.name)) continue;
    if (setting.meaning === "time" || setting.meaning === "belt_speed") timeName = setting.name;
    else {
      gas.push(setting.name);
      middle.set(setting.name, to);
    }
  }
  const out: string[] = [];
  if (gas.length > 0) {
    const e = model.effect(before, middle);
    const nm = d0 * e.lnThickness.mean;
    out.push(
      `Moving ${list(gas)} gives index ${signed(e.index.mean, 4)} (sd ${e.index.sd.toFixed(4)}) and thickness ${signed(nm, 1)} nm (sd ${(d0 * e.lnThickness.sd).toFixed(1)}).`,
    );
  }
  if (timeName) {
    const e = model.effect(middle, after);
    out.push(`${timeName}${gas.length > 0 ? " then" : ""} gives thickness ${signed(d0 * e.lnThickness.mean, 1)} nm.`);
  }
  return out;
}

/** How far a chamber leans on its sisters: said while its own runs are few. */
export function sistersSentence(model: ChamberModel): string | null {
  const own = model.ownReadings;
  const { sisters } = model.context;
  if (own >= 12) return null;
  if (sisters.length === 0)
    return `${model.chamber} has ${own === 0 ? "no measured run" : `only ${own} measured ${own === 1 ? "run" : "runs"}`} and no sister chambers: slopes come from what is usual for the trade.`;
  const names = sisters.map((s) => `${s.chamber} (${s.readings})`);
  return `${model.chamber} has ${own === 0 ? "no measured run" : `only ${own} measured ${own === 1 ? "run" : "runs"}`} of its own: slopes and spread lean on its sisters ${list(names)}.`;
}
