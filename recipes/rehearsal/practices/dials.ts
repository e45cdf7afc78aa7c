/**
 * What the hand turns: the gas ratio at the line's total flow, and the time; rounded to what can be typed in and kept in
 * ranges and window. Every practice but this program's own moves the chamber through here.
 */
import type { Film } from "../aim.ts";
import { need, shiftRatio } from "../film-law.ts";
import type { Brief, Reading } from "../stage.ts";
import type { ChamberSettings } from "../worlds.ts";

/** Readings farther from the goal than this are taken for slips by anybody: in index, and relative in thickness. */
const ABSURD = { index: 0.2, relative: 0.3 } as const;

/** A reading with both values that is not absurd, or null: what rules and controllers can use. */
export function usable({ goal }: Brief, reading: Reading | null): Film | null {
  if (!reading || reading.index === null || reading.thicknessNm === null) return null;
  const { index, thicknessNm } = reading;
  const absurd =
    Math.abs(index - goal.index) > ABSURD.index || Math.abs(thicknessNm / goal.thicknessNm - 1) > ABSURD.relative;
  return absurd ? null : { index, thicknessNm };
}

export const ratioOf = (settings: ChamberSettings): number => need(settings, "ammonia") / need(settings, "silane");

/** ln of ammonia/silane over that of the reference recipe, and ln of silane over that of the reference. */
export function coordinates(brief: Brief, settings: ChamberSettings): { ratio: number; silane: number } {
  return {
    ratio: Math.log(ratioOf(settings) / ratioOf(brief.reference)),
    silane: Math.log(need(settings, "silane") / need(brief.reference, "silane")),
  };
}

/** The value nearest to the one wanted that can be typed in and lies in its range. */
export function typedValue(brief: Pick<Brief, "levers">, name: string, wanted: number): number {
  const lever = brief.levers.find((l) => l.name === name);
  if (!lever) return wanted;
  const { low, high, smallest } = lever;
  const first = Math.ceil(low / smallest - 1e-9);
  const last = Math.floor(high / smallest + 1e-9);
  return Math.min(last, Math.max(first, Math.round(wanted / smallest))) * smallest;
}

/**
 * Settings at this ln ratio to the reference (clamped to the window) at the reference's total flow. Time is asked for
 * after the gases were rounded, so that it makes up for what rounding costs.
 */
export function dialled(
  brief: Brief,
  lnRatio: number,
  secondsAt: (gases: ChamberSettings) => number,
  base: ChamberSettings = brief.reference,
): ChamberSettings {
  const here = ratioOf(base);
  const wanted = ratioOf(brief.reference) * Math.exp(lnRatio);
  const ratio = Math.min(brief.ratio[1], Math.max(brief.ratio[0], wanted));
  const moved = new Map(shiftRatio(base, ratio / here));
  for (const gas of ["silane", "ammonia"]) moved.set(gas, typedValue(brief, gas, need(moved, gas)));
  // Rounding may have carried the ratio over the edge of the window: one step of ammonia back.
  const ammonia = brief.levers.find((l) => l.name === "ammonia");
  if (ammonia) {
    if (ratioOf(moved) > brief.ratio[1]) moved.set("ammonia", need(moved, "ammonia") - ammonia.smallest);
    else if (ratioOf(moved) < brief.ratio[0]) moved.set("ammonia", need(moved, "ammonia") + ammonia.smallest);
  }
  return moved.set("time", typedValue(brief, "time", secondsAt(moved)));
}

export const sameSettings = (a: ChamberSettings, b: ChamberSettings): boolean =>
  [...a].every(([name, value]) => b.get(name) === value);
