import { describe, expect, test } from "vitest";
import { descend, type SlopedFunction } from "../../../engine/inverse/box-descent.ts";
import { expectClose } from "../../support/close.ts";

/** H. H. Rosenbrock, Computer Journal 3 (1960) 175: a bent valley whose floor ends at (1, 1). */
const rosenbrock: SlopedFunction = ([x, y], _, gradient) => {
  gradient[0] = -400 * x * (y - x * x) - 2 * (1 - x);
  gradient[1] = 200 * (y - x * x);
  return 100 * (y - x * x) ** 2 + (1 - x) ** 2;
};
const box = (low: number, high: number) => [{ low, high }];

describe("a descent in a box", () => {
  test("follows Rosenbrock's valley to its end", () => {
    const { x, slope } = descend(rosenbrock, [-1.2, 1], [box(-2, 2), box(-1, 3)], { flat: 1e-9 });
    expect(slope).toBeLessThan(1e-8);
    for (const value of x)
      expectClose(value, 1, { absolute: 1e-7, because: "slope below 1e-8, curvature 0.4 along the valley" });
  });

  test("stops at the wall where the valley leaves the box: at x = 1/2, y = 1/4 when x ends at 1/2", () => {
    const { x } = descend(rosenbrock, [-1.2, 1], [box(-2, 0.5), box(-1, 3)], { flat: 1e-9 });
    expect(x[0]).toBe(0.5);
    expectClose(x[1], 0.25, { absolute: 1e-7, because: "slope below 1e-9 over curvature 200" });
  });

  test("goes on beyond a join where the way leads down, and stays at one that holds it", () => {
    // |x - 1| + (x - a)^2 / 2, bent at 1: for a = 3 the lowest is x = 2; for a = 1.5 it is the join itself.
    const bent =
      (a: number): SlopedFunction =>
      ([x], [{ low }], gradient) => {
        gradient[0] = (low >= 1 ? 1 : -1) + (x - a);
        return Math.abs(x - 1) + (x - a) ** 2 / 2;
      };
    const pieces = [[...box(0, 1), ...box(1, 4)]];
    const beyond = descend(bent(3), [0.2], pieces, { flat: 1e-9 });
    expectClose(beyond.x[0], 2, { absolute: 1e-8, because: "slope below 1e-9, curvature 1" });
    expect(beyond.pieces[0].low).toBe(1);
    for (const start of [0.2, 3.5]) expect(descend(bent(1.5), [start], pieces, { flat: 1e-9 }).x[0]).toBe(1);
  });
});
