/**
 * The one door to room `calibration/`: typed runs in, a chamber model out (film response, priors, filter, sisters,
 * suspicions, predictions with covariance). Re-exports only.
 */
export { ChamberModel, type Coefficient } from "./chamber-model.ts";
export { type Cut, chanceIn, type GoalRegion } from "./chance.ts";
export { type FacetFactor, facetFactor } from "./facet.ts";
export { type Suspicion, suspicions } from "./faults.ts";
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
export { type Untold, untold } from "./identifiability.ts";
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
