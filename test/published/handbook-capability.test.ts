/**
 * Capability in the NIST/SEMATECH e-Handbook of Statistical Methods (https://doi.org/10.18434/M32189, U.S. Government work):
 * the worked example of section 6.1.6 (from memory, its arithmetic done again) and the furnace oxide of section 3.5.1.2, 168
 * thicknesses against 560 +- 100 angstrom, with the limits its page prints. Data: test/fixtures/handbook.
 */
import { describe, expect, it } from "vitest";
import {
  capability,
  capabilityIndices,
  chiSquareQuantile,
  ppkLowerBound,
  ppLimits,
  studentTQuantile,
} from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";
import { readTable } from "../support/table.ts";

const last = (decimals: number) => ({ absolute: 0.51 * 10 ** -decimals, because: `printed to ${decimals} decimals` });

describe("section 6.1.6: limits 8 and 20, mean 16, standard deviation 2, target 14", () => {
  it("gives Cp 1, Cpk 0.6667, Cpu 0.6667, Cpl 1.3333, and Cpm 1/sqrt(2)", () => {
    const indices = capabilityIndices(16, 2, { lower: 8, upper: 20, target: 14 });
    expectClose(indices.pp ?? 0, 1, last(4));
    expectClose(indices.ppk, 0.6667, last(4));
    expectClose(indices.ppu ?? 0, 0.6667, last(4));
    expectClose(indices.ppl ?? 0, 1.3333, last(4));
    expectClose(indices.ppm ?? 0, Math.SQRT1_2, { relative: 1e-15, because: "12/(6 sqrt(8))" });
  });
});

describe("section 3.5.1.2: oxide of 21 furnace runs", () => {
  const thickness = readTable("handbook/furnace-oxide-thickness.csv").numbers("thickness_angstrom");
  const goal = { lower: 460, upper: 660, target: 560 };
  const found = capability(thickness, goal);
  const n = thickness.length;

  it("has the printed mean and standard deviation with their 95 % limits", () => {
    expect(n).toBe(168);
    expectClose(found.mean, 563.03571, last(5));
    expectClose(found.sd, 25.38468, last(5));
    const half = (studentTQuantile(0.975, n - 1) * found.sd) / Math.sqrt(n);
    expectClose(found.mean - half, 559.1692, last(4));
    expectClose(found.mean + half, 566.9023, last(4));
    expectClose(found.sd * Math.sqrt((n - 1) / chiSquareQuantile(0.975, n - 1)), 22.9297, last(4));
    expectClose(found.sd * Math.sqrt((n - 1) / chiSquareQuantile(0.025, n - 1)), 28.4331, last(4));
  });

  it("has the printed indices and the limits of Cp", () => {
    expectClose(found.pp ?? 0, 1.31313, last(5));
    expectClose(found.ppl ?? 0, 1.35299, last(5));
    expectClose(found.ppu ?? 0, 1.27327, last(5));
    expectClose(found.ppk, 1.27327, last(5));
    expectClose(found.ppm ?? 0, 1.30384, last(5));
    const { lower, upper } = ppLimits(found.pp ?? 0, n);
    // The page's chi-square quantiles are a series good to four digits: it prints 1.17234 to 1.45372.
    expectClose(lower, 1.17234, { relative: 3e-4, because: "the page approximates chi-square" });
    expectClose(upper, 1.45372, { relative: 3e-4, because: "the page approximates chi-square" });
  });

  it("has a lower bound of Cpk just under the page's normal approximation", () => {
    // Bissell's 1.96 standard errors (A. F. Bissell, Applied Statistics 39 (1990) 331-340): printed 1.12771, one side 97.5 %.
    const exact = ppkLowerBound(found.ppk, n, 0.975);
    expect(exact).toBeLessThan(1.12771);
    expectClose(exact, 1.12771, { absolute: 0.003, because: "normal approximation at n = 168" });
  });
});

describe("limits of a capability of 1.33", () => {
  it("of Cp are 0.989 to 1.670 from thirty values and 0.729 to 1.934 from ten (chi-square, 40-digit quantiles)", () => {
    for (const [n, low, high] of [
      [30, 0.989, 1.67],
      [10, 0.729, 1.934],
    ]) {
      const { lower, upper } = ppLimits(1.33, n);
      expectClose(lower, low, last(3));
      expectClose(upper, high, last(3));
    }
  });

  it("of Cpk are the bounds that the noncentral t of scipy 1.17 gives, and within 0.01 of Bissell's", () => {
    for (const [n, bound] of [
      [20, 0.9486845280966051],
      [30, 1.0215572538965205],
      [100, 1.1636920457155076],
    ]) {
      expectClose(ppkLowerBound(1.33, n), bound, { relative: 1e-9, because: "both solve to about 1e-10" });
      const bissell = 1.33 - 1.6448536 * Math.sqrt(1 / (9 * n) + 1.33 ** 2 / (2 * (n - 1)));
      expectClose(bound, bissell, { absolute: 0.01, because: "Bissell's is a normal approximation" });
    }
  });
});
