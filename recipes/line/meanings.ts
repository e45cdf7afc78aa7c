/**
 * Settings with a built-in meaning: the words of the trade that the model knows, and the dimension of each. Every other
 * name is a site's own setting, declared with `acts` or `acts_as`.
 */
import type { Dimension } from "../../engine/index.ts";

/** Built-in names; zones of a heater (zone_1, zone_2, ...) besides. */
export const MEANINGS: ReadonlyMap<string, Dimension> = new Map([
  ["silane", "flow"],
  ["ammonia", "flow"],
  ["nitrogen", "flow"],
  ["time", "time"],
  ["belt_speed", "speed"],
  ["power", "power"],
  ["on_time", "time"],
  ["off_time", "time"],
  ["pressure", "pressure"],
  ["temperature", "temperature"],
]);

/** Dimension of a built-in meaning, or null when the word has none. `zone_n` is the temperature of a heater zone. */
export function meaningDimension(word: string): Dimension | null {
  return MEANINGS.get(word) ?? (/^zone_[1-9]\d?$/.test(word) ? "temperature" : null);
}
