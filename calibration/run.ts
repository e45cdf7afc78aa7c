/**
 * What calibration learns from: the typed history of each chamber, already free of files, units and corrections.
 * Settings are in canonical units (sccm, s, W, Pa, degC, mm/s) by name.
 */

/** Settings by name, canonical units. */
export type Settings = ReadonlyMap<string, number>;

/** Variances and covariance of (index, thickness nm) of one reading's mean: [var index, cov, var thickness]. */
export type GaugeCovariance = readonly [number, number, number];

/** Film read on a polished witness; either property may be missing (null). */
export interface FilmReading {
  index: number | null;
  thicknessNm: number | null;
  /** Gauge (in)exactness of the values as given, sites already averaged, day-to-day part included. */
  gauge: GaugeCovariance;
}

/** A reflectance feature read on the coated cell. `sd` in the unit of the value. */
export interface LightReading {
  kind: "reflectance_minimum_nm" | "weighted_reflectance_percent";
  value: number;
  sd: number;
}

export interface RunEvent {
  kind: "run";
  /** Number of the entry in the book, for pointing at it. */
  entry: number;
  settings: Settings;
  /** Depositions this entry stands for, >= 1; the reading belongs to the last one. */
  count: number;
  /** The tool's own counter of depositions since the clean, when it was given. */
  sinceClean: number | null;
  film: FilmReading | null;
  light: readonly LightReading[];
}

export interface CleanEvent {
  kind: "clean";
  entry: number;
}
export interface ServiceEvent {
  kind: "service";
  entry: number;
}
export interface PrecoatEvent {
  kind: "precoat";
  entry: number;
  count: number;
}

export type ChamberEvent = RunEvent | CleanEvent | ServiceEvent | PrecoatEvent;

/** One chamber's history in the order it happened. */
export interface ChamberLog {
  chamber: string;
  events: readonly ChamberEvent[];
}
