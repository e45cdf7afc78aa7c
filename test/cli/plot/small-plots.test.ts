import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { type LanePoint, laneOf, laneRows, laneSummary, offGoal } from "../../../cli/plot/lanes.ts";
import { Raster } from "../../../cli/plot/raster.ts";
import { surfaceAt } from "../../../cli/plot/shading.ts";
import { place, ticks } from "../../../cli/plot/ticks.ts";
import { barCell, barRow } from "../../../cli/plot/window-bar.ts";
import { rowCells, rowText } from "../../../cli/text/rows.ts";

const look = { colour: "none", ascii: false } as const;
const goal = { value: 88, within: 2 };
const point = (value: number | null, sinceClean: number, suspect = false): LanePoint => ({
  value,
  sinceClean,
  suspect,
});

describe("lanes", () => {
  test.each([
    [88, 1, false],
    [90, 1, false],
    [86, 1, false],
    [90.01, 0, false],
    [85.99, 2, false],
    [94.1, 0, true],
    [81, 2, true],
  ])("%f nm against 88 within 2 lies in lane %i, beyond: %s", (value, lane, beyond) => {
    expect(laneOf(value, goal)).toMatchObject({ lane, beyond });
  });

  test("stand higher for higher values within a lane", () => {
    const heights = [86.1, 87.1, 88.1, 89.1].map((value) => laneOf(value, goal).height);
    expect(heights).toEqual([0, 1, 2, 3]);
  });

  test("put the newest run at the right, gaps for what was not measured, ? for a bad reading, an arrow beyond", () => {
    const points = [point(99, 1), point(null, 2), point(70, 3), point(88, 4, true), point(88, 5)];
    const [above, inside, below] = laneRows({ width: 6, look, goal, points }).map(rowText);
    expect(above).toBe(" ▴    ");
    expect(inside).toBe("····?⠒");
    expect(below).toBe("   ▾  ");
  });

  test("draw a clean between the runs it lies between", () => {
    const lines = laneRows({ width: 4, look, goal, points: [point(88, 40), point(88, 41), point(88, 1)] }).map(rowText);
    expect(lines[0]).toBe("  ┊ ");
    expect(lines[1]).toBe("⠒⠒┊⠒");
  });

  test("say themselves in a sentence", () => {
    const plot = { width: 10, look, goal, points: [point(88, 1), point(84.1, 2)] };
    expect(laneSummary("thickness", "nm", 1, plot)).toBe(
      "thickness last read 84.1 nm, 3.9 nm low; 1 of 2 runs outside the goal.",
    );
    expect(laneSummary("thickness", "nm", 1, { ...plot, points: [] })).toBe("thickness: not measured yet.");
    expect(offGoal(90, goal, "nm", 1)).toBe("in goal");
  });
});

describe("the bar of a setting", () => {
  const bar = { width: 11, look, low: 0, high: 100, now: 50, after: 50 };
  test("puts the value where it lies between the ends", () => {
    expect(rowText(barRow(bar))).toBe("├────●────┤");
    expect(rowText(barRow({ ...bar, after: 80 }))).toBe("├────●──◆─┤");
    expect([0, 50, 100].map((value) => barCell(bar, value))).toEqual([0, 5, 10]);
  });

  test("shows a value outside as an arrow at that end", () => {
    expect(rowText(barRow({ ...bar, after: 120 }))).toBe("├────●────▸");
    expect(rowText(barRow({ ...bar, now: -5, after: -5 }))).toBe("◂─────────┤");
  });
});

describe("ticks", () => {
  test("are round, inside, no more than asked for, and evenly apart", () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1000, max: 1000, noNaN: true }),
        fc.double({ min: 1e-3, max: 1000, noNaN: true }),
        fc.integer({ min: 2, max: 12 }),
        (low, span, most) => {
          const { values } = ticks({ low, high: low + span }, most);
          expect(values.length).toBeLessThanOrEqual(most);
          const slack = span * 1e-6;
          for (const value of values) expect(value >= low - slack && value <= low + span + slack).toBe(true);
          const step = values[1] - values[0];
          if (values.length > 2)
            for (let i = 2; i < values.length; i++) expect((values[i] - values[i - 1]) / step).toBeCloseTo(1, 6);
        },
      ),
      { seed: 3, numRuns: 200 },
    );
    expect(ticks({ low: 2.0, high: 2.12 }, 7)).toEqual({ values: [2, 2.02, 2.04, 2.06, 2.08, 2.1, 2.12], decimals: 2 });
  });

  test("give up on an axis without extent", () => {
    expect(ticks({ low: 5, high: 5 }, 4).values).toEqual([]);
    expect(ticks({ low: Number.NaN, high: 5 }, 4).values).toEqual([]);
  });

  test("the low end lies in the first cell and just under the high end in the last", () => {
    expect(place({ low: 10, high: 20 }, 10, 8)).toBe(0);
    expect(place({ low: 10, high: 20 }, 19.99, 8)).toBe(7);
  });
});

describe("the raster", () => {
  test("sets the bits of the braille block by position", () => {
    // Unicode standard, braille patterns: dots 1-8 are bits 0-7; dots 7 and 8 are the lowest row.
    const glyph = (x: number, y: number) => {
      const raster = new Raster(1, 1);
      raster.dot(x, y);
      return raster.glyph(0, 0, false, "*");
    };
    expect([
      glyph(0, 3),
      glyph(0, 2),
      glyph(0, 1),
      glyph(1, 3),
      glyph(1, 2),
      glyph(1, 1),
      glyph(0, 0),
      glyph(1, 0),
    ]).toEqual([..."⠁⠂⠄⠈⠐⠠⡀⢀"]);
  });

  test("ignores dots outside and lines without end", () => {
    const raster = new Raster(2, 2);
    for (const bad of [-1, 99, Number.NaN, Number.POSITIVE_INFINITY]) raster.dot(bad, 0);
    raster.line(0, 0, Number.POSITIVE_INFINITY, 0);
    expect([raster.mask(0, 1), raster.mask(1, 1)]).toEqual([0, 0]);
  });
});

describe("the surface under the film plane", () => {
  const grid = {
    index: [2, 2.1],
    thicknessNm: [80, 90],
    weightedReflectancePercent: [
      [1, 2],
      [3, 4],
    ],
  };
  test("is bilinear inside and unknown outside", () => {
    expect(surfaceAt(grid, 2.05, 85)).toBeCloseTo(2.5, 12);
    expect(surfaceAt(grid, 2.1, 90)).toBeCloseTo(4, 12);
    expect(surfaceAt(grid, 2.11, 85)).toBeNull();
    expect(surfaceAt(grid, 2.05, 79)).toBeNull();
  });
});

test("every plot row is exactly as wide as asked", () => {
  for (const width of [4, 11, 37]) {
    for (const row of laneRows({ width, look, goal, points: [point(88, 1), point(200, 2)] }))
      expect(rowCells(row)).toBe(width);
    expect(rowCells(barRow({ width, look, low: 0, high: 1, now: 0.5, after: 2 }))).toBe(width);
  }
});
