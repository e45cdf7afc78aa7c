/**
 * The move of somebody who knows the truth: the gas ratio and the time at which a chamber would give its goal, were there
 * no scatter. It is the ceiling that every report of a rehearsal prints, and how the people of the demo line come by
 * recipes that are about right.
 */
import { need, shiftRatio } from "./film-law.ts";
import type { Bounds, ChamberSettings } from "./worlds.ts";

/** Smallest steps that can be typed in, by setting; a setting not listed is not rounded. */
export type Steps = ReadonlyMap<string, number>;

/** As the trade's controllers have them: silane 1 sccm, ammonia 10 sccm, time 1 s, power 10 W (common practice, no source). */
export const TUBE_STEPS: Steps = new Map([
  ["silane", 1],
  ["ammonia", 10],
  ["time", 1],
  ["power", 10],
]);

/** The settings rounded to what can be typed in. */
export function typed(settings: ChamberSettings, steps: Steps = TUBE_STEPS): ChamberSettings {
  return new Map(
    [...settings].map(([name, value]) => {
      const step = steps.get(name);
      return [name, step === undefined ? value : Number((Math.round(value / step) * step).toFixed(9))];
    }),
  );
}

/** A film on the polished witness. */
export interface Film {
  index: number;
  thicknessNm: number;
}

/**
 * Settings near `from` at which `film` gives `goal`: gas ratio at constant silane plus ammonia for the index, then time
 * for the thickness (assumed to be linear in time, which the virtual chamber's is). Not rounded unless `steps` are given.
 * Null when the goal lies outside the bounds.
 */
export function aim(
  film: (settings: ChamberSettings) => Film,
  from: ChamberSettings,
  goal: Film,
  { bounds, steps }: { bounds: Bounds; steps?: Steps },
): ChamberSettings | null {
  const now = need(from, "ammonia") / need(from, "silane");
  let low = Math.log(bounds.ratio[0] / now);
  let high = Math.log(bounds.ratio[1] / now);
  const miss = (shift: number) => film(shiftRatio(from, Math.exp(shift))).index - goal.index;
  // The index falls as the ratio grows; outside this bracket nothing in the bounds reaches it.
  if (miss(low) < 0 || miss(high) > 0) return null;
  // 50 halvings bring a bracket of ln 14/5 = 1.03 below 1e-15.
  for (let halving = 0; halving < 50; halving++) {
    const middle = (low + high) / 2;
    if (miss(middle) > 0) low = middle;
    else high = middle;
  }
  let settings = shiftRatio(from, Math.exp((low + high) / 2));
  // Rounding the flows first lets the time make up for what rounding the silane costs in thickness.
  if (steps) settings = typed(settings, steps);
  const timed = (seconds: number): ChamberSettings => new Map([...settings, ["time", seconds]]);
  const [shortest, longest] = bounds.timeS;
  const thin = film(timed(shortest)).thicknessNm;
  const thick = film(timed(longest)).thicknessNm;
  const seconds = shortest + ((goal.thicknessNm - thin) / (thick - thin)) * (longest - shortest);
  if (!(seconds >= shortest && seconds <= longest)) return null;
  return steps ? typed(timed(seconds), steps) : timed(seconds);
}
