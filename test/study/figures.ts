/**
 * From what single worlds gave to the figures of a study, each with its standard error over worlds. Readings of one world
 * hang together (one gauge, one walk), so a world, not a reading, is the unit whatever the figure.
 */
import { type Random, random } from "../../engine/index.ts";

/**
 * share and mean: the sum over all worlds' values by their number (a share's are 0 or 1). robust sd: 1.48 median |value|,
 * which for a normal scatter is its sd. tail: the |value| that 19 in 20 stay below. below one: the share of |value| < 1.
 */
export type How = "share" | "mean" | "robust sd" | "tail" | "below one";

/** A figure that a scenario promises. */
export interface Figure {
  key: string;
  /** Key of the values in the sample, where several figures are made from the same ones; its own key when left out. */
  from?: string;
  words: string;
  how: How;
  /** Decimals printed. */
  digits: number;
  unit?: string;
  /** What it would be if the model were right, or what is asked of it, in words or as a number. */
  wanted?: string;
}

/** What one world gave: values by figure key. A figure without a chance in this world is absent or empty. */
export type Sample = Readonly<Record<string, readonly number[]>>;

export interface Result {
  figure: Figure;
  /** NaN when no world had a value. */
  value: number;
  /** Standard error over worlds; NaN with fewer than two worlds that have values. */
  error: number;
  values: number;
  worlds: number;
}

/** 1 / the normal quantile of 3/4, the factor between a median |z| and an sd. */
const MEDIAN_TO_SD = 1.4826;
const RESAMPLINGS = 300;

/** The value below which the share p of the sorted values lies, by linear interpolation. NaN for none. */
export function quantileOf(sorted: ArrayLike<number>, p: number): number {
  if (sorted.length === 0) return Number.NaN;
  const at = p * (sorted.length - 1);
  const below = Math.floor(at);
  const above = Math.min(below + 1, sorted.length - 1);
  return sorted[below] + (at - below) * (sorted[above] - sorted[below]);
}

function orderFigure(how: "robust sd" | "tail", worlds: readonly (readonly number[])[]): number {
  const sorted = Float64Array.from(worlds.flat(), Math.abs).sort();
  return how === "robust sd" ? MEDIAN_TO_SD * quantileOf(sorted, 0.5) : quantileOf(sorted, 0.95);
}

/** Sum by number, with the standard error of a ratio estimator (Cochran, Sampling Techniques, from memory). */
function ratio(worlds: readonly (readonly number[])[]): { value: number; error: number } {
  const sums = worlds.map((w) => w.reduce((a, b) => a + b, 0));
  const count = worlds.reduce((n, w) => n + w.length, 0);
  const value = sums.reduce((a, b) => a + b, 0) / count;
  const square = worlds.reduce((total, w, i) => total + (sums[i] - value * w.length) ** 2, 0);
  const n = worlds.length;
  return { value, error: n < 2 ? Number.NaN : Math.sqrt((square * n) / (n - 1)) / count };
}

/** The sd of an order figure when worlds are drawn again from those there are. */
function redrawn(how: "robust sd" | "tail", worlds: readonly (readonly number[])[], source: Random): number {
  if (worlds.length < 2) return Number.NaN;
  const values = Array.from({ length: RESAMPLINGS }, () =>
    orderFigure(
      how,
      worlds.map(() => source.choice(worlds)),
    ),
  );
  const mean = values.reduce((a, b) => a + b, 0) / values.length;
  return Math.sqrt(values.reduce((total, v) => total + (v - mean) ** 2, 0) / (values.length - 1));
}

/** The figure over these worlds. Worlds without a value do not count. */
export function figureOver(figure: Figure, samples: readonly Sample[]): Result {
  const { how, key, from = key } = figure;
  const worlds = samples.map((s) => s[from] ?? []).filter((values) => values.length > 0);
  const values = worlds.reduce((n, w) => n + w.length, 0);
  if (values === 0) return { figure, value: Number.NaN, error: Number.NaN, values, worlds: 0 };
  let found: { value: number; error: number };
  if (how === "robust sd" || how === "tail")
    found = { value: orderFigure(how, worlds), error: redrawn(how, worlds, random(`redrawn/${key}`)) };
  else found = ratio(how === "below one" ? worlds.map((w) => w.map((v) => Number(Math.abs(v) < 1))) : worlds);
  return { figure, ...found, values, worlds: worlds.length };
}

/** Is the figure a share of something, so that 0 and 1 are its ends? */
export const isShare = ({ how }: Figure) => how === "share" || how === "below one";
