import { describe, expect, test } from "vitest";
import { ellipseAt, ellipseHalf } from "../../../cli/plot/ellipse.ts";
import { type PlanePlot, planeCell, planeMargin, planeRows, planeSummary } from "../../../cli/plot/film-plane.ts";
import { planeRange } from "../../../cli/plot/plane-range.ts";
import { rowText } from "../../../cli/text/rows.ts";

const film = (index: number, thicknessNm: number) => ({
  index,
  thicknessNm,
  covariance: [0.006 ** 2, -0.0012, 0.8 ** 2] as const,
});

const plot: PlanePlot = {
  width: 45,
  height: 19,
  look: { colour: "none", ascii: false },
  index: { low: 2.0, high: 2.12 },
  thicknessNm: { low: 80, high: 96 },
  goal: { index: { value: 2.06, within: 0.02 }, thicknessNm: { value: 88, within: 2 } },
  grid: { index: [], thicknessNm: [], weightedReflectancePercent: [] },
  runs: [],
  now: null,
  after: null,
};
const draw = (more: Partial<PlanePlot>) => planeRows({ ...plot, ...more }).map(rowText);

describe("the film plane", () => {
  test("puts the corners of the goal box on the cells of the goal's edges", () => {
    const lines = draw({});
    // 40 columns over 0.12 of index: 2.04 lies in column floor(0.04/0.12*40) = 13, 2.08 in 26.
    // 16 rows over 16 nm, one a row: 86 in the seventh row from below (row 9 from the top), 90 in row 5.
    expect(lines[5][planeMargin + 13]).toBe("┌");
    expect(lines[5][planeMargin + 26]).toBe("┐");
    expect(lines[9][planeMargin + 13]).toBe("└");
    expect(lines[9][planeMargin + 26]).toBe("┘");
  });

  test("labels both axes with their units and every tick of an axis with the same decimals", () => {
    const lines = draw({});
    expect(lines[0]).toContain("nm");
    expect(lines[17]).toMatch(/^index/);
    expect(lines[17].match(/\d\.\d+/g)).toEqual(["2.02", "2.04", "2.06", "2.08", "2.10"]);
  });

  test("marks the film now, the film asked about and the runs on their own cells", () => {
    const runs = [
      { index: 2.01, thicknessNm: 82 },
      { index: 2.03, thicknessNm: 84 },
    ];
    const lines = draw({ runs, now: film(2.05, 85), after: film(2.09, 92) });
    const at = (index: number, nm: number) => {
      const { column, row } = planeCell(plot, index, nm);
      return lines[row][column];
    };
    expect([at(2.01, 82), at(2.03, 84), at(2.05, 85), at(2.09, 92)]).toEqual(["a", "b", "●", "◆"]);
  });

  test.each([
    ["above", 2.06, 120, "▴"],
    ["below", 2.06, 20, "▾"],
    ["left", 1.8, 88, "◂"],
    ["right", 2.4, 88, "▸"],
  ])("marks a film %s the picture by an arrow on that edge", (_side, index, nm, arrow) => {
    expect(draw({ now: film(index, nm) }).join("\n")).toContain(arrow);
    expect(draw({}).join("\n")).not.toContain(arrow);
  });

  test("draws the two ellipses unlike: closed now, broken after", () => {
    const dots = (lines: string[]) =>
      [...lines.join("")]
        .filter((sign) => sign > "\u2800" && sign <= "\u28ff")
        .reduce((sum, sign) => sum + (sign.charCodeAt(0) & 0xff).toString(2).replaceAll("0", "").length, 0);
    const closed = dots(draw({ now: film(2.06, 88) }));
    const broken = dots(draw({ after: film(2.06, 88) }));
    // two dots drawn, three left out: two fifths of the closed line, give or take the overlap of dots
    expect(broken / closed).toBeGreaterThan(0.25);
    expect(broken / closed).toBeLessThan(0.6);
  });

  test("shades the table of reflectance between round values and leaves blank what lies outside it", () => {
    const grid = {
      index: [2.0, 2.06],
      thicknessNm: [80, 96],
      weightedReflectancePercent: [
        [1.6, 2.4],
        [1.6, 2.4],
      ],
    };
    const lines = draw({ grid, goal: {} });
    expect(lines[8].slice(planeMargin + 1, planeMargin + 20)).toMatch(/^ +·+░+▒+$/);
    expect(lines[8].slice(planeMargin + 21).trim()).toBe("");
    expect(lines[18]).toBe("R % blank 1.8 · 2.0 ░ 2.2 ▒".padEnd(45));
  });

  test("holds no byte above 0x7e in its ASCII twin", () => {
    const grid = {
      index: [2.0, 2.12],
      thicknessNm: [80, 96],
      weightedReflectancePercent: [
        [1.6, 2.4],
        [1.6, 2.4],
      ],
    };
    const lines = draw({
      look: { colour: "none", ascii: true },
      grid,
      now: film(2.05, 85),
      after: film(2.07, 200),
      runs: [{ index: 2.01, thicknessNm: 82 }],
    });
    expect(lines.join("")).toMatch(/^[ -~]*$/);
    for (const sign of ["O", "^", "a", "+", "o", "x"]) expect(lines.join("")).toContain(sign);
  });

  test("says the picture in one sentence", () => {
    expect(
      planeSummary({
        ...plot,
        now: film(2.043, 84.1),
        after: film(2.061, 88.1),
        runs: [
          { index: 2.06, thicknessNm: 88 },
          { index: 2.06, thicknessNm: 84 },
        ],
      }),
    ).toBe(
      "film now index 2.043, 84.1 nm, thickness 3.9 nm low; with the settings asked about index 2.061, 88.1 nm, inside the goal box; 1 of the last 2 runs outside the goal box.",
    );
  });
});

describe("the 95 % ellipse", () => {
  test("lies at the Mahalanobis distance of the chi-square quantile, 5.991 for 2 degrees of freedom", () => {
    // 0.95 quantile of chi-square with 2 degrees of freedom: 5.991 (NIST/SEMATECH handbook, table 1.3.6.7.4)
    const [a, b, c] = [4e-5, -0.002, 0.64];
    const det = a * c - b * b;
    for (let i = 0; i < 12; i++) {
      const [x, y] = ellipseAt({ index: 0, thicknessNm: 0, covariance: [a, b, c] }, (i * Math.PI) / 6);
      expect((c * x * x - 2 * b * x * y + a * y * y) / det).toBeCloseTo(5.991, 2);
    }
  });

  test("reaches as far along each axis as its half-widths say", () => {
    const one = film(2, 80);
    const half = ellipseHalf(one);
    const points = Array.from({ length: 720 }, (_, i) => ellipseAt(one, (i * Math.PI) / 360));
    // 720 points: the largest is within 1 - cos(0.25 deg) = 1e-5 of the true extent
    expect(Math.max(...points.map(([x]) => x - 2)) / half.index).toBeCloseTo(1, 4);
    expect(Math.max(...points.map(([, y]) => y - 80)) / half.thicknessNm).toBeCloseTo(1, 4);
  });
});

describe("the range of the film plane", () => {
  const goal = plot.goal;
  test("always holds the goal with three tolerances on each side", () => {
    const range = planeRange({ goal, films: [], runs: [] });
    expect(range.index.low).toBeCloseTo(2.0, 9);
    expect(range.thicknessNm).toEqual({ low: 82, high: 94 });
  });

  test("grows to show a film off goal, but not without end", () => {
    const near = planeRange({ goal, films: [film(2.06, 78)], runs: [] });
    expect(near.thicknessNm.low).toBeLessThan(78);
    const far = planeRange({ goal, films: [film(2.06, 10)], runs: [] });
    expect(far.thicknessNm.low).toBe(88 - 9 * 2);
  });
});
