/** What several readings of one run say together, beside a dense multivariate answer. */
import { inverse, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import type { Bias, GaugeBias } from "../../../calibration/index.ts";
import { filmReading, lightReadings } from "../../../recipes/desk/film-readings.ts";
import type { Reading } from "../../../recipes/record/entries.ts";
import { lineWith } from "../../support/desk-line.ts";

const { line } = lineWith({
  "thickness: 0.4 nm,": "thickness: 0.4 nm, correlation: -0.9,",
  "  reflectometer:":
    "  other: { on: polished, index: 0.006, thickness: 0.3 nm, day_to_day: { index: 0.001 } }\n  reflectometer:",
});
const film = (gauge: string, index?: number, thickness_nm?: number, sites?: number): Reading => ({
  gauge,
  on: "polished",
  ...(index === undefined ? {} : { index }),
  ...(thickness_nm === undefined ? {} : { thickness_nm }),
  ...(sites === undefined ? {} : { sites }),
});

/**
 * Every value read as a row of one linear model y = X (n, d) + e, with the covariance of e written out value by value:
 * repeatability (over the sites) within a reading, the day's part between all readings of a gauge, nothing between gauges.
 */
function dense(readings: readonly Reading[]) {
  const rows = readings.flatMap((reading, i) => [
    ...(reading.index === undefined ? [] : [{ reading, i, p: 0, y: reading.index }]),
    ...(reading.thickness_nm === undefined ? [] : [{ reading, i, p: 1, y: reading.thickness_nm }]),
  ]);
  const covariance = (a: (typeof rows)[0], b: (typeof rows)[0]): number => {
    if (a.reading.gauge !== b.reading.gauge) return 0;
    const gauge = line.gauges.get(a.reading.gauge);
    const rho = a.p === b.p ? 1 : (gauge?.correlation ?? 0);
    const own = [gauge?.index ?? 0, gauge?.thicknessNm ?? 0];
    const day = [gauge?.dayToDay.index ?? 0, gauge?.dayToDay.thicknessNm ?? 0];
    const within = a.i === b.i ? (rho * own[a.p] * own[b.p]) / (a.reading.sites ?? 1) : 0;
    return within + rho * day[a.p] * day[b.p];
  };
  const V = inverse(new Matrix(rows.map((a) => rows.map((b) => covariance(a, b)))));
  const X = new Matrix(rows.map(({ p }) => [p === 0 ? 1 : 0, p === 1 ? 1 : 0]));
  const C = inverse(X.transpose().mmul(V).mmul(X));
  const mean = C.mmul(X.transpose())
    .mmul(V)
    .mmul(Matrix.columnVector(rows.map(({ y }) => y)));
  return { index: mean.get(0, 0), thicknessNm: mean.get(1, 0), gauge: [C.get(0, 0), C.get(0, 1), C.get(1, 1)] };
}

const cases: [string, Reading[]][] = [
  ["one reading", [film("ellipsometer", 2.05, 84)]],
  ["two of one gauge", [film("ellipsometer", 2.05, 84), film("ellipsometer", 2.06, 85)]],
  ["a mean of sites and a single spot", [film("ellipsometer", 2.05, 84, 9), film("ellipsometer", 2.06, 85)]],
  ["three, of two gauges", [film("ellipsometer", 2.05, 84), film("other", 2.04, 86, 5), film("other", 2.07, 83)]],
];

describe("readings of one film", () => {
  it.each(cases)("%s: mean and covariance of generalised least squares over every value read", (_, readings) => {
    const mine = filmReading(line, readings);
    const want = dense(readings);
    // Both in double precision on at most six values.
    expect(mine?.index).toBeCloseTo(want.index, 10);
    expect(mine?.thicknessNm).toBeCloseTo(want.thicknessNm, 8);
    mine?.gauge.forEach((v, i) => {
      expect(v / want.gauge[i]).toBeCloseTo(1, 8);
    });
  });

  it("each of one property alone make one reading of both, which nothing of one reading correlates", () => {
    const { line: plain } = lineWith();
    expect(filmReading(plain, [film("ellipsometer", 2.05), film("ellipsometer", undefined, 84)])).toEqual({
      index: 2.05,
      thicknessNm: 84,
      gauge: [expect.closeTo(0.003 ** 2 + 0.004 ** 2, 12), 0, expect.closeTo(0.4 ** 2 + 0.5 ** 2, 12)],
    });
  });

  it("never get surer than the part that the gauge's readings of a day share", () => {
    const many = Array.from({ length: 400 }, () => film("ellipsometer", 2.05, 84));
    const [vn, , vd] = filmReading(line, many)?.gauge ?? [0, 0, 0];
    expect(Math.sqrt(vn)).toBeGreaterThan(0.004);
    expect(Math.sqrt(vd)).toBeGreaterThan(0.5);
  });

  it("lose what their gauge reads too high, and gain the doubt about that, once for all readings of the gauge", () => {
    const bias: Bias = { index: 0.01, thicknessNm: -1, covariance: [4e-6, -1e-4, 0.09] };
    const biases = new Map([["ellipsometer", { at: () => bias } as unknown as GaugeBias]]);
    const readings = [film("ellipsometer", 2.05, 84), film("ellipsometer", 2.06, 85)];
    const plain = filmReading(line, readings);
    const freed = filmReading(line, readings, { biases, day: 20 });
    if (!plain || !freed) throw new Error("both were read");
    expect([freed.index, freed.thicknessNm]).toEqual([
      expect.closeTo((plain.index ?? 0) - 0.01, 12),
      expect.closeTo((plain.thicknessNm ?? 0) + 1, 12),
    ]);
    for (const i of [0, 1, 2]) expect(freed.gauge[i] - plain.gauge[i]).toBeCloseTo(bias.covariance[i], 12);
    const other = filmReading(line, [film("other", 2.05, 84)], { biases, day: 20 });
    expect(other).toEqual(filmReading(line, [film("other", 2.05, 84)]));
  });

  it("on a cell, or without a value, say nothing of the film", () => {
    expect(filmReading(line, [{ gauge: "reflectometer", on: "cell", thickness_nm: 80 }])).toBe(null);
    expect(filmReading(line, [{ gauge: "ellipsometer", on: "polished", spectrum: "a.csv" }])).toBe(null);
  });
});

describe("readings of light", () => {
  it("twice are their mean, with the repeatability over the root of two", () => {
    const read = (reflectance_minimum_nm: number): Reading => ({
      gauge: "reflectometer",
      on: "cell",
      reflectance_minimum_nm,
    });
    expect(lightReadings(line, [read(600), read(604)])).toEqual([
      { kind: "reflectance_minimum_nm", value: expect.closeTo(602, 9), sd: expect.closeTo(1.5 / Math.SQRT2, 9) },
    ]);
  });
});
