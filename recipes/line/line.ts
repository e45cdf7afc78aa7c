/**
 * The line as declared in line.yaml, after checking: typed, in canonical units, with the unit each thing was declared in
 * kept for showing it back. Reading the file is `read-line.ts`; this file only says what a line is.
 *
 * Canonical units: sccm, s, W, Pa, degC, mm/s, nm, deg, percent (0 to 100), plain number.
 */
import type { PriorOverrides } from "../../calibration/index.ts";
import type { Dimension } from "../../engine/index.ts";

export interface Tolerance {
  /** Centre of the goal. */
  value: number;
  /** Half-width, > 0. */
  within: number;
}

/** What the film or the wafer should be. Film goals are on a polished witness, index at 632.8 nm. */
export interface Goal {
  index?: Tolerance;
  thicknessNm?: Tolerance;
  /** Upper limit, percent. */
  weightedReflectancePercent?: { atMost: number };
  reflectanceMinimumNm?: Tolerance;
}

export interface Wafer {
  surface: "polished" | "pyramids";
  /** Facet angle, degrees; pyramids only. */
  facetAngleDeg: number;
  /** Film on a facet / film on a polished witness; mean and standard deviation. {1, 0} when polished. */
  facetFactor: { mean: number; sd: number };
  seenFrom: "air" | "glass";
}

export interface Light {
  fromNm: number;
  toNm: number;
  /** "photons", "power", or the quantum efficiency as a table read from the named file. */
  weight: "photons" | "power" | { file: string; wavelengthNm: readonly number[]; efficiency: readonly number[] };
}

/** Repeatability of one reading (one site), and the part shared by all readings of a day. Zero is refused. */
export interface Gauge {
  name: string;
  on: "polished" | "cell";
  index?: number;
  thicknessNm?: number;
  weightedReflectancePercent?: number;
  reflectanceMinimumNm?: number;
  dayToDay: { index: number; thicknessNm: number };
  /** Correlation of its errors in index and thickness, of one reading and from day to day alike; 0 when absent. */
  correlation?: number;
  /** Certified values of its reference wafer, with the standard deviation of the certificate (0: taken as exact). */
  reference?: { index?: { value: number; sd: number }; thicknessNm?: { value: number; sd: number } };
}

export interface Setting {
  name: string;
  dimension: Dimension;
  /** Unit the range was declared in; values of this setting are shown in it. */
  unit: string;
  low: number;
  high: number;
  /** Smallest step that can be typed in, canonical unit. */
  smallest: number;
  /** The controller's full scale, canonical unit, when declared. */
  fullScale: number | null;
  /** May the tool propose changes of it? */
  tune: boolean;
  /** The built-in meaning: its own name, the `acts_as` target, or null for a site's own setting. */
  meaning: string | null;
  /** For a site's own setting: how it enters the model. */
  acts: "log" | "linear" | null;
  /** For the power: whether the number is the pulse's peak or its average over on and off time; undeclared when absent. */
  powerIs?: "peak" | "average";
}

/** `sum` and `ratio` name settings; every limit is an interval in canonical units, open ends infinite. */
export interface WindowLimit {
  /** As written, e.g. "ammonia/silane" or "silane+ammonia" or "silane". */
  text: string;
  kind: "value" | "ratio" | "sum";
  settings: readonly string[];
  low: number;
  high: number;
}

/** How far corrections may add up from the last qualified recipe. */
export interface AnchorLimit {
  text: string;
  kind: "value" | "ratio";
  settings: readonly string[];
  /** Relative, as a fraction: 6 % is 0.06. */
  fraction: number;
}

export interface Chamber {
  name: string;
  /** The line's settings as narrowed for this chamber, in the order declared. */
  settings: ReadonlyMap<string, Setting>;
}

export interface Line {
  name: string;
  /** IANA zone. */
  timeZone: string;
  wafer: Wafer;
  goal: Goal;
  light: Light;
  gauges: ReadonlyMap<string, Gauge>;
  settings: ReadonlyMap<string, Setting>;
  window: readonly WindowLimit[];
  anchor: readonly AnchorLimit[];
  /** A recipe's own goal, by recipe name; goals not listed there fall back to the line's, property by property. */
  recipes: ReadonlyMap<string, { goal: Goal }>;
  people: { approve: readonly string[]; override: readonly string[] };
  chambers: ReadonlyMap<string, Chamber>;
  /** What the line states in place of calibration's standard priors; absent when it states nothing. */
  priors?: PriorOverrides;
  /** SHA-256 of the file's bytes, hex. */
  hash: string;
  /** What the declared numbers imply, for `check`. Sentences. */
  implications: readonly string[];
}

/** The goal a recipe is judged by: its own where given, the line's otherwise. */
export function goalOf(line: Line, recipe: string): Goal {
  return { ...line.goal, ...line.recipes.get(recipe)?.goal };
}
