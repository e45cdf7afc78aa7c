/**
 * What the workspace tells the surfaces (verbs and screens) about a chamber: plain data, no functions, ready to be shown.
 * The screens draw these and nothing else, so everything worth computing is computed below them.
 */
import type { Goal, Setting } from "./line/line.ts";

/** Middle 95 % of what the next run would measure with the declared gauge. */
export interface Interval {
  mean: number;
  low: number;
  high: number;
}

/** A film on the index-thickness plane with the covariance of (index, thickness nm): [var index, cov, var thickness]. */
export interface FilmPoint {
  index: number;
  thicknessNm: number;
  covariance: readonly [number, number, number];
}

export interface Predicted {
  index: Interval | null;
  thickness_nm: Interval | null;
  weighted_reflectance_percent: Interval | null;
  reflectance_minimum_nm: Interval | null;
}

export interface ColourSeen {
  /** "#1b2a6b" */
  hex: string;
  /** In words: "deep blue". */
  words: string;
  lab: readonly [number, number, number];
}

/** What to expect at one set of settings. */
export interface Outlook {
  /** Every setting of the recipe, canonical units. */
  settings: ReadonlyMap<string, number>;
  /** True film of the next run (process scatter in, gauge out), on a polished witness. Null when the chamber has nothing to stand on. */
  film: FilmPoint | null;
  predicted: Predicted;
  /** All goals together; null with the reason in cannotTell. */
  chanceInGoal: number | null;
  /** Chance of each goal on its own, by goal name as in line.yaml. */
  chances: ReadonlyMap<string, number | null>;
  /** Reflectance (0..1) at wavelengthNm of the film's mean on the declared wafer; low/high from the film's 95 % ellipse. */
  spectrum: {
    wavelengthNm: readonly number[];
    reflectance: readonly number[];
    low: readonly number[];
    high: readonly number[];
  } | null;
  /** mA/cm2 over the line's light range. */
  current: { available: number; reflected: number; absorbedInFilm: number; intoSilicon: number } | null;
  colour: ColourSeen | null;
  /** Settings outside the qualified window: sentences. Empty when inside. */
  outsideWindow: readonly string[];
  cannotTell: readonly string[];
}

export type Advice = "change" | "keep" | "measure" | "fault" | "out_of_reach";

/** A run as the screens list it. */
export interface RunSeen {
  entry: number;
  at: string;
  /** Depositions since the clean at this run. */
  sinceClean: number;
  index: number | null;
  thicknessNm: number | null;
  reflectanceMinimumNm: number | null;
  weightedReflectancePercent: number | null;
  /** One-step-ahead prediction before the run was measured, with 95 % half-widths; null when none was possible. */
  expected: { index: number; indexHalf: number; thicknessNm: number; thicknessHalf: number } | null;
  /** Posterior probability that the measurement is bad, and that an unlogged step happened. */
  suspect: number;
  step: number;
}

export interface OpenChange {
  /** "c-000043" */
  change: string;
  state: "adopted" | "entered";
  at: string;
  by: string;
  reason: string;
  before: ReadonlyMap<string, number>;
  after: ReadonlyMap<string, number>;
  /** What to type in at the tool, a line each, changed settings marked. */
  sheet: readonly string[];
  runsSince: number;
}

/** One row of the line screen. */
export interface ChamberRow {
  chamber: string;
  recipe: string;
  /** The goal of that recipe, which the row is judged by. */
  goal: Goal;
  /** Rank of urgency: fault first. */
  attention: "fault" | "propose" | "measure" | "enter" | "close" | "keep" | "no data";
  /** Name of the alarm that stops proposals, null without one. */
  alarm: string | null;
  /** In words, of the film expected next: "4 runs since clean, expected 2.3 nm thin, 31 % in goal: ask for a proposal". */
  sentence: string;
  chanceInGoal: number | null;
  /** Since the last clean logged, or where none was, since the first run. */
  depositionsSinceClean: number;
  cleaned: boolean;
  runs: number;
  lastRuns: readonly RunSeen[];
  awaitingReadings: number;
  openChange: OpenChange | null;
}

export interface LineOverview {
  line: string;
  folder: string;
  demo: boolean;
  goal: Goal;
  goalText: string;
  /** "photons, 300-1100 nm" */
  lightText: string;
  /** The one that needs attention first, first. */
  chambers: readonly ChamberRow[];
  warnings: readonly string[];
  entries: number;
  head: string;
}

/** Everything the chamber screen shows besides what-if answers. */
export interface ChamberView {
  chamber: string;
  recipe: string;
  goal: Goal;
  goalText: string;
  lightText: string;
  surface: "polished" | "pyramids";
  /** The chamber's settings in declared order, with limits. */
  settings: readonly Setting[];
  now: Outlook;
  proposal: ProposalView | null;
  runs: readonly RunSeen[];
  openChange: OpenChange | null;
  /** What the model learned, as sentences in trade units. */
  learned: readonly string[];
  cannotTell: readonly string[];
  alarms: readonly string[];
  /** Weighted reflectance (percent) over the film plane: values[j][i] at thicknessNm[j] (witness), index[i]. */
  plane: {
    index: readonly number[];
    thicknessNm: readonly number[];
    weightedReflectancePercent: readonly (readonly number[])[];
  };
}

export interface ProposalView {
  /** "p-000042", or null when nothing was appended (dry run). */
  proposal: string | null;
  advice: Advice;
  after: Outlook;
  because: readonly string[];
  cannotTell: readonly string[];
  alarms: readonly string[];
  cautions: readonly string[];
  done: boolean;
}
