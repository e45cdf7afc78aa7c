/**
 * The EWMA chart of the NIST/SEMATECH e-Handbook of Statistical Methods, section 6.3.2.4 (https://doi.org/10.18434/M32189,
 * U.S. Government work): lambda 0.3, start 50, standard deviation 2.0539, 20 values.
 */
import { describe, expect, it } from "vitest";
import { ewma, ewmaLimits } from "../../engine/index.ts";
import { expectAllClose, expectClose } from "../support/close.ts";

const values = [
  52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5, 49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6,
  52.1,
];
const printed = [
  50.6, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33, 50.11, 49.36, 49.52, 50.05, 49.38, 49.92, 50.73,
  51.23, 51.94, 51.99,
];

describe("the e-Handbook's EWMA chart (section 6.3.2.4)", () => {
  it("every average equals the printed one", () => {
    const because = "the page prints two decimals; 0.0051 leaves room for the rounding of exact halves";
    expectAllClose(ewma(values, 0.3, 50), printed, { absolute: 0.0051, because });
  });

  it("the limits equal the printed ones, and no average is outside", () => {
    const { lower, upper } = ewmaLimits(50, 2.0539, 0.3);
    expectClose(upper, 52.5884, { absolute: 0.00005, because: "printed to four decimals" });
    expectClose(lower, 47.4115, { absolute: 0.0001, because: "printed to four decimals, cut instead of rounded" });
    for (const z of ewma(values, 0.3, 50)) expect(z > lower && z < upper).toBe(true);
  });
});
