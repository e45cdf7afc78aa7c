/**
 * The one door to room `calibration/`: typed runs in, a chamber model out (film response, priors, filter, sisters,
 * suspicions, predictions with covariance). Re-exports only.
 */

export { type Belief, type BeliefRows, beliefOf, beliefRows, type Course, type Courses, coursesOf } from "./ahead.ts";
export { allMoved, type CommonMove } from "./alarms/common-move.ts";
export { type Corrected, type MistakeName, type ReadingMistake, readingMistakes } from "./alarms/reading-mistakes.ts";
export {
  falseAlarmsPerMonth,
  type SlowShift,
  type Surprises,
  slowShiftMemory,
  slowShifts,
  surprisesOf,
} from "./alarms/slow-shift.ts";
export type { CauseKind } from "./cause-evidence.ts";
export type { MissedRun, Misses } from "./cause-misses.ts";
export type { TellingRun } from "./cause-telling.ts";
export { type Cause, type CauseQuestion, causesOf, type Explanation } from "./causes.ts";
export { ChamberModel, type Coefficient } from "./chamber-model.ts";
export { type Cut, chanceIn, type GoalRegion } from "./chance.ts";
export { type FacetFactor, facetFactor } from "./facet.ts";
export { type ShiftName, type Suspicion, suspicions } from "./faults.ts";
export {
  type Bounds,
  type FilmLaw,
  type FilmPart,
  filmMoments,
  filmPoint,
  indexBounds,
  thicknessBounds,
} from "./film-law.ts";
export { filmResponse, type Lever } from "./film-response.ts";
export {
  type Bias,
  type GaugeBias,
  gaugeBias,
  noBias,
  type ReferenceGauge,
  type ReferenceReading,
} from "./gauge-bias.ts";
export { type Untold, type UntoldOptions, untold } from "./identifiability.ts";
export type { MinimumOf, WeightedOf } from "./light-link.ts";
export { type LearnOptions, LineModel } from "./line-model.ts";
export { type Prior, type PriorOverrides, type Priors, priorsWith, standardPriors } from "./priors.ts";
export type {
  ChamberEvent,
  ChamberLog,
  CleanEvent,
  FilmReading,
  GaugeCovariance,
  LightReading,
  PrecoatEvent,
  RunEvent,
  ServiceEvent,
  Settings,
} from "./run.ts";
export { type Coverage, coverageOf, type TrackedRun, trackRecord } from "./track-record.ts";
