/**
 * The laws by which a virtual chamber turns true flows and settings into index and growth rate, before scatter, drift
 * and offsets. The index follows the composition of the film,
 *
 *     n = (3.3 + 0.375 x) / (1 + 0.75 x),   x = [N]/[Si]
 *
 * (Bustarret et al., Phys. Rev. B 38, 8171 (1988)), with x saturating in the gas ratio; the rate is a power law.
 * On purpose neither is what the calibration fits.
 */
import { refuse } from "../../engine/index.ts";
import type { ChamberSettings, World } from "./worlds.ts";

/**
 * Index at 632.8 nm of a nitride of composition x = [N]/[Si]: Bustarret et al. (1988). Refuses x outside 0 to 2, beyond
 * which no world here goes.
 */
export function indexOfComposition(x: number): number {
  if (!(x >= 0 && x <= 2)) refuse("out-of-range", `composition [N]/[Si] is ${x}, it must lie in 0 to 2`);
  return (3.3 + 0.375 * x) / (1 + 0.75 * x);
}

/** A setting that must be there and above `floor`; refuses otherwise, naming it. */
export function need(settings: ChamberSettings, name: string, floor = 0): number {
  const value = settings.get(name);
  if (value === undefined) refuse("missing-setting", `a virtual chamber needs the setting ${name}`);
  if (!(Number.isFinite(value) && value > floor)) {
    refuse("out-of-range", `${name} is ${value}, a virtual chamber needs more than ${floor}`);
  }
  return value;
}

function gasRatio(world: World, settings: ChamberSettings): number {
  const nitrogen = settings.get("nitrogen") ?? 0;
  return (need(settings, "ammonia") + world.nitrogenWeight * nitrogen) / need(settings, "silane");
}

function totalFlow(settings: ChamberSettings): number {
  return need(settings, "silane") + need(settings, "ammonia") + (settings.get("nitrogen") ?? 0);
}

/**
 * Index and growth rate (nm/s) at flows and settings as they truly are, in a chamber without offset, drift or scatter.
 * Refuses a missing or non-positive setting.
 */
export function filmLaw(world: World, settings: ChamberSettings): { index: number; rateNmPerS: number } {
  const { start } = world;
  const ln = (name: string) => Math.log(need(settings, name) / need(start, name));
  const warmer = need(settings, "temperature", -273.15) - need(start, "temperature", -273.15);
  const x = world.xMost / (1 + (world.ratioHalf / gasRatio(world, settings)) ** world.steepness);
  const index =
    indexOfComposition(x) +
    world.indexPerDegC * warmer +
    world.indexPerLnPower * ln("power") +
    world.indexPerLnPressure * ln("pressure") +
    world.indexPerLnFlow * Math.log(totalFlow(settings) / totalFlow(start));
  const lnRate =
    world.silaneExponent * ln("silane") +
    world.ammoniaExponent * ln("ammonia") +
    world.powerExponent * ln("power") +
    world.pressureExponent * ln("pressure") +
    world.lnRatePerDegC * warmer;
  return { index, rateNmPerS: world.rateNmPerS * Math.exp(lnRate) };
}

/** d index / d ln(gas ratio) at constant silane plus ammonia, by central difference over 0.2 % (error below 1e-6 for so smooth a law). */
export function indexSlopePerLogRatio(world: World, settings: ChamberSettings): number {
  const step = 0.001;
  const at = (shift: number) => filmLaw(world, shiftRatio(settings, Math.exp(shift))).index;
  return (at(step) - at(-step)) / (2 * step);
}

/** The settings with ammonia/silane multiplied by `factor` and silane + ammonia unchanged. */
export function shiftRatio(settings: ChamberSettings, factor: number): ChamberSettings {
  const silane = need(settings, "silane");
  const ammonia = need(settings, "ammonia");
  const ratio = (ammonia / silane) * factor;
  const total = silane + ammonia;
  return new Map([...settings, ["silane", total / (1 + ratio)], ["ammonia", (total * ratio) / (1 + ratio)]]);
}
