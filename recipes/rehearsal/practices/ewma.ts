/**
 * A controller that filters offsets exponentially: a straight line with fixed slopes, whose offsets follow the misses,
 *
 *     I <- I + lambda (y - yhat)            Ingolfsson and Sachs, J. Quality Technology 25 (1993) 271-287
 *
 * and settings at which the line meets the goal, every run. It is stable while 0 < lambda beta/b < 2, beta/b being the
 * true slope over the assumed one (from memory).
 */
import type { Brief } from "../stage.ts";
import { usable } from "./dials.ts";
import { type Hand, hearing, type Practice } from "./practice.ts";
import { offsetsOf, settingsFor, startingResponse } from "./response.ts";

function begin(brief: Brief, lambda: number): Hand {
  const { slopes, offsets } = startingResponse(brief);
  let believed = offsets;
  return {
    next: () => settingsFor(brief, { slopes, offsets: believed }),
    saw({ settings, reading }) {
      const film = usable(brief, reading);
      if (!film) return;
      const said = offsetsOf(brief, slopes, settings, film);
      believed = {
        index: believed.index + lambda * (said.index - believed.index),
        lnRate: believed.lnRate + lambda * (said.lnRate - believed.lnRate),
      };
    },
    cleaned() {},
  };
}

/** The controller of this lambda. */
export const ewma = (lambda: number): Practice => ({
  name: `ewma-${lambda}`,
  title: `EWMA ${lambda}`,
  begin: (brief) => hearing(begin(brief, lambda), brief.history),
});

export const ewmaSlow = ewma(0.3);
export const ewmaFast = ewma(0.6);
