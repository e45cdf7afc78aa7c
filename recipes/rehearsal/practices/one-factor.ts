/**
 * One factor at a time: the recipe in force is run; then the gas ratio alone is moved, first by a tenth, then along the
 * line through the last two readings, until the index is in goal; only then the time, in proportion to the thickness.
 */
import type { Film } from "../aim.ts";
import { need } from "../film-law.ts";
import type { ChamberSettings } from "../worlds.ts";
import { coordinates, dialled, sameSettings, typedValue, usable } from "./dials.ts";
import type { Practice } from "./practice.ts";
import { SLOPE_BY_HEART } from "./proportional.ts";

/** The first move of the gas ratio, in ln ratio, and the farthest one that a line may ask for. */
const TRY = 0.1;
const FARTHEST = 0.25;
/** Two readings closer than this in ln ratio draw no line. */
const TOO_CLOSE = 0.02;

export const oneFactor: Practice = {
  name: "one-factor",
  title: "one factor at a time",
  begin(brief) {
    const { goal, tolerance } = brief;
    let inForce = brief.history.length > 0 ? brief.start : brief.reference;
    /** The last two readings at different ratios since the tuning began. */
    let points: { ratio: number; index: number }[] = [];

    function moveRatio(at: number, film: Film): number {
      const miss = goal.index - film.index;
      const [a, b] = points;
      if (!b) return at + TRY * Math.sign(miss / SLOPE_BY_HEART);
      const slope = (b.index - a.index) / (b.ratio - a.ratio);
      // A line that climbs is noise: the sign is known by heart.
      const move = miss / (slope < 0 ? slope : SLOPE_BY_HEART);
      return at + Math.max(-FARTHEST, Math.min(FARTHEST, move));
    }

    function correct(settings: ChamberSettings, film: Film): ChamberSettings {
      const { ratio } = coordinates(brief, settings);
      const last = points.at(-1);
      if (last && Math.abs(last.ratio - ratio) < TOO_CLOSE) points[points.length - 1] = { ratio, index: film.index };
      else points = [...points, { ratio, index: film.index }].slice(-2);
      if (Math.abs(film.index - goal.index) > tolerance.index) {
        const time = need(settings, "time");
        return dialled(brief, moveRatio(ratio, film), () => time);
      }
      if (Math.abs(film.thicknessNm - goal.thicknessNm) <= tolerance.thicknessNm) return settings;
      const seconds = need(settings, "time") * (goal.thicknessNm / film.thicknessNm);
      return new Map(settings).set("time", typedValue(brief, "time", seconds));
    }

    return {
      next: () => inForce,
      saw({ settings, reading }) {
        const film = usable(brief, reading);
        const moved = film ? correct(settings, film) : inForce;
        if (!sameSettings(moved, inForce)) inForce = moved;
      },
      cleaned() {},
    };
  },
};
