/** Nested variance: components are found again in made-up studies, and shapes that do not fit are refused. */
import { describe, expect, it } from "vitest";
import { nestedVariance, pooledSd, random } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("nested variance", () => {
  it("finds the components a study was made with", () => {
    const source = random("nested");
    const sizes = [60, 6, 4];
    const sds = [3, 2, 1];
    const values: number[] = [];
    for (let i = 0; i < sizes[0]; i++) {
      const outer = sds[0] * source.normal();
      for (let j = 0; j < sizes[1]; j++) {
        const middle = outer + sds[1] * source.normal();
        for (let k = 0; k < sizes[2]; k++) values.push(middle + sds[2] * source.normal());
      }
    }
    const levels = nestedVariance(values, sizes);
    // Relative sd of a variance on d degrees of freedom is sqrt(2/d): 0.18, 0.08, 0.04; three of those.
    [0.55, 0.26, 0.13].forEach((relative, i) => {
      expectClose(levels[i].variance, sds[i] ** 2, { relative, because: "3 sd of a sample variance" });
    });
  });

  it("adds up: the sums of squares are that of all values about their mean", () => {
    const values = [3, 1, 4, 1, 5, 9, 2, 6];
    const mean = values.reduce((a, b) => a + b, 0) / 8;
    const total = values.reduce((sum, v) => sum + (v - mean) ** 2, 0);
    const sum = nestedVariance(values, [2, 2, 2]).reduce((s, level) => s + level.sumOfSquares, 0);
    expectClose(sum, total, { relative: 1e-14, because: "rounding" });
  });

  it("gives zero where groups differ less than luck would have it", () => {
    const [between] = nestedVariance([1, 5, 2, 4], [2, 2]);
    expect(between.variance).toBe(0);
    expect(between.f).toBeLessThan(1);
  });

  it.each([
    ["a missing value", () => nestedVariance([1, 2, 3], [2, 2]), "bad-shape"],
    ["a level of one", () => nestedVariance([1, 2], [2, 1]), "bad-shape"],
    ["no level", () => nestedVariance([1], []), "bad-shape"],
    ["a value that is no number", () => nestedVariance([1, Number.NaN], [2]), "not-a-number"],
    ["pooling nothing", () => pooledSd([]), "too-few-rows"],
    ["pooling a group without freedom", () => pooledSd([{ sumOfSquares: 1, degrees: 0 }]), "out-of-domain"],
  ] as const)("refuses %s", (_, run, code) => {
    expect(refusalCode(run)).toBe(code);
  });
});
