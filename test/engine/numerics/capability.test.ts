/** Capability: what it promises holds as often as it says, and what it refuses. */
import { describe, expect, it } from "vitest";
import {
  capability,
  capabilityIndices,
  chiSquareQuantile,
  findRoot,
  LEAST_RUNS,
  noncentralTCdf,
  ppkLowerBound,
  random,
  studentTCdf,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("the lower bound of Ppk", () => {
  it("lies below the truth 95 times in a hundred for a goal with one side, and at least as often with two", () => {
    const source = random("capability");
    const trials = 4000;
    const runs = 20;
    // The bound grows with the estimate: it is below 1 as long as the estimate is below this one.
    const largest = findRoot((ppk) => ppkLowerBound(ppk, runs) - 1, 1, 3);
    let one = 0;
    let two = 0;
    for (let trial = 0; trial < trials; trial++) {
      const values = Array.from({ length: runs }, () => source.normal());
      const mean = values.reduce((sum, x) => sum + x, 0) / runs;
      const sd = Math.sqrt(values.reduce((sum, x) => sum + (x - mean) ** 2, 0) / (runs - 1));
      // True Ppk 1: three standard deviations to the upper side, as many to the lower.
      if (capabilityIndices(mean, sd, { upper: 3 }).ppk <= largest) one++;
      if (capabilityIndices(mean, sd, { lower: -3, upper: 3 }).ppk <= largest) two++;
    }
    // sd of a proportion of 0.95 in 4000: 0.0034; three of those.
    expectClose(one / trials, 0.95, { absolute: 0.0104, because: "3 sd of 4000 trials" });
    expect(two).toBeGreaterThanOrEqual(one);
  });

  it("rises towards the estimate with runs and falls with confidence", () => {
    expect(ppkLowerBound(1.33, 100)).toBeGreaterThan(ppkLowerBound(1.33, 30));
    expect(ppkLowerBound(1.33, 30, 0.99)).toBeLessThan(ppkLowerBound(1.33, 30, 0.9));
    expect(ppkLowerBound(1.33, 100_000)).toBeGreaterThan(1.32);
  });

  it("of a goal far wider than the scatter is in proportion to it, for the scatter alone is in doubt", () => {
    const share = Math.sqrt(chiSquareQuantile(0.05, 19) / 19);
    const close = { relative: 1e-4, because: "the mean's share is left out" };
    expectClose(ppkLowerBound(1e9, 20), 1e9 * share, close);
    expectClose(ppkLowerBound(99, 20) / 99, ppkLowerBound(101, 20) / 101, close);
  });

  it("may be below zero, when the mean is at the edge of the goal", () => {
    expect(ppkLowerBound(0, 20)).toBeLessThan(0);
    // At an estimate of zero the bound is -z/3 sqrt(n): the mean alone decides.
    expectClose(ppkLowerBound(0, 20), -1.6448536269514722 / (3 * Math.sqrt(20)), { relative: 1e-9, because: "root" });
  });
});

describe("the noncentral t law", () => {
  it("is Student's t without a shift", () => {
    for (const [t, degrees] of [
      [-2.5, 3],
      [0.3, 19],
      [4, 100],
    ]) {
      expectClose(noncentralTCdf(t, degrees, 0), studentTCdf(t, degrees), { relative: 1e-12, because: "quadrature" });
    }
  });
});

describe("capability refuses", () => {
  const twenty = Array.from({ length: LEAST_RUNS }, (_, i) => i % 5);
  it.each([
    ["nineteen runs", () => capability(twenty.slice(1), { upper: 3 }), "too-few-runs"],
    ["a goal without sides", () => capability(twenty, {}), "out-of-domain"],
    ["a goal upside down", () => capability(twenty, { lower: 3, upper: 1 }), "out-of-domain"],
    [
      "runs that do not scatter at all",
      () =>
        capability(
          twenty.map(() => 0.1),
          { upper: 3 },
        ),
      "out-of-domain",
    ],
    ["a side that is no number", () => capabilityIndices(1, 1, { upper: Number.NaN }), "not-a-number"],
    ["a confidence of one half", () => ppkLowerBound(1, 30, 0.5), "bad-probability"],
    ["one value", () => ppkLowerBound(1, 1), "out-of-domain"],
  ] as const)("%s", (_, run, code) => {
    expect(refusalCode(run)).toBe(code);
  });

  it("nothing at twenty runs, whose indices lack only what the goal lacks", () => {
    const found = capability(twenty, { upper: 9 });
    expect([found.runs, found.pp, found.ppl, found.ppm]).toEqual([20, null, null, null]);
    expect(found.ppk).toBe(found.ppu);
    expect(found.ppkAtLeast).toBeLessThan(found.ppk);
  });
});
