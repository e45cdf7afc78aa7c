/** What the history cannot tell, with the run that would tell in values that can be typed in, inside range and window. */

import type { Lever } from "../../calibration/index.ts";
import { type ChamberModel, type Settings, type Untold, untold } from "../../calibration/index.ts";
import type { Chamber, Line } from "../line/line.ts";
import { shown, snapInside } from "../line/settings.ts";
import { outside } from "../line/window.ts";

/**
 * A run that moves one setting by a fraction: "ammonia at 7100 sccm instead of 6890 sccm". Null where the setting is not
 * in the recipe, or the window or the grid leaves no room for most of the move.
 */
export function moveWords(line: Line, chamber: Chamber, from: Settings): (name: string, by: number) => string | null {
  return (name, by) => {
    const setting = chamber.settings.get(name);
    const value = from.get(name);
    if (!setting || value === undefined || value === 0) return null;
    const to = snapInside(value * (1 + by), setting);
    if (Math.abs(to - value) < 0.5 * Math.abs(by * value)) return null;
    if (outside(new Map(from).set(name, to), chamber, line).length > 0) return null;
    return `${name} at ${shown(setting, to)} instead of ${shown(setting, value)}`;
  };
}

/** What the chamber's history cannot tell, tunable settings first, in trade units about the recipe in force. */
export function untoldHere(
  model: ChamberModel,
  levers: readonly Lever[],
  { line, chamber, before }: { line: Line; chamber: Chamber; before: Settings },
): Untold[] {
  const tunable = new Set([...chamber.settings.values()].filter((s) => s.tune).map((s) => s.name));
  return untold(model, levers, { move: moveWords(line, chamber, before), tunable });
}
