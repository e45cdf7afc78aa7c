import { describe, expect, it } from "vitest";
import { intervalOf, monotoneCubic, piecewiseLinear } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

// The example by which Fritsch and Carlson (1980) show the overshoot of ordinary cubics (RPN 14 data, from memory).
const x = [7.99, 8.09, 8.19, 8.7, 9.2, 10, 12, 15, 20];
const y = [0, 2.76429e-5, 4.37498e-2, 0.169183, 0.469428, 0.94374, 0.998636, 0.999919, 0.999994];

for (const [name, make] of [
  ["monotone cubic", monotoneCubic],
  ["straight lines", piecewiseLinear],
] as const) {
  describe(`a table read by ${name}`, () => {
    it("returns every row exactly", () => {
      const curve = make(x, y);
      for (let i = 0; i < x.length; i++) expect(curve(x[i])).toBe(y[i]);
    });

    it("never leaves the values of the two rows around it", () => {
      const curve = make(x, y);
      for (let i = 1; i < x.length; i++) {
        for (let k = 0; k <= 50; k++) {
          const value = curve(x[i - 1] + ((x[i] - x[i - 1]) * k) / 50);
          // One rounding of a sum of four terms below 1.
          expect(value).toBeGreaterThanOrEqual(y[i - 1] - 2e-16);
          expect(value).toBeLessThanOrEqual(y[i] + 2e-16);
        }
      }
    });

    it("refuses to guess outside the table, and for NaN", () => {
      const curve = make(x, y);
      for (const at of [7.98, 20.001, Number.NaN]) expect(refusalCode(() => curve(at))).toBe("outside-table");
    });

    it("refuses tables that are not functions, naming the row", () => {
      expect(refusalCode(() => make([1, 1, 2], [1, 2, 3]))).toBe("not-increasing");
      expect(refusalCode(() => make([1, 2], [1, Number.NaN]))).toBe("not-a-number");
      expect(refusalCode(() => make([1], [1]))).toBe("bad-table");
      expect(refusalCode(() => make([1, 2], [1, 2, 3]))).toBe("bad-table");
    });

    it("keeps its own copy of the table", () => {
      const own = [1, 2, 3];
      const curve = make([1, 2, 3], own);
      own[1] = 99;
      expect(curve(2)).toBe(2);
    });
  });
}

describe("the interval of an abscissa", () => {
  it("begins at its row; the last row belongs to the last interval", () => {
    expect([1, 1.5, 2, 3.9, 4].map((at) => intervalOf([1, 2, 4], at))).toEqual([0, 0, 1, 1, 1]);
  });
});

describe("the monotone cubic", () => {
  it("is monotone within every interval of monotone rows", () => {
    const curve = monotoneCubic(x, y);
    let before = curve(x[0]);
    for (let k = 1; k <= 5000; k++) {
      const value = curve(x[0] + ((x[8] - x[0]) * k) / 5000);
      expect(value - before).toBeGreaterThanOrEqual(-2e-16);
      before = value;
    }
  });

  it("reproduces a straight line and, away from its vertex, a parabola", () => {
    const rows = [0, 1, 2.5, 3, 5, 6];
    const line = monotoneCubic(
      rows,
      rows.map((v) => 3 - 2 * v),
    );
    const parabola = monotoneCubic(
      rows,
      rows.map((v) => (v + 2) ** 2),
    );
    for (const at of [0.3, 1.7, 2.6, 4.4, 5.9]) {
      expectClose(line(at), 3 - 2 * at, { absolute: 4e-15, because: "rounding of values up to 9" });
      expectClose(parabola(at), (at + 2) ** 2, {
        relative: 1e-14,
        because: "three-point slopes are exact on a parabola",
      });
    }
  });

  it("is flat at a local extreme of the rows and has a continuous slope elsewhere", () => {
    const curve = monotoneCubic([0, 1, 2, 3], [0, 1, 1.5, 0.5]);
    const h = 1e-6;
    const slope = (at: number) => (curve(at + h) - curve(at - h)) / (2 * h);
    expectClose(slope(2), 0, { absolute: 1e-5, because: "central difference across a kink in curvature, h = 1e-6" });
    const left = (curve(1) - curve(1 - h)) / h;
    const right = (curve(1 + h) - curve(1)) / h;
    expectClose(left, right, { absolute: 1e-5, because: "one-sided differences, h = 1e-6" });
  });
});
