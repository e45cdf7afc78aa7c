/**
 * Double EWMA (predictor-corrector control): offset and trend of each line are both filtered,
 *
 *     e = p - (a + D);   a <- a + D + lambda1 e;   D <- D + lambda2 e;   next expected: a + D
 *
 * with p the offset that the reading alone speaks for (Butler and Stefani 1994, from memory; Chen and Guo 2001,
 * doi 10.1109/66.909650). Here lambda1 = 0.5, lambda2 = 0.1.
 */
import { usable } from "./dials.ts";
import { type Hand, hearing, type Practice } from "./practice.ts";
import { offsetsOf, settingsFor, startingResponse } from "./response.ts";

const LAMBDA = [0.5, 0.1] as const;

interface Trended {
  level: number;
  trend: number;
}

const ahead = ({ level, trend }: Trended) => level + trend;

function heard(one: Trended, said: number): Trended {
  const miss = said - ahead(one);
  return { level: ahead(one) + LAMBDA[0] * miss, trend: one.trend + LAMBDA[1] * miss };
}

export const doubleEwma: Practice = {
  name: "double-ewma",
  title: `double EWMA ${LAMBDA.join("/")}`,
  begin(brief) {
    const { slopes, offsets } = startingResponse(brief);
    let index: Trended = { level: offsets.index, trend: 0 };
    let lnRate: Trended = { level: offsets.lnRate, trend: 0 };
    const hand: Hand = {
      next: () => settingsFor(brief, { slopes, offsets: { index: ahead(index), lnRate: ahead(lnRate) } }),
      saw({ settings, reading }) {
        const film = usable(brief, reading);
        if (!film) return;
        const said = offsetsOf(brief, slopes, settings, film);
        index = heard(index, said.index);
        lnRate = heard(lnRate, said.lnRate);
      },
      cleaned() {},
    };
    return hearing(hand, brief.history);
  },
};
