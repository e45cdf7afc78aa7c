/**
 * From what practices did in single worlds to the scoreboard. A world, not a run, is the unit of every standard error:
 * runs of one world hang together. Errors of sums are those of a ratio estimator (Cochran, Sampling Techniques, from
 * memory); those of order statistics and of the gap come from drawing the worlds again, seeded.
 */
import { type Random, random } from "../../engine/index.ts";
import type { Played } from "./closed-loop.ts";

/** A figure with its standard error over worlds; NaN where there is nothing to tell. */
export interface Figure {
  value: number;
  error: number;
}

export interface Score {
  practice: string;
  worlds: number;
  /** Runs to goal; null where the scenario has nothing to tune. */
  runs: { median: number; mean: Figure; p90: number; within: [Figure, Figure, Figure]; never: Figure } | null;
  /** Of the tunings that ended with a reading in goal, those whose film was not. */
  falseDone: Figure;
  /** True film in goal, later; and the share that nine worlds in ten exceed. */
  later: Figure;
  worstDecile: Figure;
  changesPer100: Figure;
  /** Runs measured in a world, tuning included. */
  measured: Figure;
  /** Changes made per 100 depositions before which nothing was wrong. */
  idlePer100: Figure;
  /** Stops without anything broken, per 100 depositions of production. */
  falseStopsPer100: Figure;
  /** Of the leaks, those named within 1, 2 and 3 measured runs; null where none came. */
  leakNamed: [Figure, Figure, Figure] | null;
  /** Depositions until it said that tuning is done, median over the worlds in which it did, and the share of these. */
  saidDone: { median: number; share: Figure } | null;
  /** Share of worlds in which its first answer said what the history cannot tell; null where there is nothing to say. */
  toldUntold: Figure | null;
  /** Shares of the advice given, by name. */
  advice: Record<string, number>;
  /** Chances stated, by tenths, beside what came of them. */
  calibration: { from: number; to: number; stated: number; came: Figure; count: number }[];
}

const RESAMPLINGS = 300;

/** The value below which the share p of the values lies, by linear interpolation. NaN for none. */
export function quantile(values: readonly number[], p: number): number {
  if (values.length === 0) return Number.NaN;
  const sorted = [...values].sort((a, b) => a - b);
  const at = p * (sorted.length - 1);
  const below = Math.floor(at);
  return sorted[below] + (at - below) * (sorted[Math.min(below + 1, sorted.length - 1)] - sorted[below]);
}

/** Sum of `over` by sum of `by`, world by world. */
export function ratioOf(worlds: readonly { over: number; by: number }[]): Figure {
  const some = worlds.filter((w) => w.by > 0);
  const by = some.reduce((sum, w) => sum + w.by, 0);
  if (by === 0) return { value: Number.NaN, error: Number.NaN };
  const value = some.reduce((sum, w) => sum + w.over, 0) / by;
  const n = some.length;
  const square = some.reduce((sum, w) => sum + (w.over - value * w.by) ** 2, 0);
  return { value, error: n < 2 ? Number.NaN : Math.sqrt((square * n) / (n - 1)) / by };
}

/** The sd of a statistic when worlds are drawn again from those there are. */
export function redrawn<W>(worlds: readonly W[], of: (drawn: readonly W[]) => number, source: Random): number {
  if (worlds.length < 2) return Number.NaN;
  const values = Array.from({ length: RESAMPLINGS }, () => of(worlds.map(() => source.choice(worlds))));
  const mean = values.reduce((a, b) => a + b, 0) / values.length;
  return Math.sqrt(values.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (values.length - 1));
}

const per = (worlds: readonly Played[], over: (p: Played) => number, by: (p: Played) => number): Figure =>
  ratioOf(worlds.map((p) => ({ over: over(p), by: by(p) })));
const times = ({ value, error }: Figure, by: number): Figure => ({ value: by * value, error: by * error });
const laterShare = (p: Played) => p.later.hits / p.later.made;

/** The scoreboard row of a practice. */
export function scoreOf(practice: string, worlds: readonly Played[]): Score {
  const tuned = worlds.filter((p) => p.runs !== null);
  const runs = tuned.map((p) => p.runs ?? 0);
  const share = (some: readonly Played[], holds: (p: Played) => boolean) =>
    per(
      some,
      (p) => Number(holds(p)),
      () => 1,
    );
  const within = (most: number) => share(tuned, (p) => p.reached && (p.runs ?? 0) <= most);
  const later = worlds.filter((p) => p.later.made > 0);
  const leaks = worlds.filter((p) => p.leaked);
  const named = (most: number) => share(leaks, (p) => p.leakNamedAfter !== null && p.leakNamedAfter <= most);
  const asked = worlds.filter((p) => p.toldUntold !== null);
  const worst = (some: readonly Played[]) => quantile(some.map(laterShare), 0.1);
  const made = (p: Played) => p.later.made;
  return {
    practice,
    worlds: worlds.length,
    runs:
      tuned.length === 0
        ? null
        : {
            median: quantile(runs, 0.5),
            mean: per(
              tuned,
              (p) => p.runs ?? 0,
              () => 1,
            ),
            p90: quantile(runs, 0.9),
            within: [within(1), within(2), within(3)],
            never: share(tuned, (p) => !p.reached),
          },
    falseDone: share(
      tuned.filter((p) => p.reached),
      (p) => p.falseDone,
    ),
    later: per(later, (p) => p.later.hits, made),
    worstDecile: { value: worst(later), error: redrawn(later, worst, random("worst decile")) },
    changesPer100: times(
      per(later, (p) => p.changes, made),
      100,
    ),
    idlePer100: times(
      per(
        worlds,
        (p) => p.idle.changes,
        (p) => p.idle.chances,
      ),
      100,
    ),
    measured: per(
      worlds,
      (p) => p.measured,
      () => 1,
    ),
    falseStopsPer100: times(
      per(later, (p) => p.falseStops, made),
      100,
    ),
    leakNamed: leaks.length === 0 ? null : [named(1), named(2), named(3)],
    saidDone: doneOf(worlds),
    toldUntold: asked.length === 0 ? null : share(asked, (p) => p.toldUntold === true),
    advice: adviceShares(worlds),
    calibration: calibrationOf(worlds),
  };
}

function doneOf(worlds: readonly Played[]): Score["saidDone"] {
  const said = worlds.flatMap(({ saidDone }) => saidDone ?? []);
  if (said.length === 0) return null;
  const share = ratioOf(worlds.map((p) => ({ over: Number(p.saidDone !== null), by: 1 })));
  return { median: quantile(said, 0.5), share };
}

function adviceShares(worlds: readonly Played[]): Record<string, number> {
  const counts = new Map<string, number>();
  for (const { advice } of worlds)
    for (const [name, count] of Object.entries(advice)) counts.set(name, (counts.get(name) ?? 0) + count);
  const all = [...counts.values()].reduce((a, b) => a + b, 0);
  return Object.fromEntries([...counts].sort().map(([name, count]) => [name, count / all]));
}

function calibrationOf(worlds: readonly Played[]): Score["calibration"] {
  return Array.from({ length: 10 }, (_, tenth) => {
    const inside = (chance: number) => Math.min(9, Math.floor(10 * chance)) === tenth;
    const some = worlds.map((p) => p.stated.filter((s) => inside(s.chance)));
    const all = some.flat();
    return {
      from: tenth / 10,
      to: (tenth + 1) / 10,
      stated: all.reduce((sum, s) => sum + s.chance, 0) / all.length,
      came: ratioOf(some.map((s) => ({ over: s.filter((one) => one.hit).length, by: s.length }))),
      count: all.length,
    };
  }).filter(({ count }) => count > 0);
}

/**
 * How much of the way from a rival to the oracle is closed, in later production in goal: (ours - rival) / (oracle - rival).
 * The three hold the same worlds in the same order. NaN where the oracle is not above the rival.
 */
export function gapClosed(ours: readonly Played[], rival: readonly Played[], oracle: readonly Played[]): Figure {
  const worlds = ours.map((p, i) => ({ ours: p, rival: rival[i], oracle: oracle[i] }));
  const gap = (some: readonly (typeof worlds)[number][]) => {
    const share = (of: (w: (typeof worlds)[number]) => Played) => {
      const made = some.reduce((sum, w) => sum + of(w).later.made, 0);
      return some.reduce((sum, w) => sum + of(w).later.hits, 0) / made;
    };
    const left = share((w) => w.oracle) - share((w) => w.rival);
    return left > 0 ? (share((w) => w.ours) - share((w) => w.rival)) / left : Number.NaN;
  };
  return { value: gap(worlds), error: redrawn(worlds, gap, random("gap")) };
}
