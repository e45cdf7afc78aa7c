/**
 * The sheet of an open change, made from the record when the one handed out at adopting is gone: what to type in.
 */
import type { OpenChange, Setting } from "../../recipes/index.ts";
import { settingText } from "../text/numbers.ts";

/** Changed settings first, each "silane  812 -> 835 sccm"; then those that stay. */
export function sheetOf(change: OpenChange, settings: readonly Setting[]): string[] {
  const changed: string[] = [];
  const kept: string[] = [];
  for (const setting of settings) {
    const before = change.before.get(setting.name);
    const after = change.after.get(setting.name);
    if (after === undefined) continue;
    const text = settingText(setting, after);
    if (before !== undefined && settingText(setting, before) !== text)
      changed.push(`${setting.name}: ${settingText(setting, before)} -> ${text} ${setting.unit}`.trim());
    else kept.push(`${setting.name}: stays ${text} ${setting.unit}`.trim());
  }
  return [...changed, ...kept, "", "When all of it is typed in and read back: e."];
}
