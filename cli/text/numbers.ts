/**
 * Numbers as people of the trade read them: fixed decimals by kind, a sign where a direction matters, a dash where
 * there is nothing to show. No digit is shown that the gauges of the trade cannot resolve.
 */
import { decimalsOf, fromCanonical, fromCanonicalStep } from "../../engine/index.ts";
import type { Interval, Setting } from "../../recipes/index.ts";

/** `decimals` digits after the point; "-" for null and anything not finite; never "-0.0". */
export function fixed(value: number | null | undefined, decimals: number): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return "-";
  const text = value.toFixed(decimals);
  return Number(text) === 0 ? (0).toFixed(decimals) : text;
}

/** With its sign: "+1.2", "-0.004", "0.0". */
export function signed(value: number, decimals: number): string {
  const text = fixed(value, decimals);
  return Number(text) > 0 ? `+${text}` : text;
}

export const indexText = (value: number | null | undefined): string => fixed(value, 3);
export const thicknessText = (value: number | null | undefined): string => fixed(value, 1);
export const minimumText = (value: number | null | undefined): string => fixed(value, 0);
export const percentText = (value: number | null | undefined): string => fixed(value, 2);

/** A chance as a whole percent; the ends are said as bounds, since no model is that sure. */
export function chanceText(chance: number | null): string {
  if (chance === null || !Number.isFinite(chance)) return "-";
  if (chance > 0.99) return ">99 %";
  if (chance < 0.01) return "<1 %";
  return `${Math.round(chance * 100)} %`;
}

/** The chance in a word, so that it reads without colour and without arithmetic. */
export function chanceWord(chance: number | null): string {
  if (chance === null || !Number.isFinite(chance)) return "not known";
  if (chance >= 0.9) return "very likely";
  if (chance >= 0.7) return "likely";
  if (chance >= 0.4) return "even odds";
  if (chance >= 0.1) return "unlikely";
  return "very unlikely";
}

/** "88.1 ±1.5": the middle and half the 95 % interval; the larger half where it leans. */
export function withHalf(interval: Interval | null, decimals: number): string {
  if (interval === null) return "-";
  const half = Math.max(interval.high - interval.mean, interval.mean - interval.low);
  return `${fixed(interval.mean, decimals)} ±${fixed(half, decimals)}`;
}

/** A setting's value in the unit it was declared in, without the unit. */
export function settingText(setting: Setting, value: number | null | undefined): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return "-";
  return fixed(fromCanonical(value, setting.unit), decimalsOf(fromCanonicalStep(setting.smallest, setting.unit)));
}
