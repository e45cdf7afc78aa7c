/**
 * A designed experiment: gas ratio and time at two levels each with three centre points, a plane fitted to index and to
 * ln thickness, the goal solved for, confirmed; afterwards every reading out of goal is corrected in full with the slopes
 * found.
 */
import { leastSquares } from "../../../engine/index.ts";
import type { Film } from "../aim.ts";
import { need } from "../film-law.ts";
import { inGoal } from "../stage.ts";
import type { ChamberSettings } from "../worlds.ts";
import { coordinates, dialled, usable } from "./dials.ts";
import type { Practice } from "./practice.ts";
import { SLOPE_BY_HEART } from "./proportional.ts";

/** Half the distance between the levels, in ln ratio and ln time. */
const STEP = { ratio: 0.1, time: 0.06 } as const;
/** Ratio and time levels, centre points spread over the plan so that a drift does not pass for an effect. */
const PLAN = [
  [0, 0],
  [-1, 1],
  [1, -1],
  [0, 0],
  [1, 1],
  [-1, -1],
  [0, 0],
] as const;

interface Plane {
  index: readonly [constant: number, ratio: number];
  lnThickness: readonly [constant: number, ratio: number, time: number];
}

export const factorial: Practice = {
  name: "factorial",
  title: "2x2 design, 3 centre points",
  begin(brief) {
    const { goal } = brief;
    const known = brief.history.length > 0;
    const centreOf = () => {
      if (known) return brief.start;
      const ratio = (goal.index - brief.aim.index) / SLOPE_BY_HEART;
      const seconds = need(brief.reference, "time") * (goal.thicknessNm / brief.aim.thicknessNm);
      return dialled(brief, ratio, () => seconds);
    };
    const centre = centreOf();
    const lnTime = (s: ChamberSettings) => Math.log(need(s, "time") / need(centre, "time"));
    const seen: { ratio: number; lnTime: number; film: Film }[] = [];
    let made = 0;
    let inForce = centre;
    let plane: Plane | null = null;

    function planned(at: number): ChamberSettings {
      const [ratio, time] = PLAN[at];
      const seconds = need(centre, "time") * Math.exp(time * STEP.time);
      return dialled(brief, coordinates(brief, centre).ratio + ratio * STEP.ratio, () => seconds);
    }

    /** By heart where too few readings of the plan were usable. */
    function planeFound(): Plane {
      const heart: Plane = { index: [goal.index, SLOPE_BY_HEART], lnThickness: [Math.log(goal.thicknessNm), 0, 1] };
      if (seen.length < 5) return heart;
      const rows = Float64Array.from(seen.flatMap((s) => [1, s.ratio, s.lnTime]));
      const plain = (y: (s: (typeof seen)[number]) => number) =>
        leastSquares(rows, seen.length, 3, Float64Array.from(seen, y)).coefficients;
      const index = plain((s) => s.film.index);
      const thickness = plain((s) => Math.log(s.film.thicknessNm));
      const slope = Math.min(-0.06, index[1]);
      return { index: [index[0], slope], lnThickness: [thickness[0], thickness[1], Math.max(thickness[2], 0.5)] };
    }

    const at = (ratio: number, { index, lnThickness }: Plane) =>
      dialled(brief, ratio + (goal.index - index[0]) / index[1], (gases) => {
        const moved = lnThickness[0] + lnThickness[1] * coordinates(brief, gases).ratio;
        return need(centre, "time") * Math.exp((Math.log(goal.thicknessNm) - moved) / lnThickness[2]);
      });

    return {
      next: () => (plane === null && made < PLAN.length ? planned(made) : inForce),
      planned: () => plane === null,
      saw({ settings, reading }) {
        const film = usable(brief, reading);
        if (plane === null) {
          made++;
          if (film) seen.push({ ratio: coordinates(brief, settings).ratio, lnTime: lnTime(settings), film });
          if (made < PLAN.length) return;
          plane = planeFound();
          inForce = at(0, plane);
          return;
        }
        if (!film || inGoal(brief, film)) return;
        const [, ratioSlope] = plane.index;
        const { lnThickness } = plane;
        const move = (goal.index - film.index) / ratioSlope;
        inForce = dialled(brief, coordinates(brief, settings).ratio + move, (gases) => {
          const shift = coordinates(brief, gases).ratio - coordinates(brief, settings).ratio;
          const wanted = Math.log(goal.thicknessNm / film.thicknessNm) - lnThickness[1] * shift;
          return need(settings, "time") * Math.exp(wanted / lnThickness[2]);
        });
      },
      cleaned() {},
    };
  },
};
