/**
 * The stage of a rehearsal: one invented line with the chamber that is to be brought to goal, behind one face whatever
 * kind of world it is. `Brief` is what everybody on the line knows and may use; `StageChamber` is the thing itself, whose
 * truth only the score and the oracle see.
 */
import type { Film } from "./aim.ts";
import type { ChamberSettings } from "./worlds.ts";

/** What a gauge said of one film; null what it did not say. */
export interface Reading {
  index: number | null;
  thicknessNm: number | null;
}

/** What happened to a chamber as its book has it. A reading of null is a deposition that nobody measured. */
export type Logged = { kind: "run"; settings: ChamberSettings; reading: Reading | null } | { kind: "clean" };

/** A setting as declared: its range and the step that can be typed in, canonical units. */
export interface StageLever {
  name: string;
  low: number;
  high: number;
  smallest: number;
  /** May it be moved to reach the goal? */
  tune: boolean;
}

export interface Brief {
  /** The line's recipe of the first day, and what it is meant to lay. */
  reference: ChamberSettings;
  aim: Film;
  goal: Film;
  /** Half-widths of the goal. */
  tolerance: Film;
  /** The recipe in force on the chamber when its tuning begins. */
  start: ChamberSettings;
  levers: readonly StageLever[];
  /** Qualified range of ammonia/silane. */
  ratio: readonly [number, number];
  /** The gauge as stated: sd of one site, correlation of its two errors, sites averaged in a reading. */
  gauge: { index: number; thicknessNm: number; correlation: number; sites: number };
  /** Other chambers of the line with their logs. */
  sisters: readonly { name: string; log: readonly Logged[] }[];
  /** The chamber's own log so far; empty for a new one. */
  history: readonly Logged[];
}

export interface StageRun {
  film: Film;
  /** Always made, so that looking or not looking never shifts the readings that follow. */
  reading: Reading;
}

export interface StageChamber {
  /** Lays a film. Weather and readings go by the number of the deposition: they are the same whatever the settings. */
  run(settings: ChamberSettings): StageRun;
  /** A clean; says whether anybody wrote it down. */
  clean(): { written: boolean };
  /** An air leak, until mended. */
  leak(): void;
  mend(): void;
  /** The film the next deposition would give without scatter. */
  expected(settings: ChamberSettings): Film;
  /** The same had the last clean left no step: what can be known before a run has been made. */
  usual(settings: ChamberSettings): Film;
  readonly sinceClean: number;
}

export interface Stage {
  brief: Brief;
  /** The chamber at the moment its tuning begins; made anew each time, always the same. */
  chamber(): StageChamber;
}

/** Does a film lie in the goal? */
export const inGoal = ({ goal, tolerance }: Pick<Brief, "goal" | "tolerance">, film: Film): boolean =>
  Math.abs(film.index - goal.index) <= tolerance.index &&
  Math.abs(film.thicknessNm - goal.thicknessNm) <= tolerance.thicknessNm;

/** Squared misses in units of the tolerance, index plus thickness. */
export const missOf = ({ goal, tolerance }: Pick<Brief, "goal" | "tolerance">, film: Film): number =>
  ((film.index - goal.index) / tolerance.index) ** 2 +
  ((film.thicknessNm - goal.thicknessNm) / tolerance.thicknessNm) ** 2;
