/**
 * Individuals chart and cumulative sum of the NIST/SEMATECH e-Handbook of Statistical Methods, sections 6.3.2.2 and
 * 6.3.2.3 (https://doi.org/10.18434/M32189, U.S. Government work), and run lengths of the cumulative sum from printed tables.
 */
import { describe, expect, it } from "vitest";
import { cusum, cusumRunLength, falseAlarmsPerRun, individualsLimits, SLOW_SHIFT } from "../../engine/index.ts";
import { expectAllClose, expectClose } from "../support/close.ts";

describe("the e-Handbook's individuals chart (section 6.3.2.2): flow rate of ten batches", () => {
  const flow = [49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1];
  const last = { absolute: 0.00005, because: "printed to four decimals" };

  it("has the printed mean, moving range and limits, and no batch outside", () => {
    const chart = individualsLimits(flow);
    expectClose(chart.centre, 50.81, { absolute: 1e-12, because: "rounding of ten additions" });
    expectClose(chart.movingRange, 1.8778, last);
    // The page divides by 1.128, d2 rounded; d2 is 2/sqrt(pi) = 1.12838.
    const asRounded = 2 / Math.sqrt(Math.PI) / 1.128;
    expectClose(chart.centre + (chart.upper - chart.centre) * asRounded, 55.8041, last);
    expectClose(chart.centre - (chart.centre - chart.lower) * asRounded, 45.8159, last);
    for (const x of flow) expect(x > chart.lower && x < chart.upper).toBe(true);
  });
});

describe("the e-Handbook's cumulative sum (section 6.3.2.3): twenty means of four", () => {
  const means = [
    324.925, 324.675, 324.725, 324.35, 325.35, 325.225, 324.125, 324.525, 325.225, 324.6, 324.625, 325.15, 328.325,
    327.25, 327.825, 328.5, 326.675, 327.775, 326.875, 328.35,
  ];
  const printedUp = [0, 0, 0, 0, 0.03, 0, 0, 0, 0, 0, 0, 0, 3.01, 4.94, 7.45, 10.63, 11.99, 14.44, 16.0, 19.04];
  const printedDown = [0, 0.01, 0, 0.33, 0, 0, 0.56, 0.72, 0.17, 0.25, 0.31, 0, 0, 0, 0, 0, 0, 0, 0, 0];
  // h as the page gets it from the two error rates, -2 ln(0.0027/2) k.
  const chart = cusum(means, { target: 325, k: 0.3175, h: -2 * Math.log(0.0027 / 2) * 0.3175 });

  it("every sum equals the printed one", () => {
    // Downwards 0.255 is printed as 0.25: exact halves go either way.
    const tolerance = { absolute: 0.0051, because: "printed to two decimals; 0.0051 leaves room for exact halves" };
    expectAllClose(chart.up, printedUp, tolerance);
    expectAllClose(chart.down, printedDown, tolerance);
  });

  it("the first alarm is at the fourteenth group, and all after it alarm too", () => {
    expect(chart.alarms).toEqual([13, 14, 15, 16, 17, 18, 19]);
  });
});

describe("run lengths of the two-sided cumulative sum, k = 0.5", () => {
  it("equal the table of J. M. Lucas and R. B. Crosier, Technometrics 24 (1982) 199-205 (from memory)", () => {
    const shifts = [0, 0.25, 0.5, 0.75, 1, 1.5, 2, 2.5, 3, 4];
    const printed: [number, number[]][] = [
      [4, [168, 74.2, 26.6, 13.3, 8.38, 4.75, 3.34, 2.62, 2.19, 1.71]],
      [5, [465, 139, 38.0, 17.0, 10.4, 5.75, 4.01, 3.11, 2.57, 2.01]],
    ];
    for (const [h, lengths] of printed) {
      shifts.forEach((shift, i) => {
        expectClose(cusumRunLength(0.5, h, shift), lengths[i], {
          relative: 0.0051,
          because: "printed to three digits",
        });
      });
    }
  });

  it("of the six designs published for one false alarm in 370 are within 2 % (D. M. Hawkins 1993, from memory)", () => {
    const designs: [number, number][] = [
      [0.25, 8.01],
      [0.5, 4.77],
      [0.75, 3.34],
      [1, 2.52],
      [1.25, 1.99],
      [1.5, 1.61],
    ];
    for (const [k, h] of designs) {
      // d ln(run length)/dh is about 2k, so rounding h by 0.005 is worth 2k x 0.5 %.
      expectClose(cusumRunLength(k, h), 370, { relative: 0.02, because: "h is printed to two decimals" });
    }
  });

  it("of the detector used here is 369 as things should be and 10 after a shift of one standard deviation", () => {
    expectClose(1 / falseAlarmsPerRun(SLOW_SHIFT), 370, {
      absolute: 2,
      because: "published as 370, h to two decimals",
    });
    expectClose(cusumRunLength(SLOW_SHIFT.k, SLOW_SHIFT.h, 1), 9.9, { absolute: 0.05, because: "two digits" });
  });
});
