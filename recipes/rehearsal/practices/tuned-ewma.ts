/**
 * The strongest of the usual controllers: EWMA 0.5 on the offsets with the first reading of a new chamber believed in
 * full, misses clipped so that one bad reading cannot carry it away, a dead-band below which the recipe is left alone,
 * and, at a clean that was written down, a return to the chamber's mean offset. Slopes from least squares over the line.
 */
import { type Brief, missOf } from "../stage.ts";
import type { ChamberSettings } from "../worlds.ts";
import { usable } from "./dials.ts";
import { type Hand, hearing, type Practice } from "./practice.ts";
import { filmOf, type Offsets, offsetsOf, settingsFor, startingResponse } from "./response.ts";

const LAMBDA = 0.5;
/** Misses are believed up to this much, in index and ln thickness: about three sd of what a clean leaves and a gauge adds. */
const CLIP: Offsets = { index: 0.02, lnRate: 0.04 };
/** Squared miss in tolerances, index plus thickness, below which the recipe in force is left alone. */
const DEAD_BAND = 0.04;

const clipped = (miss: number, by: number) => Math.max(-by, Math.min(by, miss));

export function tunedHand(brief: Brief): Hand & { expects(settings: ChamberSettings): ReturnType<typeof filmOf> } {
  const { slopes, offsets } = startingResponse(brief);
  let believed = offsets;
  let inForce: ChamberSettings | null = brief.history.length > 0 ? brief.start : null;
  /** Mean of what its readings spoke for, and how many they are. */
  let mean = offsets;
  let readings = 0;

  return {
    expects: (settings) => filmOf(brief, { slopes, offsets: believed }, settings),
    next() {
      const best = settingsFor(brief, { slopes, offsets: believed });
      const gain = (settings: ChamberSettings) => missOf(brief, filmOf(brief, { slopes, offsets: believed }, settings));
      if (inForce === null || gain(inForce) - gain(best) > DEAD_BAND) inForce = best;
      return inForce;
    },
    saw({ settings, reading }) {
      const film = usable(brief, reading);
      if (!film) return;
      const said = offsetsOf(brief, slopes, settings, film);
      const first = readings === 0;
      const part = (of: keyof Offsets): number => {
        const miss = said[of] - believed[of];
        return first ? miss : clipped(miss, CLIP[of]);
      };
      const miss = { index: part("index"), lnRate: part("lnRate") };
      readings++;
      const towards = (of: keyof Offsets) => believed[of] + miss[of];
      mean = {
        index: mean.index + (towards("index") - mean.index) / readings,
        lnRate: mean.lnRate + (towards("lnRate") - mean.lnRate) / readings,
      };
      const share = first ? 1 : LAMBDA;
      believed = {
        index: believed.index + share * miss.index,
        lnRate: believed.lnRate + share * miss.lnRate,
      };
    },
    cleaned() {
      if (readings > 0) believed = mean;
    },
  };
}

export const tunedEwma: Practice = {
  name: "tuned-ewma",
  title: "tuned EWMA 0.5",
  begin: (brief) => hearing(tunedHand(brief), brief.history),
};
