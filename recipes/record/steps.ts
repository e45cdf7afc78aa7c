/**
 * A recipe's settings in two shapes: as steps (one layer each, in the order of deposition), and flat by the names people
 * use: "silane", or "dense.silane" where a step has a name.
 */
import { refuse } from "../../engine/index.ts";
import type { Quantity, StepSettings } from "./entries.ts";

/** Flat: "silane" for the only step, "dense.silane" for named ones. Order of steps and settings is kept. */
export function flatSettings(steps: readonly StepSettings[]): Map<string, Quantity> {
  const flat = new Map<string, Quantity>();
  for (const step of steps) {
    for (const [name, quantity] of Object.entries(step.settings)) flat.set(settingName(step.name, name), quantity);
  }
  return flat;
}

/** "silane" or "dense.silane". */
export function settingName(step: string | undefined, setting: string): string {
  return step === undefined ? setting : `${step}.${setting}`;
}

/** "dense.silane" is step dense, setting silane. Names of steps hold no dot. */
export function splitSettingName(name: string): { step: string | undefined; setting: string } {
  const dot = name.indexOf(".");
  return dot < 0 ? { step: undefined, setting: name } : { step: name.slice(0, dot), setting: name.slice(dot + 1) };
}

/** The inverse of `flatSettings`. Throws `mixed-steps` when some names have a step and others not. */
export function stepsOf(flat: Iterable<readonly [string, Quantity]>): StepSettings[] {
  const steps = new Map<string | undefined, Record<string, Quantity>>();
  for (const [name, quantity] of flat) {
    const { step, setting } = splitSettingName(name);
    const settings = steps.get(step) ?? {};
    settings[setting] = { value: quantity.value, unit: quantity.unit };
    steps.set(step, settings);
  }
  if (steps.size > 1 && steps.has(undefined)) {
    refuse("mixed-steps", "some settings name a step and others do not", {
      hint: "write step.setting for all of them",
    });
  }
  return [...steps].map(([name, settings]) => (name === undefined ? { settings } : { name, settings }));
}

/** `base` with the settings of `over` in place of its own; new ones are added. */
export function mergeSteps(base: readonly StepSettings[], over: readonly StepSettings[]): StepSettings[] {
  return stepsOf(new Map([...flatSettings(base), ...flatSettings(over)]));
}

/** Same settings with the same values in the same units? Order does not matter. */
export function sameSteps(a: readonly StepSettings[], b: readonly StepSettings[]): boolean {
  const left = flatSettings(a);
  const right = flatSettings(b);
  if (left.size !== right.size) return false;
  return [...left].every(([name, { value, unit }]) => {
    const other = right.get(name);
    return other !== undefined && other.value === value && other.unit === unit;
  });
}
