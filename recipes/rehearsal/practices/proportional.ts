/**
 * The rule of thumb: time in proportion to the thickness wanted, gas ratio by a slope of -0.30 in index per ln ratio, each
 * miss corrected in full; in production only when a reading lies out of goal, so as not to touch what is right.
 */
import type { Film } from "../aim.ts";
import { need } from "../film-law.ts";
import { inGoal } from "../stage.ts";
import { coordinates, dialled, usable } from "./dials.ts";
import type { Practice } from "./practice.ts";

/** Index per ln(ammonia/silane) as the trade has it by heart (common practice, no source). */
export const SLOPE_BY_HEART = -0.3;

export const proportional: Practice = {
  name: "proportional",
  title: "proportional rule",
  begin(brief) {
    const { goal, reference, history, start } = brief;
    const corrected = (settings: typeof reference, film: Film) =>
      dialled(
        brief,
        coordinates(brief, settings).ratio - (film.index - goal.index) / SLOPE_BY_HEART,
        () => need(settings, "time") * (goal.thicknessNm / film.thicknessNm),
      );
    // A new chamber starts from the reference recipe, moved by the rule from what that is meant to lay.
    let inForce = history.length > 0 ? start : corrected(reference, brief.aim);
    return {
      next: () => inForce,
      saw({ settings, reading }) {
        const film = usable(brief, reading);
        if (film && !inGoal(brief, film)) inForce = corrected(settings, film);
      },
      cleaned() {},
    };
  },
};
