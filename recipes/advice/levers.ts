/** The settings a proposal may move: those the line says to tune, with their range, grid and price. */
import type { Chamber, Setting } from "../line/line.ts";

export interface TunedLever {
  name: string;
  setting: Setting;
  /** Width of the range, canonical unit. */
  span: number;
  /** Loss of moving over the whole range: time is free, gas nearly so, power and pressure are moved last. */
  price: number;
  /** Moved only when gas and time alone cannot reach the goal. */
  reserve: boolean;
}

const prices: Record<string, number> = { time: 0, belt_speed: 0, silane: 0.01, ammonia: 0.01, nitrogen: 0.05 };

export function tunedLevers(chamber: Chamber): TunedLever[] {
  return [...chamber.settings.values()]
    .filter((s) => s.tune && s.high > s.low)
    .map((setting) => ({
      name: setting.name,
      setting,
      span: setting.high - setting.low,
      price: prices[setting.meaning ?? ""] ?? 0.1,
      reserve: !(setting.meaning !== null && setting.meaning in prices),
    }));
}
