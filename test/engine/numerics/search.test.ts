/** Roots and minima: Brent's two methods and the simplex in a box. */
import { describe, expect, it } from "vitest";
import { findRoot, minimise, nelderMead } from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("a root between two points", () => {
  it("is found to rounding, from either side, at an end, and for steep or flat functions", () => {
    const because = "the bracket closes to four units in the last place";
    expectClose(
      findRoot((x) => x * x - 2, 0, 2),
      Math.SQRT2,
      { relative: 1e-15, because },
    );
    expectClose(
      findRoot((x) => x * x - 2, 2, 0),
      Math.SQRT2,
      { relative: 1e-15, because },
    );
    // The constant of Dottie, cos x = x (Kaplan 2007, from memory).
    expectClose(
      findRoot((x) => Math.cos(x) - x, 0, 1),
      0.7390851332151607,
      { relative: 1e-15, because },
    );
    expectClose(
      findRoot((x) => Math.atan(1e6 * (x - 0.123)), -50, 1),
      0.123,
      { relative: 1e-14, because },
    );
    expectClose(
      findRoot((x) => (x - 1) ** 9, 0, 3),
      1,
      { absolute: 1e-4, because: "nine-fold root: f underflows near it" },
    );
    expectClose(
      findRoot((x) => x, -1, 3),
      0,
      { absolute: 1e-15, because },
    );
    expect(findRoot((x) => x - 1, 1, 2)).toBe(1);
    expect(findRoot((x) => x - 2, 1, 2)).toBe(2);
  });

  it("of a step is the place of the step", () => {
    const at = findRoot((x) => (x < Math.PI ? -1 : 1), 0, 10);
    expectClose(at, Math.PI, { relative: 1e-15, because: "bisection to the last place" });
  });

  it("takes few evaluations for smooth functions and stops at the tolerance asked for", () => {
    let fine = 0;
    findRoot(
      (x) => {
        fine++;
        return Math.exp(x) - 5;
      },
      0,
      4,
    );
    // Measured 11; bisection alone would need 53.
    expect(fine).toBeLessThanOrEqual(15);
    let coarse = 0;
    const rough = findRoot(
      (x) => {
        coarse++;
        return Math.exp(x) - 5;
      },
      0,
      4,
      { tolerance: 0.01 },
    );
    expect(coarse).toBeLessThan(fine);
    expectClose(rough, Math.log(5), { absolute: 0.02, because: "twice the tolerance asked for" });
  });

  it("is refused without a change of sign, or where the function is no number", () => {
    expect(refusalCode(() => findRoot((x) => x * x + 1, -1, 1))).toBe("no-sign-change");
    expect(refusalCode(() => findRoot((x) => Math.sqrt(x), -1, 1))).toBe("not-a-number");
  });
});

describe("a minimum on an interval", () => {
  it("is found to the square root of rounding", () => {
    const because = "f is flat to 1e-16 within 1e-8 of its minimum";
    expectClose(minimise((x) => (x - 1.3) ** 2 + 7, -4, 9).x, 1.3, { absolute: 3e-8, because });
    expectClose(minimise(Math.cos, 2, 5).x, Math.PI, { absolute: 5e-8, because });
    expectClose(minimise(Math.cos, 2, 5).value, -1, { absolute: 1e-15, because });
    expectClose(minimise((x) => Math.abs(x - 0.2), -1, 1).x, 0.2, {
      absolute: 1e-7,
      because: "a kink; tolerance 1e-8 |x|",
    });
  });

  it("may be an end of the interval, and then is that end", () => {
    expect(minimise((x) => x, 3, 8)).toEqual({ x: 3, value: 3 });
    expect(minimise((x) => -x, 3, 8)).toEqual({ x: 8, value: -8 });
  });

  it("takes few evaluations for a parabola", () => {
    let count = 0;
    minimise(
      (x) => {
        count++;
        return (x - 1.3) ** 2;
      },
      -4,
      9,
    );
    // Golden section alone would need about 45.
    expect(count).toBeLessThanOrEqual(15);
  });

  it("is refused on an empty interval or where the function is no number", () => {
    expect(refusalCode(() => minimise((x) => x, 1, 1))).toBe("bad-bounds");
    expect(refusalCode(() => minimise((x) => x, 0, Infinity))).toBe("bad-bounds");
    expect(refusalCode(() => minimise(() => Number.NaN, 0, 1))).toBe("not-a-number");
  });
});

describe("the simplex in a box", () => {
  const valley = (x: Float64Array) => 100 * (x[1] - x[0] ** 2) ** 2 + (1 - x[0]) ** 2;

  it("finds the end of Rosenbrock's valley inside the box", () => {
    const found = nelderMead(valley, [-1.2, 1], [-5, -5], [5, 5]);
    expect(found.converged).toBe(true);
    expectAllClose(found.x, [1, 1], { absolute: 1e-4, because: "simplex of 1e-7 x 10 in a valley of condition 2500" });
  });

  it("finds a minimum on a wall and never leaves the box", () => {
    let outside = 0;
    const found = nelderMead(
      (x) => {
        if (x[0] > 0.5 || x[0] < -2 || Math.abs(x[1]) > 2) outside++;
        return valley(x);
      },
      [-1.2, 1],
      [-2, -2],
      [0.5, 2],
    );
    expect(outside).toBe(0);
    expectAllClose(found.x, [0.5, 0.25], { absolute: 1e-4, because: "as for the free minimum" });
  });

  it("copes with kinks, forbidden places and a start outside", () => {
    const found = nelderMead(
      (x) => (x[0] + x[1] > 4 ? Number.NaN : Math.abs(x[0] - 1) + 2 * Math.abs(x[1] - 2)),
      [9, -9],
      [0, 0],
      [3.9, 3],
    );
    expectAllClose(found.x, [1, 2], {
      absolute: 1e-4,
      because: "tolerance 1e-7 of the box, a kink in both directions",
    });
  });

  it("is repeatable, and says when its evaluations ran out", () => {
    const once = nelderMead(valley, [0, 0], [-5, -5], [5, 5]);
    expect(nelderMead(valley, [0, 0], [-5, -5], [5, 5])).toEqual(once);
    const short = nelderMead(valley, [0, 0], [-5, -5], [5, 5], { maxEvaluations: 20 });
    expect(short.converged).toBe(false);
    expect(short.evaluations).toBeLessThan(26);
  });

  it("is refused without a proper box or a start where the function exists", () => {
    expect(refusalCode(() => nelderMead(valley, [0, 0], [0, 1], [1, 1]))).toBe("bad-bounds");
    expect(refusalCode(() => nelderMead(valley, [0, 0], [0], [1]))).toBe("bad-bounds");
    expect(refusalCode(() => nelderMead(valley, [0, Number.NaN], [0, 0], [1, 1]))).toBe("bad-bounds");
    expect(refusalCode(() => nelderMead(() => Number.NaN, [0, 0], [-1, -1], [1, 1]))).toBe("not-a-number");
  });
});
