import { describe, test } from "vitest";
import { walk } from "../../calibration/chamber-filter.ts";
import { hyperNodes } from "../../calibration/nodes.ts";
import { scatter } from "../../calibration/priors.ts";
import { covariance, diagonalState } from "../../calibration/square-root.ts";
import { expectClose } from "../support/close.ts";

describe("an ageing chamber", () => {
  test("wanders by its walk variance a deposition, times the node's step multiplier, in its two steps alone", () => {
    for (const { node } of hyperNodes()) {
      const state = diagonalState([2, 0, 0, 0], [0.1, 0.2, 0.006, 0.015]);
      walk(state, node, 4);
      const p = covariance(state);
      const wandered = (which: 0 | 1) => 4 * node.step * scatter.walk[which] ** 2;
      const tolerance = { relative: 1e-12, because: "rounding" };
      expectClose(p[0], 0.1 ** 2, tolerance);
      expectClose(p[5], 0.2 ** 2, tolerance);
      expectClose(p[10], 0.006 ** 2 + wandered(0), tolerance);
      expectClose(p[15], 0.015 ** 2 + wandered(1), tolerance);
    }
  });
});
