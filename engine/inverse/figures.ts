/**
 * What a search asks of a stack at given values of its unknowns: the loss, and how far each goal is missed, both with their
 * slopes. The loss is what does not reach the substrate, in mA/cm2: reflected, absorbed in the film, absorbed in the cover.
 */
import { colourDifference } from "../colour/difference.ts";
import { labOf } from "../colour/lab.ts";
import { colourWavelengthNm, tristimulus } from "../colour/observer.ts";
import { refuse } from "../errors.ts";
import type { FilmStackDescription } from "../film-stack.ts";
import { type GridWeights, gridWeights, weightedSum } from "../sunlight/weighting.ts";
import { wavelengthGrid } from "../wavelength-grid.ts";
import { colourDifferenceSlopes, labSlopes } from "./colour-slopes.ts";
import { checkGoal, type FilmGoal, type Found, type Miss, metWithin, missOf, type Wanted, wantedOf } from "./goal.ts";
import { MinimumPlace, type Sloped } from "./minimum-place.ts";
import { type FilmUnknown, type Piece, VariedStack } from "./varied-stack.ts";

/**
 * What a descent follows: the loss in mA/cm2; and smooth things, all of them 0 or less where the goals are met, in units of
 * the goals' tolerances (a goal on the minimum is two of them, see `minimum-place.ts`).
 */
export interface Figures {
  loss: Sloped;
  excess: Sloped[];
}

/** What the stack is: loss, weighted reflectance, and `excess` a goal each: positive where missed, -1 in the middle. */
export interface PlainFigures {
  lossMaCm2: number;
  weightedReflectancePercent: number;
  excess: number[];
}

/** A valley that is to be the lowest counts as missed by one tolerance when it lies this much reflectance above another. */
const valleyUnit = 0.01;
/** It must be lower by this share of that, more than the accuracy of the search, so that it is the lowest beyond doubt. */
const margin = 2 * metWithin;

export class StackFigures {
  readonly wanted: readonly Wanted[];
  /** How often the stack was worked out. */
  evaluations = 0;
  private readonly stack: VariedStack;
  private readonly layers: number;
  private readonly weights: GridWeights;
  private readonly minimum: MinimumPlace | null;
  private readonly spots: VariedStack | null;
  private readonly colour: VariedStack | null;

  /** Refuses as `VariedStack`, `gridWeights` and `checkGoal` do, and a colour goal for a stack not known at 380 to 780 nm ("colour-not-known"). */
  constructor(description: FilmStackDescription, unknowns: readonly FilmUnknown[], goal: FilmGoal) {
    checkGoal(goal);
    const { fromNm, toNm, stepNm, weight } = description.light;
    const grid = wavelengthGrid(fromNm, toNm, stepNm);
    this.weights = gridWeights(grid, fromNm, toNm, weight);
    this.stack = new VariedStack(description, unknowns, grid);
    this.wanted = wantedOf(goal);
    this.layers = description.film.length;
    this.minimum = goal.reflectanceMinimumNm ? new MinimumPlace(description, unknowns, grid) : null;
    const spotsNm = Float64Array.from(goal.reflectance ?? [], (spot) => spot.wavelengthNm);
    this.spots = spotsNm.length > 0 ? new VariedStack(description, unknowns, spotsNm) : null;
    this.colour = goal.colour ? new VariedStack(description, unknowns, colourGrid(description)) : null;
  }

  /** Without slopes, at half the cost. */
  plain(values: ArrayLike<number>): PlainFigures {
    this.evaluations++;
    const { stack, weights } = this;
    stack.evaluate(values);
    const lossMaCm2 = weights.availableMaCm2 - weightedSum(weights.currentMaCm2, stack.transmittance);
    const weightedReflectancePercent = 100 * weightedSum(weights.average, stack.reflectance);
    const excess = this.wanted.map((wanted) => missOf(wanted, this.found(wanted, values)).excess);
    return { lossMaCm2, weightedReflectancePercent, excess };
  }

  /** What each goal gets, and by how much it is missed. */
  misses(values: ArrayLike<number>): Miss[] {
    this.stack.evaluate(values);
    return this.wanted.map((wanted) => missOf(wanted, this.found(wanted, values)));
  }

  /** With slopes; `pieces` as in `VariedStack.slopes`. */
  sloped(values: ArrayLike<number>, pieces: readonly Piece[]): Figures {
    this.evaluations++;
    const { stack, weights } = this;
    stack.slopes(values, pieces);
    const into = weightedSum(weights.currentMaCm2, stack.transmittance);
    const loss = {
      value: weights.availableMaCm2 - into,
      slopes: stack.slopesOf(weights.currentMaCm2, "transmittance").map((slope) => -slope),
    };
    this.spots?.slopes(values, pieces);
    this.colour?.slopes(values, pieces);
    return { loss, excess: this.wanted.flatMap((wanted) => this.excessOf(wanted, values, pieces)) };
  }

  private excessOf(wanted: Wanted, values: ArrayLike<number>, pieces: readonly Piece[]): Sloped[] {
    if (wanted.kind === "minimum") return this.minimumExcess(wanted, values, pieces);
    const { excess, perUnit } = missOf(wanted, this.found(wanted, values, true));
    const slopes = this.foundSlopes(wanted);
    return [{ value: excess, slopes: slopes.map((slope) => perUnit * slope) }];
  }

  private minimumExcess(
    wanted: Extract<Wanted, { kind: "minimum" }>,
    values: ArrayLike<number>,
    pieces: readonly Piece[],
  ): Sloped[] {
    const valley = this.minimum?.nearest(values, pieces, wanted.limit.value) ?? null;
    const { excess, perUnit } = missOf(wanted, valley ? valley.nm.value : null);
    const flat = new Float64Array(values.length);
    const place = { value: excess, slopes: valley ? valley.nm.slopes.map((slope) => perUnit * slope) : flat };
    if (this.layers === 1) return [place];
    if (!valley?.above) return [place, { value: -1, slopes: flat }];
    const { value, slopes } = valley.above;
    return [place, { value: value / valleyUnit + margin, slopes: slopes.map((slope) => slope / valleyUnit) }];
  }

  /** What a goal gets; `fresh` when the stacks were worked out at these values already. */
  private found(wanted: Wanted, values: ArrayLike<number>, fresh = false): Found {
    const { stack, spots, colour } = this;
    switch (wanted.kind) {
      case "weighted":
        return 100 * weightedSum(this.weights.average, stack.reflectance);
      case "minimum":
        return this.minimum?.at(values) ?? null;
      case "spot":
        if (!fresh) spots?.evaluate(values);
        return 100 * (spots as VariedStack).reflectance[wanted.place];
      case "colour":
        if (!fresh) colour?.evaluate(values);
        return colourDifference(labOf(tristimulus((colour as VariedStack).reflectance)), wanted.lab);
    }
  }

  private foundSlopes(wanted: Exclude<Wanted, { kind: "minimum" }>): Float64Array {
    if (wanted.kind === "weighted")
      return this.stack.slopesOf(this.weights.average, "reflectance").map((slope) => 100 * slope);
    if (wanted.kind === "spot") {
      const spots = this.spots as VariedStack;
      const one = new Float64Array(spots.wavelengthNm.length);
      one[wanted.place] = 100;
      return spots.slopesOf(one, "reflectance");
    }
    const colour = this.colour as VariedStack;
    const xyz = tristimulus(colour.reflectance);
    const perLab = colourDifferenceSlopes(labOf(xyz), wanted.lab);
    return colour.slopesOf(labSlopes(xyz, perLab), "reflectance");
  }
}

function colourGrid({ film, substrate }: FilmStackDescription): Float64Array {
  const first = colourWavelengthNm[0];
  const last = colourWavelengthNm[colourWavelengthNm.length - 1];
  for (const { name, rangeNm } of [substrate, ...film.map((layer) => layer.material)]) {
    if (rangeNm[0] <= first && rangeNm[1] >= last) continue;
    refuse(
      "colour-not-known",
      `${name} is known from ${rangeNm[0]} to ${rangeNm[1]} nm; colour needs ${first} to ${last} nm`,
    );
  }
  return colourWavelengthNm;
}
