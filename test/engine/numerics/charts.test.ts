/** Charts of single values: what they refuse, and their false alarms counted in two other ways. */
import { Matrix, solve } from "ml-matrix";
import { describe, expect, it } from "vitest";
import {
  cusum,
  cusumRunLength,
  falseAlarmsPerRun,
  individualsLimits,
  normalCdf,
  random,
  SLOW_SHIFT,
  SURPRISE_BAND,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

/**
 * Mean run length of one side as a Markov chain (D. Brook and D. A. Evans, Biometrika 59 (1972) 539-548; from memory): zero
 * and `t` cells of equal width, solved with ml-matrix. Its error falls as 1/t^2, so two sizes give a better one.
 */
function chainRunLength(k: number, h: number, shift: number, t: number): number {
  const width = h / (t - 0.5);
  const step = (x: number) => normalCdf(x + k - shift);
  const P = Matrix.zeros(t, t);
  for (let i = 0; i < t; i++) {
    P.set(i, 0, step((0.5 - i) * width));
    for (let j = 1; j < t; j++) P.set(i, j, step((j - i + 0.5) * width) - step((j - i - 0.5) * width));
  }
  return solve(Matrix.sub(Matrix.eye(t), P), Matrix.ones(t, 1)).get(0, 0);
}

function chained(k: number, h: number, shift: number): number {
  const side = (s: number) => {
    const coarse = chainRunLength(k, h, s, 60);
    const fine = chainRunLength(k, h, s, 120);
    return fine + (fine - coarse) / 3;
  };
  return 1 / (1 / side(shift) + 1 / side(-shift));
}

describe("false alarms of the detector", () => {
  it.each([0, 0.5, 1])("a Markov chain gives the same run length at a shift of %f", (shift) => {
    const expected = chained(SLOW_SHIFT.k, SLOW_SHIFT.h, shift);
    expectClose(cusumRunLength(SLOW_SHIFT.k, SLOW_SHIFT.h, shift), expected, {
      relative: 1e-4,
      because: "the chain's error after extrapolation, seen by halving its cells",
    });
  });

  it("running it on random numbers until it alarms takes as long", () => {
    const source = random("false alarms");
    const trials = 3000;
    let runs = 0;
    for (let trial = 0; trial < trials; trial++) {
      let [up, down] = [0, 0];
      while (up <= SLOW_SHIFT.h && down <= SLOW_SHIFT.h) {
        const x = source.normal();
        up = Math.max(0, up + x - SLOW_SHIFT.k);
        down = Math.max(0, down - x - SLOW_SHIFT.k);
        runs++;
      }
    }
    // Run lengths are about exponential: their mean has a relative sd of 1/sqrt(3000), 1.8 %; four of those.
    expectClose(runs / trials, cusumRunLength(SLOW_SHIFT.k, SLOW_SHIFT.h), { relative: 0.073, because: "4 sd" });
  });

  it("the band's is the chance of a value beyond three standard deviations, one in 370.4", () => {
    expectClose(1 / falseAlarmsPerRun(SURPRISE_BAND), 370.398, {
      absolute: 0.0005,
      because: "1/0.0026998, three decimals",
    });
    expect(falseAlarmsPerRun(SLOW_SHIFT)).toBe(1 / cusumRunLength(SLOW_SHIFT.k, SLOW_SHIFT.h));
  });

  it("a side that will never alarm is left out, and a shift is found as fast either way", () => {
    // 50 sd up: every value adds 49.5, so the first one alarms.
    expectClose(cusumRunLength(0.5, 5, 50), 1, { relative: 1e-12, because: "rounding" });
    expectClose(cusumRunLength(0.5, 5, 3), cusumRunLength(0.5, 5, -3), { relative: 1e-12, because: "rounding" });
    // So wide that an alarm is one jump from zero, to one part in a thousand (two jumps of 5 + 2.3 are rarer yet).
    expectClose(cusumRunLength(5, 2), 1 / (2 * normalCdf(-7)), { relative: 0.001, because: "two jumps are left out" });
  });
});

describe("a cumulative sum", () => {
  it("counts only what exceeds k, from zero, both ways", () => {
    const { up, down, alarms } = cusum([11, 12, 9, 7, 10], { target: 10, k: 0.5, h: 1.9 });
    expect(Array.from(up)).toEqual([0.5, 2, 0.5, 0, 0]);
    expect(Array.from(down)).toEqual([0, 0, 0.5, 3, 2.5]);
    expect(alarms).toEqual([1, 3, 4]);
  });

  it("alarms above the limit and not at it", () => {
    expect(cusum([2], { target: 0, k: 0, h: 2 }).alarms).toEqual([]);
  });
});

describe("charts refuse", () => {
  it.each([
    ["one value alone", () => individualsLimits([1]), "too-few-runs"],
    ["a value that is no number", () => individualsLimits([1, Number.NaN]), "not-a-number"],
    ["a limit of zero", () => cusum([1], { target: 0, k: 0.5, h: 0 }), "out-of-domain"],
    ["a negative k", () => cusum([1], { target: 0, k: -0.5, h: 4 }), "out-of-domain"],
    ["a value of a sum that is no number", () => cusum([Number.NaN], { target: 0, k: 0.5, h: 4 }), "not-a-number"],
    ["a band without width", () => falseAlarmsPerRun({ width: 0 }), "out-of-domain"],
    ["a limit too far to work out", () => cusumRunLength(0.5, 11), "out-of-domain"],
  ] as const)("%s", (_, run, code) => {
    expect(refusalCode(run)).toBe(code);
  });
});
