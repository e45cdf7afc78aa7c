/**
 * From one start to the local answer: first into the region where every goal is met, by least squares of the misses; then to
 * the least loss inside it, by an augmented Lagrangian (M. J. D. Powell and M. R. Hestenes, 1969; R. T. Rockafellar, 1973, for
 * inequalities; from memory), whose inner problems are smooth descents in the box. Where the goals are out of reach from here
 * the answer is the place where they are missed least.
 */
import { type Descent, descend } from "./box-descent.ts";
import type { StackFigures } from "./figures.ts";
import { metWithin } from "./goal.ts";
import type { Piece } from "./varied-stack.ts";

export interface LocalAnswer {
  values: Float64Array;
  pieces: Piece[];
  /** Goals met to `metWithin`; true without goals. */
  met: boolean;
  lossMaCm2: number;
  /** Sum of the squared misses, each in its goal's tolerance. */
  missed: number;
  /**
   * Largest slope that still leads down, per width of the range: of the loss and the goals that hold it together (in mA/cm2),
   * or of `missed` where the goals are not met.
   */
  slope: number;
}

/** mA/cm2 over the whole range: a slope of this moves the place by less than a hundred-thousandth of the range. */
const flatLoss = 1e-6;
const flatMiss = 1e-9;
/** Squared misses this small are a met goal: a tenth of `metWithin`. */
const missedNothing = (metWithin / 10) ** 2;

const mostRounds = 15;

/** Descends from `start` to the local answer. */
export function goalDescent(
  figures: StackFigures,
  start: ArrayLike<number>,
  pieces: readonly (readonly Piece[])[],
): LocalAnswer {
  const goals = figures.wanted.length;
  if (goals === 0) return answerAt(figures, leastLoss(figures, start, pieces, [], 0));
  const into = descend(
    (x, inside, gradient) => {
      const { excess } = figures.sloped(x, inside);
      gradient.fill(0);
      let sum = 0;
      for (const { value, slopes } of excess) {
        if (value <= 0) continue;
        sum += value * value;
        for (let j = 0; j < x.length; j++) gradient[j] += 2 * value * slopes[j];
      }
      return sum;
    },
    start,
    pieces,
    { flat: flatMiss, enough: missedNothing },
  );
  const entered = answerAt(figures, into);
  if (!entered.met) return entered;
  return constrained(figures, entered, pieces);
}

/** The least loss where every goal is met, from a place where they are; that place itself where the search loses the goals. */
function constrained(figures: StackFigures, entered: LocalAnswer, pieces: readonly (readonly Piece[])[]): LocalAnswer {
  let pulls = figures.sloped(entered.values, entered.pieces).excess.map(() => 0);
  // mA/cm2 a squared tolerance: a goal missed by one tolerance weighs more than any film could gain.
  let stiffness = 20;
  let before = Number.POSITIVE_INFINITY;
  let best = entered;
  let from: ArrayLike<number> = entered.values;
  for (let round = 0; round < mostRounds; round++) {
    const found = leastLoss(figures, from, pieces, pulls, stiffness);
    const excess = figures.sloped(found.x, found.pieces).excess.map(({ value }) => value);
    const answer = answerAt(figures, found);
    // How far the goals that hold are still off, from either side.
    const off = excess.reduce((most, value, i) => Math.max(most, Math.abs(Math.max(value, -pulls[i] / stiffness))), 0);
    if (answer.met && off < metWithin / 100) return answer;
    if (answer.met && answer.lossMaCm2 < best.lossMaCm2) best = answer;
    pulls = pulls.map((pull, i) => Math.max(0, pull + stiffness * excess[i]));
    if (off > before / 4) stiffness *= 4;
    before = off;
    from = found.x;
  }
  return best;
}

/** Least of the loss plus what the goals add to it: ((max(0, pull + stiffness c))^2 - pull^2) / (2 stiffness) a goal. */
function leastLoss(
  figures: StackFigures,
  start: ArrayLike<number>,
  pieces: readonly (readonly Piece[])[],
  pulls: readonly number[],
  stiffness: number,
): Descent {
  return descend(
    (x, inside, gradient) => {
      const { loss, excess } = figures.sloped(x, inside);
      let sum = loss.value;
      gradient.set(loss.slopes);
      excess.forEach(({ value, slopes }, i) => {
        const pull = pulls[i] + stiffness * value;
        sum += (Math.max(0, pull) ** 2 - pulls[i] ** 2) / (2 * stiffness);
        if (pull > 0) for (let j = 0; j < x.length; j++) gradient[j] += pull * slopes[j];
      });
      return sum;
    },
    start,
    pieces,
    { flat: flatLoss },
  );
}

function answerAt(figures: StackFigures, { x, pieces, slope }: Descent): LocalAnswer {
  const { lossMaCm2, excess } = figures.plain(x);
  const missed = excess.reduce((sum, value) => sum + Math.max(0, value) ** 2, 0);
  const met = excess.every((value) => value <= metWithin);
  return { values: x, pieces, met, lossMaCm2, missed, slope };
}
