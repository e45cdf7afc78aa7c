/**
 * The qualified window and the anchor as judgements: which limits settings break, which they touch, and how much of the
 * anchor's allowance corrections have used. The window is never widened here; it is only read.
 */
import { formatQuantity } from "../../engine/index.ts";
import { evaluate } from "./expression.ts";
import type { AnchorLimit, Chamber, Line, Setting, WindowLimit } from "./line.ts";
import { shown } from "./settings.ts";

/** Relative slack for the dust of adding and dividing decimals; far below any step. */
const DUST = 1e-9;

/** A limit that is broken or touched; values in canonical units (plain numbers for ratios). */
export interface LimitFinding {
  /** What is limited: a setting, or an expression of the window as written. */
  text: string;
  /** From a setting's range, or from the line's window. */
  from: "range" | "window";
  value: number;
  low: number;
  high: number;
  sentence: string;
}

type ChamberSettings = Pick<Chamber, "name" | "settings">;

/** Every limit that bears on these settings with its value now; settings that are not given bear on nothing. */
function bearing(settings: ReadonlyMap<string, number>, chamber: ChamberSettings, line: Pick<Line, "window">) {
  const found: (Omit<LimitFinding, "sentence"> & { step: number; say: (value: number) => string })[] = [];
  for (const [name, value] of settings) {
    const setting = chamber.settings.get(name);
    if (!setting) continue;
    const { low, high, smallest } = setting;
    const say = (number: number) => (Number.isFinite(number) ? shown(setting, number) : String(number));
    found.push({ text: name, from: "range", value, low, high, step: smallest, say });
  }
  for (const limit of line.window) {
    const value = evaluate(limit, settings);
    if (value === null) continue;
    const { text, low, high } = limit;
    const step = stepOf(limit, settings, chamber);
    const say = sayer(limit, chamber);
    found.push({ text, from: "window", value, low, high, step, say });
  }
  return found;
}

/** Words for a value of a window expression: in the unit of its first setting, plain for a ratio. */
function sayer(limit: WindowLimit, chamber: ChamberSettings): (value: number) => string {
  const setting = chamber.settings.get(limit.settings[0]);
  return (value) => {
    if (limit.kind === "ratio" || !setting || !Number.isFinite(value)) return String(Number(value.toPrecision(4)));
    return limit.kind === "value" ? shown(setting, value) : formatQuantity(value, setting.unit);
  };
}

/** How far the expression moves when one of its settings moves by its smallest step: the largest such move. */
function stepOf(limit: WindowLimit, settings: ReadonlyMap<string, number>, chamber: ChamberSettings): number {
  const value = evaluate(limit, settings) ?? 0;
  let step = 0;
  for (const name of limit.settings) {
    const smallest = chamber.settings.get(name)?.smallest ?? 0;
    const moved = evaluate(limit, new Map(settings).set(name, (settings.get(name) ?? 0) + smallest));
    if (moved !== null && Number.isFinite(moved)) step = Math.max(step, Math.abs(moved - value));
  }
  return step;
}

const slack = (limit: number) => (Number.isFinite(limit) ? DUST * Math.max(1e-6, Math.abs(limit)) : 0);

function boundary({ low, high, say }: { low: number; high: number; say: (value: number) => string }): string {
  if (low === Number.NEGATIVE_INFINITY) return `at most ${say(high)}`;
  return high === Number.POSITIVE_INFINITY ? `at least ${say(low)}` : `${say(low)} to ${say(high)}`;
}

/**
 * Every range of the chamber and every limit of the line's window that these settings (canonical, by name) break. Empty
 * when they lie inside. A value on the limit is inside.
 */
export function outside(
  settings: ReadonlyMap<string, number>,
  chamber: ChamberSettings,
  line: Pick<Line, "window">,
): LimitFinding[] {
  return bearing(settings, chamber, line)
    .filter(({ value, low, high }) => !(value >= low - slack(low) && value <= high + slack(high)))
    .map((limit) => {
      const { text, from, value, low, high, say } = limit;
      const what = from === "range" ? `the range of ${chamber.name}` : "the qualified window";
      return {
        text,
        from,
        value,
        low,
        high,
        sentence: `${text} ${say(value)} is outside ${what}, ${boundary(limit)}.`,
      };
    });
}

/** Limits within one step of being broken: what keeps these settings from going further. Broken ones are not among them. */
export function bindingLimits(
  settings: ReadonlyMap<string, number>,
  chamber: ChamberSettings,
  line: Pick<Line, "window">,
): (LimitFinding & { side: "low" | "high" })[] {
  return bearing(settings, chamber, line).flatMap((limit) => {
    const { text, from, value, low, high, step, say } = limit;
    if (value < low - slack(low) || value > high + slack(high)) return [];
    const side = value + step > high + slack(high) ? "high" : value - step < low - slack(low) ? "low" : null;
    if (side === null) return [];
    const what = from === "range" ? `the range of ${chamber.name}` : "the qualified window";
    const end = side === "high" ? `${say(high)}, its upper end` : `${say(low)}, its lower end`;
    return [
      { text, from, value, low, high, side, sentence: `${text} ${say(value)} is at the edge of ${what}: ${end}.` },
    ];
  });
}

/** How much of one anchor limit corrections have used. */
export interface AnchorUse {
  text: string;
  /** Signed relative change since the anchor, as a fraction: 0.05 is 5 % more. */
  used: number;
  /** The limit, as a fraction. */
  limit: number;
  /** Beyond the limit: a person must look before anything goes further. */
  past: boolean;
  sentence: string;
}

/**
 * Compares settings with the last qualified recipe (`anchorSettings`), both canonical. Limits whose settings are missing
 * on either side, or zero at the anchor, are left out. Exactly at the limit is not past it.
 */
export function anchorUse(
  anchorSettings: ReadonlyMap<string, number>,
  settings: ReadonlyMap<string, number>,
  line: { anchor: readonly AnchorLimit[]; settings?: ReadonlyMap<string, Setting> },
): AnchorUse[] {
  return line.anchor.flatMap((limit) => {
    const before = evaluate(limit, anchorSettings);
    const now = evaluate(limit, settings);
    if (before === null || now === null || before === 0 || !Number.isFinite(now / before)) return [];
    const used = now / before - 1;
    const past = Math.abs(used) > limit.fraction + DUST;
    const [moved, allowed] = [Math.abs(used), limit.fraction].map(
      (share) => `${Number((100 * share).toPrecision(3))} %`,
    );
    const direction = used >= 0 ? "above" : "below";
    const state = past ? `past the ${allowed} they may add up to: a person must look` : `and may add up to ${allowed}`;
    const sentence =
      Math.abs(used) <= DUST
        ? `${limit.text} is where it was last qualified.`
        : `Corrections have brought ${limit.text} ${moved} ${direction} the last qualified recipe, ${state}.`;
    return [{ text: limit.text, used, limit: limit.fraction, past, sentence }];
  });
}
