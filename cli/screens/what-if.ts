/**
 * Moving a setting as a what-if: by its smallest step, or to a typed value. Every result can be typed in at the tool: a
 * multiple of the smallest step in the declared unit, inside the setting's range.
 */
import {
  decimalsOf,
  fromCanonical,
  fromCanonicalStep,
  parseQuantity,
  Refusal,
  refuse,
  toCanonical,
} from "../../engine/index.ts";
import type { Setting } from "../../recipes/index.ts";

/**
 * The value `steps` smallest steps away (negative: down), on the grid of values that can be typed in; a value off the
 * grid moves to the next grid value first. Stops at the ends of the range.
 */
export function nudged(setting: Setting, value: number, steps: number): number {
  const step = fromCanonicalStep(setting.smallest, setting.unit);
  const position = fromCanonical(value, setting.unit) / step;
  const grid = steps > 0 ? Math.floor(position + 1e-9) : Math.ceil(position - 1e-9);
  const moved = toCanonical(Number(((grid + steps) * step).toFixed(decimalsOf(step) + 2)), setting.unit);
  return Math.min(setting.high, Math.max(setting.low, moved));
}

/** The canonical value of a text typed for a setting. Throws a Refusal: not a number, outside the range, between steps. */
export function settingTyped(setting: Setting, text: string): number {
  const { value } = parseQuantity(text, setting.dimension, { defaultUnit: setting.unit });
  const shown = (canonical: number) => {
    const step = fromCanonicalStep(setting.smallest, setting.unit);
    return `${fromCanonical(canonical, setting.unit).toFixed(decimalsOf(step))} ${setting.unit}`.trim();
  };
  if (value < setting.low || value > setting.high) {
    refuse("outside-range", `${setting.name} may be ${shown(setting.low)} to ${shown(setting.high)} here`);
  }
  const position = fromCanonical(value, setting.unit) / fromCanonicalStep(setting.smallest, setting.unit);
  if (Math.abs(position - Math.round(position)) > 1e-6) {
    const below = nudged(setting, value, -1);
    const above = nudged(setting, value, 1);
    refuse("between-steps", `${setting.name} goes in steps; nearest are ${shown(below)} and ${shown(above)}`);
  }
  return value;
}

/** What a Refusal or any other error says to a person, in one line. */
export function inWords(error: unknown): string {
  if (error instanceof Refusal) {
    return error.problems
      .map((problem) => {
        const where = problem.file === undefined ? "" : `${problem.file}${problem.row ? `:${problem.row}` : ""}: `;
        const hint = problem.hint === undefined ? "" : ` (${problem.hint})`;
        return `${where}${problem.message}${hint}`;
      })
      .join("; ");
  }
  return error instanceof Error ? `a fault of ours: ${error.message}` : `a fault of ours: ${String(error)}`;
}

/** Whether two full sets of settings are the same to a person. */
export function sameSettings(a: ReadonlyMap<string, number>, b: ReadonlyMap<string, number>): boolean {
  if (a.size !== b.size) return false;
  for (const [name, value] of a) {
    const other = b.get(name);
    if (other === undefined || Math.abs(other - value) > 1e-9 * Math.max(1, Math.abs(value))) return false;
  }
  return true;
}
