/**
 * The hands that move a studied chamber: an engineer who corrects in proportion after each reading (time by the thickness,
 * gas ratio by the index with a slope known by heart), tries something else now and then, and does not chase absurd
 * readings. Not clever on purpose: what is studied is what the model learns from such a history.
 */
import type { Settings } from "../../calibration/index.ts";
import type { Random } from "../../engine/index.ts";
import type { Film } from "../../recipes/rehearsal/aim.ts";
import { need, shiftRatio } from "../../recipes/rehearsal/film-law.ts";
import type { StudyWorld } from "./worlds-under-study.ts";

/** Index per ln(ammonia/silane) as the trade's rule of thumb has it (common practice, no source). */
const SLOPE_BY_HEART = -0.3;
/** Share of a miss that is corrected at once, and of a tolerance that is left alone. */
const EAGERNESS = 0.7;
const LEFT_ALONE = 0.35;
/** Chance that a run tries something else, and how far it goes: sd of ln ratio, ln time, ln total flow. */
const TRIES = { chance: 0.15, ratio: 0.03, time: 0.02, flow: 0.015 };
/** Readings farther off than this are taken for slips by anybody. */
const ABSURD = { index: 0.2, relative: 0.3 };
/** How far from the reference recipe the gas ratio and the time may go, in logarithms. */
const REACH = { ratio: 0.6, time: 0.5 };

/** Rounded to what can be typed in: 1 sccm, 1 s. */
export function typedIn(settings: Settings): Settings {
  return new Map(
    [...settings].map(([name, value]) =>
      name === "silane" || name === "ammonia" || name === "time" ? [name, Math.round(value)] : [name, value],
    ),
  );
}

const ratioOf = (settings: Settings) => need(settings, "ammonia") / need(settings, "silane");
const withTime = (settings: Settings, factor: number): Settings =>
  new Map([...settings, ["time", need(settings, "time") * factor]]);
const clamp = (value: number, by: number) => Math.min(by, Math.max(-by, value));

/** Kept within reach of the reference recipe. */
function withinReach(settings: Settings, reference: Settings): Settings {
  const ratio = Math.log(ratioOf(settings) / ratioOf(reference));
  const time = Math.log(need(settings, "time") / need(reference, "time"));
  return withTime(
    shiftRatio(settings, Math.exp(clamp(ratio, REACH.ratio) - ratio)),
    Math.exp(clamp(time, REACH.time) - time),
  );
}

/** Silane, ammonia and time each moved at random by a few per cent about a recipe: how a sister's history looks. */
export function scatteredAbout(settings: Settings, source: Random, size = 0.02): Settings {
  const moved = new Map(settings);
  for (const name of ["silane", "ammonia", "time"])
    moved.set(name, need(settings, name) * Math.exp(size * source.normal()));
  return typedIn(moved);
}

export interface Engineer {
  /** Settings of the next deposition. `routine` runs never try something else. */
  next(routine?: boolean): Settings;
  /** A reading of the deposition before; absent values teach nothing. */
  saw(reading: { index: number | null; thicknessNm: number | null }): void;
}

/** An engineer who starts at the line's reference recipe, moved towards the goal by the rule of thumb. */
export function engineer(world: StudyWorld, source: Random): Engineer {
  const { goal, tolerance, options } = world;
  const { reference } = options;
  let inForce = reference;
  let trying = false;

  function correct(film: Film, share: number, leave: number): void {
    const n = film.index - goal.index;
    const d = film.thicknessNm - goal.thicknessNm;
    const ratio = Math.abs(n) > leave * tolerance.index ? Math.exp((share * -n) / SLOPE_BY_HEART) : 1;
    const time = Math.abs(d) > leave * tolerance.thicknessNm ? (goal.thicknessNm / film.thicknessNm) ** share : 1;
    inForce = typedIn(withinReach(withTime(shiftRatio(inForce, ratio), time), reference));
  }
  const { index, thicknessNm } = options.aim;
  correct({ index: index ?? goal.index, thicknessNm: thicknessNm ?? goal.thicknessNm }, 1, 0);

  return {
    next(routine = false) {
      // Drawn every time, so that who tries what does not shift with the readings.
      const tries = source.chance(TRIES.chance);
      const [ratio, time, flow] = [TRIES.ratio, TRIES.time, TRIES.flow].map((sd) => Math.exp(sd * source.normal()));
      trying = tries && !routine;
      if (!trying) return inForce;
      const mixed = withTime(shiftRatio(inForce, ratio), time);
      return typedIn(
        new Map([...mixed, ["silane", need(mixed, "silane") * flow], ["ammonia", need(mixed, "ammonia") * flow]]),
      );
    },
    saw(reading) {
      if (trying || reading.index === null || reading.thicknessNm === null) return;
      if (Math.abs(reading.index - goal.index) > ABSURD.index) return;
      if (Math.abs(reading.thicknessNm / goal.thicknessNm - 1) > ABSURD.relative) return;
      correct({ index: reading.index, thicknessNm: reading.thicknessNm }, EAGERNESS, LEFT_ALONE);
    },
  };
}
