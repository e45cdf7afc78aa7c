/** Chances in a region beside plain counting on a fine grid of the same normal law: nothing is shared but the definition. */
import { describe, expect, it } from "vitest";
import { chanceIn, type GoalRegion } from "../../calibration/chance.ts";

const mean = { index: 2.049, ln: Math.log(85.9) };
const sd = { index: 0.0075, ln: 0.0125 };
const law = {
  parts: [{ weight: 1, index: mean.index, lnThickness: mean.ln, covariance: [sd.index ** 2, 0, sd.ln ** 2] as const }],
};

/** Midpoints of 1200 x 1200 cells over 5 sd each way: the edge of the region is met to about a cell, 0.008 sd. */
function counted(region: GoalRegion): number {
  const cells = 1200;
  const at = (i: number) => -5 + (10 * (i + 0.5)) / cells;
  let sum = 0;
  for (let i = 0; i < cells; i++) {
    const index = mean.index + sd.index * at(i);
    if (index < region.index[0] || index > region.index[1]) continue;
    for (let j = 0; j < cells; j++) {
      const d = Math.exp(mean.ln + sd.ln * at(j));
      if (d < region.thicknessNm[0] || d > region.thicknessNm[1]) continue;
      let weight = 0;
      for (const f of region.factors ?? [{ factor: 1, weight: 1 }])
        if (region.also.every((g) => g(index, d * f.factor) <= 0)) weight += f.weight;
      sum += weight * Math.exp(-0.5 * (at(i) ** 2 + at(j) ** 2));
    }
  }
  return (sum * (10 / cells) ** 2) / (2 * Math.PI);
}
/** A cell's share at the steepest place of the law, along one edge. */
const tolerance = 1e-3;

const box = { index: [2.04, 2.08] as const, thicknessNm: [86, 90] as const };
/** Like a minimum that moves with index times thickness, and a reflectance that bends: in very different units. */
const minimum = (n: number, d: number) => Math.abs(3.4 * n * d - 600) - 15;
const reflectance = (n: number, d: number) => 0.01 * (d - 86 - 20 * (n - 2.05)) ** 2 - 0.02;

describe("the chance to be in a region", () => {
  it("is that of the box when there is nothing else", () => {
    const region = { ...box, also: [] };
    expect(Math.abs(chanceIn(law, region) - counted(region))).toBeLessThan(tolerance);
  });

  it("takes several conditions together, where one takes over from the other too", () => {
    for (const also of [[minimum], [reflectance], [minimum, reflectance]]) {
      const region = { ...box, also };
      const chance = chanceIn(law, region);
      expect(chance).toBeGreaterThan(0.02);
      expect(Math.abs(chance - counted(region))).toBeLessThan(tolerance);
    }
  });

  it("averages over the factor, and open sides are open", () => {
    const region: GoalRegion = {
      index: [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY],
      thicknessNm: [0, Number.POSITIVE_INFINITY],
      also: [minimum],
      factors: [
        { factor: 0.98, weight: 0.25 },
        { factor: 1, weight: 0.5 },
        { factor: 1.03, weight: 0.25 },
      ],
    };
    expect(Math.abs(chanceIn(law, region) - counted(region))).toBeLessThan(tolerance);
  });

  it("counts a condition without a value as missed", () => {
    const edge = 87;
    const region = { ...box, also: [(_n: number, d: number) => (d > edge ? Number.POSITIVE_INFINITY : -1)] };
    // Known only at the nodes, every 0.5 nm: the edge may lie up to one node off, here none.
    expect(Math.abs(chanceIn(law, region) - counted({ ...box, thicknessNm: [86, edge], also: [] }))).toBeLessThan(
      tolerance,
    );
  });

  it("is the same when what was asked before is kept", () => {
    const region: GoalRegion = { ...box, also: [minimum, reflectance], cuts: new Map() };
    const first = chanceIn(law, region);
    expect(chanceIn(law, region)).toBe(first);
    expect(region.cuts?.size).toBe(20);
  });
});
