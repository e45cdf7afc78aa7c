/**
 * The one door to room `engine/`: what light does in the coated wafer, and the small numerics the other rooms need.
 * Re-exports only. Code outside this room imports from here and from nowhere else in it.
 */

export * from "./colour/difference.ts";
export * from "./colour/lab.ts";
export * from "./colour/observer.ts";
export * from "./colour/words.ts";
export * from "./constants.ts";
export { finite, type Problem, Refusal, refuse } from "./errors.ts";
export * from "./film-stack.ts";
export * from "./materials/dispersion.ts";
export * from "./materials/library.ts";
export * from "./materials/material.ts";
export * from "./materials/nitride-family.ts";
export * from "./materials/table.ts";
export * from "./nearest-word.ts";
export { incompleteBeta } from "./numerics/beta.ts";
export * from "./numerics/chi-square.ts";
export * from "./numerics/cholesky.ts";
export * from "./numerics/erfc.ts";
export * from "./numerics/ewma.ts";
export * from "./numerics/f-ratio.ts";
export { incompleteGamma, logGamma, type TailPair } from "./numerics/gamma.ts";
export { inverseOfGram, type QrSolution, qrSolve, triangularise } from "./numerics/householder.ts";
export * from "./numerics/interpolate.ts";
export * from "./numerics/least-squares.ts";
export * from "./numerics/log-sum-exp.ts";
export * from "./numerics/minimise.ts";
export * from "./numerics/mixture.ts";
export * from "./numerics/nelder-mead.ts";
export * from "./numerics/nonlinear.ts";
export * from "./numerics/normal.ts";
export * from "./numerics/quadrature.ts";
export { type Random, random } from "./numerics/random.ts";
export * from "./numerics/rank-one.ts";
export * from "./numerics/root.ts";
export { studentTCdf, studentTPdf, studentTQuantile } from "./numerics/student-t.ts";
export * from "./numerics/symmetric-eigen.ts";
export * from "./numerics/triangular.ts";
export * from "./optics/fresnel.ts";
export * from "./optics/one-film.ts";
export * from "./optics/reflectance-minimum.ts";
export * from "./optics/stack.ts";
export * from "./optics/thick-layers.ts";
export * from "./quantity.ts";
export * from "./sunlight/spectrum.ts";
export * from "./sunlight/weighting.ts";
export * from "./surface/bounce-paths.ts";
export * from "./surface/path-sum.ts";
export * from "./surface/pyramids.ts";
export * from "./surface/seen-from.ts";
export * from "./units.ts";
export * from "./wafer.ts";
export * from "./wafer-table.ts";
export * from "./wavelength-grid.ts";
