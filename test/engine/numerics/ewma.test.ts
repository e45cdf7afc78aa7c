import { describe, expect, it } from "vitest";
import { ewma, ewmaLimits, random } from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("the exponentially weighted moving average", () => {
  it("is the last value for lambda 1 and weighs old values by (1 - lambda)^age", () => {
    expect(Array.from(ewma([3, 1, 4], 1, 9))).toEqual([3, 1, 4]);
    const because = "closed form: impulse response";
    expectAllClose(ewma([1, 0, 0, 0], 0.25, 0), [0.25, 0.1875, 0.140625, 0.10546875], { absolute: 0, because });
    expectClose(ewma([0, 0], 0.2, 10)[1], 6.4, { relative: 1e-15, because });
    expect(ewma([], 0.5, 0).length).toBe(0);
  });

  it("has limits that are its own standard deviation, early and late", () => {
    // After one value the average moves by lambda x: its sd is lambda sd.
    expectClose(ewmaLimits(0, 2, 0.3, 3, 1).upper, 3 * 0.3 * 2, { relative: 1e-14, because: "closed form" });
    expectClose(ewmaLimits(0, 2, 0.3, 3, 500).upper, ewmaLimits(0, 2, 0.3).upper, {
      relative: 1e-14,
      because: "limit",
    });
    const draw = random("ewma");
    const averages = ewma(
      Array.from({ length: 40000 }, () => draw.normal()),
      0.2,
      0,
    ).slice(100);
    const variance = averages.reduce((sum, z) => sum + z * z, 0) / averages.length;
    const because = "simulation: standard error of the sd is about 1 % for 40000 correlated values";
    expectClose(Math.sqrt(variance), ewmaLimits(0, 1, 0.2, 1).upper, { relative: 0.03, because });
  });

  it("is refused for weights outside (0, 1] and values that are no numbers", () => {
    for (const lambda of [0, -0.1, 1.1, Number.NaN]) expect(refusalCode(() => ewma([1], lambda, 0))).toBe("bad-weight");
    expect(refusalCode(() => ewma([1, Number.NaN], 0.3, 0))).toBe("not-a-number");
    expect(refusalCode(() => ewma([1], 0.3, Number.NaN))).toBe("not-a-number");
    expect(refusalCode(() => ewmaLimits(0, -1, 0.3))).toBe("out-of-domain");
  });
});
