import { describe, expect, it } from "vitest";
import { GAUSS_HERMITE_3, gaussLegendre, integrate, normalPdf } from "../../../engine/index.ts";
import { expectAllClose, expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("the Gauss-Legendre rule", () => {
  it("with two and three points is the textbook's", () => {
    const because = "closed forms 1/sqrt 3, sqrt(3/5)";
    expectAllClose(gaussLegendre(2).nodes, [-1 / Math.sqrt(3), 1 / Math.sqrt(3)], { absolute: 2e-16, because });
    expectAllClose(gaussLegendre(3).nodes, [-Math.sqrt(0.6), 0, Math.sqrt(0.6)], { absolute: 2e-16, because });
    expectAllClose(gaussLegendre(3).weights, [5 / 9, 8 / 9, 5 / 9], { absolute: 1e-15, because });
  });

  it("with 20 and 64 points has the nodes and weights of a 40-digit computation (mpmath 1.3)", () => {
    const because = "rounding of the last digit";
    const twenty = gaussLegendre(20);
    expectClose(twenty.nodes[19], 0.9931285991850949, { absolute: 2e-16, because });
    expectClose(twenty.weights[19], 0.017614007139152118, { relative: 1e-13, because: "1 - x^2 is small at the ends" });
    expectClose(twenty.nodes[10], 0.07652652113349734, { absolute: 2e-16, because });
    expectClose(twenty.weights[10], 0.15275338713072584, { relative: 1e-14, because });
    const most = gaussLegendre(64);
    expectClose(most.nodes[63], 0.9993050417357722, { absolute: 2e-16, because });
    expectClose(most.weights[63], 0.0017832807216964328, { relative: 1e-12, because: "1 - x^2 is 1.4e-3 at the ends" });
    expectClose(most.nodes[32], 0.024350292663424433, { absolute: 2e-16, because });
  });

  it("integrates every power up to 2n - 1 exactly, for every n, and not 2n", () => {
    for (let n = 1; n <= 64; n++) {
      const { nodes, weights } = gaussLegendre(n);
      const moment = (power: number) => nodes.reduce((sum, x, i) => sum + weights[i] * x ** power, 0);
      for (const power of [0, 1, n - 1, 2 * n - 2, 2 * n - 1]) {
        const because = "rounding of n terms";
        expectClose(moment(power), power % 2 === 0 ? 2 / (power + 1) : 0, { absolute: 1e-14, because });
      }
      if (n < 8) expect(Math.abs(moment(2 * n) - 2 / (2 * n + 1))).toBeGreaterThan(1e-6);
    }
  });

  it("is computed once and shared", () => {
    expect(gaussLegendre(17)).toBe(gaussLegendre(17));
  });

  it("is refused for no, half or too many points", () => {
    for (const n of [0, 2.5, 65, Number.NaN]) expect(refusalCode(() => gaussLegendre(n))).toBe("bad-rule");
  });

  it("integrates a normal density over six standard deviations, in either direction", () => {
    const because = "mass beyond +-6 sd is 2e-9; the 40-point rule itself is exact to rounding";
    expectClose(
      integrate((x) => normalPdf(x), -6, 6, 40),
      1,
      { absolute: 2.1e-9, because },
    );
    expectClose(integrate(Math.exp, 1, 0), 1 - Math.E, { absolute: 4e-15, because: "rounding of 20 terms" });
  });
});

describe("the three-point rule for a normal variable", () => {
  it("has the normal moments 1, 0, 1, 0, 3, 0 and misses the sixth, 15", () => {
    const moment = (power: number) =>
      GAUSS_HERMITE_3.nodes.reduce((sum, z, i) => sum + GAUSS_HERMITE_3.weights[i] * z ** power, 0);
    [1, 0, 1, 0, 3, 0].forEach((expected, power) => {
      expectClose(moment(power), expected, { absolute: 1e-14, because: "exact to degree five" });
    });
    expectClose(moment(6), 9, { absolute: 1e-14, because: "27/3" });
  });
});
