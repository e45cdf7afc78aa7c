/**
 * The ceiling: somebody who knows the chamber truly, but neither the coming scatter nor, before a run was made, the step a
 * clean has left. Searches everything that can be typed in near the goal.
 */
import { need } from "../film-law.ts";
import { missOf } from "../stage.ts";
import type { ChamberSettings } from "../worlds.ts";
import { coordinates, dialled, ratioOf, sameSettings, typedValue } from "./dials.ts";
import type { Practice } from "./practice.ts";

/** Changes worth less than this, in squared tolerances, are not made. */
const WORTH = 0.01;
const HALVINGS = 40;

export const oracle: Practice = {
  name: "oracle",
  title: "oracle (sees the truth)",
  begin(brief, truth) {
    const { goal, reference } = brief;
    let inForce = brief.start;
    let fresh = true;

    function aimed(): ChamberSettings {
      const secondsAt = (gases: ChamberSettings) => {
        const t = need(gases, "time");
        const one = truth.film(gases).thicknessNm;
        const rate = (truth.film(new Map(gases).set("time", t * 1.1)).thicknessNm - one) / (0.1 * t);
        return t + (goal.thicknessNm - one) / rate;
      };
      const at = (lnRatio: number) => dialled(brief, lnRatio, secondsAt);
      let low = Math.log(brief.ratio[0] / ratioOf(reference));
      let high = Math.log(brief.ratio[1] / ratioOf(reference));
      // The index falls as the ratio grows; a goal beyond either end is met as nearly as the window allows.
      for (let halving = 0; halving < HALVINGS; halving++) {
        const middle = (low + high) / 2;
        if (truth.film(at(middle)).index > goal.index) low = middle;
        else high = middle;
      }
      return at((low + high) / 2);
    }

    /** Every neighbour on the grid, gases two steps either way, time one. */
    function polished(from: ChamberSettings): ChamberSettings {
      let best = from;
      let least = missOf(brief, truth.film(from));
      const step = (name: string) => brief.levers.find((l) => l.name === name)?.smallest ?? 0;
      const reach = [-2, -1, 0, 1, 2];
      for (const a of reach)
        for (const b of reach)
          for (const c of [-1, 0, 1]) {
            const next = new Map(from);
            next.set("silane", typedValue(brief, "silane", need(from, "silane") + a * step("silane")));
            next.set("ammonia", typedValue(brief, "ammonia", need(from, "ammonia") + b * step("ammonia")));
            next.set("time", typedValue(brief, "time", need(from, "time") + c * step("time")));
            const { ratio } = coordinates(brief, next);
            const absolute = ratioOf(reference) * Math.exp(ratio);
            if (absolute < brief.ratio[0] || absolute > brief.ratio[1]) continue;
            const miss = missOf(brief, truth.film(next));
            if (miss < least) {
              best = next;
              least = miss;
            }
          }
      return best;
    }

    return {
      next() {
        const best = polished(aimed());
        const gain = missOf(brief, truth.film(inForce)) - missOf(brief, truth.film(best));
        if (fresh || (gain > WORTH && !sameSettings(best, inForce))) inForce = best;
        fresh = false;
        return inForce;
      },
      saw() {},
      cleaned() {},
    };
  },
};
