/**
 * Mixed models fitted by the program's own filter, for checks against published fits and for the bench: groups are
 * chambers, fixed effects the fleet's mean, random effects what a chamber is off the fleet.
 *
 * The filter wants a proper prior, restricted likelihood a flat one. The swap is exact. Under the proper prior N(m0, P0)
 * the readings have density p0 and the fixed effects the law N(m1, P1), so the likelihood of the fixed effects b alone is
 * p0 N(b; m1, P1)/N(b; m0, P0), a Gaussian in b, and its integral over all b, which is the restricted likelihood, is
 *
 *   p0 sqrt(|P0|/(|P1||J|)) (2 pi)^(p/2) exp((h'J^-1 h - m1'P1^-1 m1 + m0'P0^-1 m0)/2),
 *   J = P1^-1 - P0^-1,  h = P1^-1 m1 - P0^-1 m0,
 *
 * with estimates J^-1 h and their covariance J^-1. No constant is left over: lme4's criterion is -2 ln of it.
 *
 * Random effects that go together (covariance U diag(D) U', U unit lower triangular) become independent in the
 * coordinates U^-1 b, where the regressors are U'h; the fixed effects are turned with them and U has determinant 1, so
 * likelihood and integral stay the same.
 */
import { coefficientLaw, drawChamber, hearSister, invertSpd, type Law, stateOf } from "../../calibration/sisters.ts";
import { resetLast, type State, updateScalar } from "../../calibration/square-root.ts";

/** One group's readings: p regressors a row, the constant first. */
export interface Group {
  readonly name: string;
  readonly y: readonly number[];
  readonly rows: readonly (readonly number[])[];
}

/** Variances of the random effects: one (intercept), or two with what they share. */
export interface Components {
  readonly residual: number;
  readonly intercept: number;
  readonly slope?: number;
  readonly covariance?: number;
}

/** Coordinates in which the random effects are independent. */
interface Turned {
  /** Variances of the independent effects, one a fixed effect; a fixed effect without a random one has zero. */
  readonly spread: Float64Array;
  /** U below its diagonal: how much of the first effect the second brings along. */
  readonly along: number;
}

function turned(components: Components, p: number): Turned {
  const { intercept, slope = 0, covariance = 0 } = components;
  if (p === 1) return { spread: Float64Array.of(intercept), along: 0 };
  const along = covariance / intercept;
  return { spread: Float64Array.of(intercept, slope - along * covariance), along };
}

/** U'h. */
const turnRow = (row: readonly number[], { along }: Turned): Float64Array =>
  row.length === 1 ? Float64Array.from(row) : Float64Array.of(row[0] + along * row[1], row[1]);
/** U b. */
const back = (b: ArrayLike<number>, { along }: Turned): number[] =>
  b.length === 1 ? [b[0]] : [b[0], along * b[0] + b[1]];

/** U C U', dense. */
function backCovariance(c: Float64Array, p: number, { along }: Turned): Float64Array {
  if (p === 1) return c.slice();
  const cross = along * c[0] + c[1];
  return Float64Array.of(c[0], cross, cross, along * (along * c[0] + 2 * c[1]) + c[3]);
}

/** A proper prior of the fixed effects, in the unit of the readings; the sd is a scale, nothing depends on it. */
export interface Start {
  readonly mean: readonly number[];
  readonly sd: readonly number[];
}

function priorOf(start: Start, turn: Turned): Law {
  const p = start.mean.length;
  const mean = Float64Array.from(start.mean);
  if (p === 2) mean[1] -= turn.along * mean[0];
  const covariance = new Float64Array(p * p);
  for (let i = 0; i < p; i++) covariance[i * p + i] = start.sd[i] ** 2;
  return { p, mean, covariance };
}

/** A fit at given components. */
export interface RestrictedFit {
  /** -2 ln of the restricted likelihood, as lme4 prints it. */
  readonly criterion: number;
  readonly fixedEffects: number[];
  /** p x p. */
  readonly covariance: Float64Array;
}

/** Takes the proper prior out of what was learned under it (head of this file). */
function withFlatPrior(prior: Law, posterior: Law, logDensity: number, turn: Turned): RestrictedFit {
  const p = prior.p;
  const before = invertSpd(prior.covariance, p);
  const after = invertSpd(posterior.covariance, p);
  const information = after.inverse.map((v, i) => v - before.inverse[i]);
  const times = (a: Float64Array, v: Float64Array) =>
    Float64Array.from({ length: p }, (_, i) => v.reduce((sum, x, j) => sum + a[i * p + j] * x, 0));
  const dot = (a: Float64Array, b: Float64Array) => a.reduce((sum, x, i) => sum + x * b[i], 0);
  // About the prior's mean, so that no large squares are subtracted: m0 is zero there.
  const step = posterior.mean.map((m, i) => m - prior.mean[i]);
  const h = times(after.inverse, step);
  const flat = invertSpd(information, p);
  const estimate = times(flat.inverse, h);
  const log =
    logDensity +
    0.5 * (before.logDet - after.logDet - flat.logDet + p * Math.log(2 * Math.PI) + dot(h, estimate) - dot(step, h));
  return {
    criterion: -2 * log,
    fixedEffects: back(
      estimate.map((e, i) => e + prior.mean[i]),
      turn,
    ),
    covariance: backCovariance(flat.inverse, p, turn),
  };
}

/** One group filtered on its own from a law of its effects. */
function pass(group: Group, law: Law, turn: Turned, residual: number): { posterior: Law; logDensity: number } {
  const state = stateOf(law);
  let logDensity = 0;
  group.y.forEach((y, i) => {
    logDensity += updateScalar(state, turnRow(group.rows[i], turn), y, residual);
  });
  return { posterior: lawOf(state), logDensity };
}

/** The whole state as a law: `coefficientLaw` leaves off two steps, which these states do not have. */
function lawOf(state: State): Law {
  const n = state.n + 2;
  const factor = new Float64Array(n * n);
  for (let i = 0; i < state.n; i++) for (let j = 0; j <= i; j++) factor[i * n + j] = state.factor[i * state.n + j];
  const mean = new Float64Array(n);
  mean.set(state.mean);
  return coefficientLaw({ n, mean, factor });
}

/**
 * The fit with groups as sister chambers: every group is filtered once from "some chamber of this line", and what it says is
 * heard by the fleet (`sisters.ts`). Every fixed effect needs a random one.
 */
export function fitAsChambers(groups: readonly Group[], components: Components, start: Start): RestrictedFit {
  const turn = turned(components, start.mean.length);
  const prior = priorOf(start, turn);
  const generic = drawChamber(prior, turn.spread);
  let fleet = prior;
  let total = 0;
  for (const group of groups) {
    const heard = hearSister(fleet, turn.spread, { generic, ...pass(group, generic, turn, components.residual) });
    fleet = heard.fleet;
    total += heard.logDensity;
  }
  return withFlatPrior(prior, fleet, total, turn);
}

/**
 * The same with groups as stretches between cleans of one chamber: the random effects are steps drawn anew at each clean
 * (`resetLast`). A fixed effect without a random one is allowed.
 */
export function fitAsCleans(groups: readonly Group[], components: Components, start: Start): RestrictedFit {
  const p = start.mean.length;
  const turn = turned(components, p);
  const prior = priorOf(start, turn);
  const fresh = Array.from(turn.spread, (variance) => ({ mean: 0, sd: Math.sqrt(variance) }));
  const coefficients = stateOf(prior);
  const state: State = { n: 2 * p, mean: new Float64Array(2 * p), factor: new Float64Array(4 * p * p) };
  for (let i = 0; i < p; i++) {
    state.mean[i] = coefficients.mean[i];
    for (let j = 0; j <= i; j++) state.factor[i * 2 * p + j] = coefficients.factor[i * p + j];
  }
  let total = 0;
  for (const group of groups) {
    resetLast(state, fresh);
    group.y.forEach((y, i) => {
      const h = turnRow(group.rows[i], turn);
      total += updateScalar(state, Float64Array.of(...h, ...h), y, components.residual);
    });
  }
  const all = lawOf(state);
  const covariance = new Float64Array(p * p);
  for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) covariance[i * p + j] = all.covariance[i * 2 * p + j];
  return withFlatPrior(prior, { p, mean: all.mean.slice(0, p), covariance }, total, turn);
}

/** -2 ln of the likelihood with the fixed effects known. */
export function criterionAt(groups: readonly Group[], components: Components, fixedEffects: readonly number[]): number {
  const turn = turned(components, fixedEffects.length);
  const known = priorOf({ mean: fixedEffects, sd: fixedEffects.map(() => 0) }, turn);
  const law = drawChamber(known, turn.spread);
  return -2 * groups.reduce((sum, group) => sum + pass(group, law, turn, components.residual).logDensity, 0);
}

/** What a group is expected to be off the fixed effects, and the sd of that with the fixed effects known. */
export function offsetOf(
  group: Group,
  components: Components,
  fixedEffects: readonly number[],
): { effect: number[]; sd: number[] } {
  const p = fixedEffects.length;
  const turn = turned(components, p);
  const known = priorOf({ mean: fixedEffects, sd: fixedEffects.map(() => 0) }, turn);
  const { posterior } = pass(group, drawChamber(known, turn.spread), turn, components.residual);
  const covariance = backCovariance(posterior.covariance, p, turn);
  return {
    effect: back(posterior.mean, turn).map((b, i) => b - fixedEffects[i]),
    sd: fixedEffects.map((_, i) => Math.sqrt(covariance[i * p + i])),
  };
}

/**
 * A group's own effects (fixed and random together) the way the program predicts a chamber: all other groups are heard,
 * the chamber is drawn from the fleet and then filtered through its own readings. `start` should be centred on the
 * estimates: then its width leaves the mean alone.
 */
export function predictedGroup(groups: readonly Group[], at: number, components: Components, start: Start): number[] {
  const turn = turned(components, start.mean.length);
  const prior = priorOf(start, turn);
  const generic = drawChamber(prior, turn.spread);
  let fleet = prior;
  groups.forEach((group, i) => {
    if (i === at) return;
    fleet = hearSister(fleet, turn.spread, { generic, ...pass(group, generic, turn, components.residual) }).fleet;
  });
  const own = pass(groups[at], drawChamber(fleet, turn.spread), turn, components.residual);
  return back(own.posterior.mean, turn);
}
