/** The effective medium against results in closed form that are older than any program. */
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { bruggeman } from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";

const clear = (eps1: number) => ({ eps1, eps2: 0 });

describe("Bruggeman's effective medium", () => {
  test("lies between the bounds of O. Wiener (1912) for clear components: in series and in parallel", () => {
    const any = fc.double({ min: 1, max: 20, noNaN: true });
    const share = fc.double({ min: 0.01, max: 0.99, noNaN: true });
    fc.assert(
      fc.property(any, any, any, share, share, (a, b, c, f, g) => {
        const shares = [f * g, f * (1 - g), 1 - f];
        const parallel = shares[0] * a + shares[1] * b + shares[2] * c;
        const series = 1 / (shares[0] / a + shares[1] / b + shares[2] / c);
        const { eps1, eps2 } = bruggeman([clear(a), clear(b), clear(c)], shares);
        expect(eps1).toBeGreaterThan(series * (1 - 1e-12));
        expect(eps1).toBeLessThan(parallel * (1 + 1e-12));
        expect(eps2).toBeLessThan(1e-12);
      }),
    );
  });

  test("begins to conduct when a third of it is metal (R. Landauer, J. Appl. Phys. 23, 779 (1952))", () => {
    // Of a metal far above the rest (eps = -1e9 i), the mixture keeps e / (1 - 3 f) of the clear component below a third,
    // and takes (3 f - 1) / 2 of the metal above it: both follow from the quadratic when one component grows without bound.
    const metal = { eps1: 1, eps2: 1e9 };
    for (const f of [0.1, 0.2, 0.3]) {
      const { eps1 } = bruggeman([metal, clear(2)], [f, 1 - f]);
      expectClose(eps1, 2 / (1 - 3 * f), { relative: 1e-6, because: "the metal is 1e9 times above, not infinitely" });
    }
    for (const f of [0.36, 0.5, 0.8]) {
      const { eps2 } = bruggeman([metal, clear(2)], [f, 1 - f]);
      expectClose(eps2, (1e9 * (3 * f - 1)) / 2, { relative: 1e-6, because: "the same" });
    }
    // At a third exactly eps^2 = e1 e2 / 2 save what vanishes with the contrast: neither clear nor metal.
    const { eps1, eps2 } = bruggeman([metal, clear(2)], [1 / 3, 2 / 3]);
    const middle = Math.sqrt(1e9);
    expectClose(Math.hypot(eps1, eps2), middle, { relative: 1e-4, because: "corrections of 1 / sqrt(contrast)" });
  });

  test("of a trace is that of J. C. Maxwell Garnett (1904): 1 + 3 f (e - h) / (e + 2 h)", () => {
    const f = 1e-7;
    for (const [e, h] of [
      [11.7, 2.1],
      [2.1, 11.7],
      [1, 4],
    ]) {
      const { eps1 } = bruggeman([clear(e), clear(h)], [f, 1 - f]);
      const because = "second order in a share of 1e-7, and rounding";
      expectClose(eps1 / h - 1, (3 * f * (e - h)) / (e + 2 * h), { relative: 1e-6, absolute: 1e-15, because });
    }
  });
});
