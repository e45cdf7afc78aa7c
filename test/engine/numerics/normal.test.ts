import { describe, expect, it } from "vitest";
import {
  erf,
  erfc,
  integrate,
  normalBetween,
  normalCdf,
  normalLogPdf,
  normalPdf,
  normalQuantile,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("erf and erfc", () => {
  it("add up to one and are odd and mirrored, across the seams of the approximation", () => {
    for (const x of [0, 0.1, 0.46875, 0.4687500001, 1, 3.9999, 4, 4.0001, 6, 30]) {
      expectClose(erf(x) + erfc(x), 1, { absolute: 2.3e-16, because: "one rounding" });
      expect(erf(-x)).toBe(-erf(x));
      expectClose(erfc(-x), 2 - erfc(x), { absolute: 4.5e-16, because: "one rounding near 2" });
    }
  });

  it("are continuous at the seams", () => {
    for (const seam of [0.46875, 4]) {
      const below = erfc(seam * (1 - 1e-15));
      const above = erfc(seam * (1 + 1e-15));
      const because = "erfc itself moves by 4e-15 x 2 x 16 at x = 4";
      expectClose(below, above, { relative: 1e-13, because });
      expect(below).toBeGreaterThanOrEqual(above);
    }
  });

  it("know their limits and pass NaN on", () => {
    expect([erfc(Infinity), erfc(-Infinity), erf(Infinity), erf(-Infinity)]).toEqual([0, 2, 1, -1]);
    expect(erfc(28)).toBe(0);
    expect([erf(Number.NaN), erfc(Number.NaN)]).toEqual([Number.NaN, Number.NaN]);
  });
});

describe("the normal law", () => {
  it("returns p for the quantile of p, from 1e-300 to 1 - 1e-15", () => {
    for (const p of [1e-300, 1e-50, 1e-12, 1e-4, 0.074, 0.076, 0.2, 0.5, 0.7, 0.924, 0.926, 0.9999, 1 - 1e-15]) {
      const x = normalQuantile(p);
      // d ln p / d ln x = x^2 in the tail: one rounding of x costs x^2 roundings of p.
      expectClose(normalCdf(x), p, { relative: 4e-16 * (2 + x * x), because: "rounding of x, amplified by x^2" });
    }
  });

  it("has as density the slope of its distribution, and the logarithm of its density", () => {
    for (const x of [-3, -0.5, 0, 1.2, 4]) {
      const h = 1e-5;
      const slope = (normalCdf(x + h, 0.5, 2) - normalCdf(x - h, 0.5, 2)) / (2 * h);
      expectClose(normalPdf(x, 0.5, 2), slope, { absolute: 1e-10, because: "central difference: 1e-16/h and h^2" });
      expectClose(Math.exp(normalLogPdf(x, 0.5, 2)), normalPdf(x, 0.5, 2), {
        relative: 1e-14,
        because: "same formula",
      });
    }
    expectClose(
      integrate((x) => normalPdf(x), -1, 1),
      normalCdf(1) - normalCdf(-1),
      {
        absolute: 1e-15,
        because: "20-point rule on a smooth function",
      },
    );
  });

  it("keeps the chance of a far interval that a difference of two values near 1 would lose", () => {
    const because = "symmetry: the mirrored interval in the lower tail";
    expectClose(normalBetween(9, 10), normalCdf(-9) - normalCdf(-10), { relative: 1e-15, because });
    expect(normalBetween(9, 10)).toBeGreaterThan(1e-19);
    expectClose(normalBetween(-1, 2, 1, 0.5), normalCdf(2) - normalCdf(-4), {
      relative: 1e-14,
      because: "standardised",
    });
    expect(normalBetween(2, 1)).toBe(0);
    expectClose(normalBetween(-Infinity, Infinity), 1, { absolute: 0, because: "everything" });
  });

  it("shifts and scales its quantile, with infinite ends", () => {
    expectClose(normalQuantile(0.975, 10, 2), 10 + 2 * 1.959963984540054, { relative: 1e-15, because: "mean + sd z" });
    expect([normalQuantile(0), normalQuantile(1), normalQuantile(0.5, 3, 1)]).toEqual([-Infinity, Infinity, 3]);
  });

  it("refuses standard deviations that are not positive and probabilities that are none", () => {
    for (const sd of [0, -1, Number.NaN]) {
      expect(refusalCode(() => normalCdf(0, 0, sd))).toBe("bad-sd");
      expect(refusalCode(() => normalPdf(0, 0, sd))).toBe("bad-sd");
      expect(refusalCode(() => normalQuantile(0.5, 0, sd))).toBe("bad-sd");
    }
    for (const p of [-0.1, 1.1, Number.NaN]) expect(refusalCode(() => normalQuantile(p))).toBe("bad-probability");
    expect(refusalCode(() => normalBetween(Number.NaN, 1))).toBe("not-a-number");
  });
});
