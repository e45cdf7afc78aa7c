/** Sisters of very different steadiness: a setting of the scatters that leads for one is hopeless for the other. */
import { describe, expect, it } from "vitest";
import { LineModel } from "../../calibration/line-model.ts";
import type { ChamberLog } from "../../calibration/run.ts";
import { random } from "../../engine/index.ts";

const start = new Map([
  ["silane", 780],
  ["ammonia", 7020],
  ["time", 660],
]);
const levers = [
  { setting: "silane", meaning: "silane", acts: null, low: 300, high: 1200 },
  { setting: "ammonia", meaning: "ammonia", acts: null, low: 3000, high: 9000 },
  { setting: "time", meaning: "time", acts: null, low: 200, high: 900 },
];

/** Runs whose film scatters by this many times the usual process scatter. */
function log(chamber: string, times: number, runs: number): ChamberLog {
  const source = random(`apart ${chamber}`);
  const events = Array.from({ length: runs }, (_, i) => ({
    kind: "run" as const,
    entry: i,
    settings: start,
    count: 1,
    sinceClean: null,
    film: {
      index: 2.05 + 0.003 * times * source.normal(),
      thicknessNm: 85 * Math.exp(0.005 * times * source.normal()),
      gauge: [1e-8, 0, 1e-4] as const,
    },
    light: [],
  }));
  return { chamber, events };
}

describe("sisters that agree on no setting of the scatters", () => {
  it("still lend a chamber what they know", () => {
    const model = new LineModel([log("steady", 0.3, 150), log("wild", 3, 150), log("new", 1, 2)], {
      levers,
      reference: start,
      aim: { index: 2.05, thicknessNm: 85 },
      facet: { mean: 1, sd: 0 },
      minimumOf: null,
    });
    const next = model.chamber("new").quick(start);
    // Centred where both sisters lie, within a few of the chamber spreads (0.02 and 6 %).
    expect(Math.abs(next.index - 2.05)).toBeLessThan(0.02);
    expect(Math.abs(next.lnThickness - Math.log(85))).toBeLessThan(0.06);
    expect(model.chamber("new").passes.length).toBeGreaterThan(0);
  });
});
