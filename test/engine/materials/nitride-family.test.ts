import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  nitrideIndexRange,
  nitrideMemberIndices,
  nitrideSlopes,
  siliconNitride,
  tabulated,
  wavelengthGrid,
} from "../../../engine/index.ts";
import type { AbsorptionEdge } from "../../../engine/materials/absorption-edge.ts";
import { nitrideVogt2015n191 } from "../../../engine/materials/data/nitride-vogt-2015-n191.ts";
import { nitrideVogt2015n209 } from "../../../engine/materials/data/nitride-vogt-2015-n209.ts";
import { nitrideVogt2015n213 } from "../../../engine/materials/data/nitride-vogt-2015-n213.ts";
import { nitrideMembers } from "../../../engine/materials/nitride-members.ts";
import { edgeAt } from "../../../engine/materials/nitride-rule.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const members = nitrideMemberIndices();
const fine = wavelengthGrid(250, 1240, 1);
const anyIndex = fc.double({ min: nitrideIndexRange[0], max: nitrideIndexRange[1], noNaN: true });

describe("the silicon nitride family", () => {
  test("has exactly the asked index at 632.8 nm", () => {
    fc.assert(
      fc.property(anyIndex, (index) => {
        expectClose(siliconNitride(index).at(632.8).n, index, { absolute: 1e-13, because: "rounding" });
      }),
    );
  });

  test("never amplifies light, and n falls from 400 nm to the infrared", () => {
    fc.assert(
      fc.property(anyIndex, fc.double({ min: 250, max: 1240, noNaN: true }), (index, wavelengthNm) => {
        const film = siliconNitride(index);
        expect(film.at(wavelengthNm).k).toBeGreaterThanOrEqual(0);
        expect(film.at(400).n).toBeGreaterThan(film.at(600).n);
        expect(film.at(600).n).toBeGreaterThan(film.at(1100).n);
      }),
    );
  });

  test("mixes n linearly between neighbouring members at a fixed wavelength", () => {
    const n = (index: number) => siliconNitride(index).at(500).n;
    for (let i = 1; i < members.length; i++) {
      const [a, b] = [members[i - 1], members[i]];
      expectClose(n((a + b) / 2), (n(a) + n(b)) / 2, { absolute: 1e-13, because: "rounding" });
    }
  });

  test("has k of the tables at its measured members, and n within the rounding of their print", () => {
    for (const data of [nitrideVogt2015n191, nitrideVogt2015n209, nitrideVogt2015n213]) {
      const film = siliconNitride(tabulated(data).at(632.8).n);
      for (const [wavelengthNm, n, k] of data.rows.filter((row) => row[0] <= 1240)) {
        const here = film.at(wavelengthNm);
        expectClose(here.n, n, { absolute: 0.00051, because: "half a step of the printed n" });
        expectClose(here.k, k, { relative: 1e-9, absolute: 1e-15, because: "rounding" });
      }
    }
  });

  test("starts to absorb at a gap that lies between those of its neighbours, with ln k half way at half way", () => {
    const [low, , middle] = members;
    const half = edgeAt(nitrideMembers().members, (low + middle) / 2);
    const [a, b] = [low, middle].map((index) => edgeAt(nitrideMembers().members, index));
    expectClose(half.gapEv, (a.gapEv + b.gapEv) / 2, { relative: 1e-12, because: "rounding" });
    for (const place of [0.01, 0.2, 0.7, 1]) {
      const at = (edge: AbsorptionEdge) => edge.extinctionAt(edge.gapEv + place * (edge.lastEv - edge.gapEv));
      expectClose(at(half), Math.sqrt(at(a) * at(b)), { relative: 1e-9, because: "rounding, place near the gap" });
    }
    expect(half.extinctionAt(half.gapEv)).toBe(0);
    expect(half.extinctionAt(half.gapEv + 1e-6)).toBeGreaterThan(0);
  });

  test("has k without a jump in wavelength and in index, falling with wavelength and growing with index", () => {
    const all = Array.from({ length: 101 }, (_, i) => siliconNitride(Math.min(2.3, 1.8 + i * 0.005)).along(fine).k);
    const steps = (later: (i: number, j: number) => number): [least: number, most: number] => {
      let [least, most] = [0, 0];
      for (let i = 1; i < all.length; i++) {
        for (let j = 1; j < fine.length; j++) {
          least = Math.min(least, later(i, j));
          most = Math.max(most, later(i, j));
        }
      }
      return [least, most];
    };
    const [rise, fall] = steps((i, j) => all[i][j - 1] - all[i][j]);
    const [shrink, growth] = steps((i, j) => all[i][j] - all[i - 1][j]);
    expect([rise, shrink]).toEqual([0, 0]);
    // measured 0.0093 in 1 nm and 0.0285 in 0.005 of index, at index 2.3: slopes, not jumps
    expect(fall).toBeLessThan(0.01);
    expect(growth).toBeLessThan(0.03);
  });

  test("is continuous in index at the joins, in n and k at every wavelength", () => {
    for (const join of members) {
      const [below, above] = [join - 1e-9, join + 1e-9].map((index) => siliconNitride(index).along(fine));
      for (let i = 0; i < fine.length; i++) {
        const because = "a step of 2e-9 in index with slopes up to 6";
        expectClose(above.n[i], below.n[i], { absolute: 2e-8, because });
        expectClose(above.k[i], below.k[i], { absolute: 2e-8, because });
      }
    }
  });

  test("gives the same along a grid as one by one", () => {
    fc.assert(
      fc.property(anyIndex, (index) => {
        const film = siliconNitride(index);
        const { n, k } = film.along(fine);
        for (let i = 0; i < fine.length; i += 50) expect({ n: n[i], k: k[i] }).toEqual(film.at(fine[i]));
      }),
    );
  });

  test("says when it goes beyond the measured members, and how far it will", () => {
    const low = members[0];
    const high = members[members.length - 1];
    expect(siliconNitride(low).extrapolated).toBe(false);
    expect(siliconNitride(high).extrapolated).toBe(false);
    expect(siliconNitride(low - 0.01).extrapolated).toBe(true);
    expect(siliconNitride(high + 0.01).extrapolated).toBe(true);
    expect(refusalCode(() => siliconNitride(1.79))).toBe("index-out-of-range");
    expect(refusalCode(() => siliconNitride(2.31))).toBe("index-out-of-range");
    expect(refusalCode(() => siliconNitride(Number.NaN))).toBe("not-a-number");
    expect(refusalCode(() => siliconNitride(2).at(1241))).toBe("outside-table");
  });
});

describe("slopes of the family in its index", () => {
  const grid = wavelengthGrid(260, 1240, 20);

  test("are those of finite differences inside a piece", () => {
    fc.assert(
      fc.property(anyIndex, (index) => {
        const step = 2e-5;
        // a difference across a join is that of neither side; the ends of the range have their own test
        fc.pre([...nitrideIndexRange, ...members].every((join) => Math.abs(index - join) > 3 * step));
        const [below, above] = [index - step, index + step].map((at) => siliconNitride(at).along(grid));
        const slopes = nitrideSlopes(index, grid);
        for (let i = 0; i < grid.length; i++) {
          const because =
            "two differences of different step, measured 2e-6 in k; 2e-5 where the edge passes a row of a table just there";
          expectClose(slopes.n[i], (above.n[i] - below.n[i]) / (2 * step), { absolute: 1e-9, because });
          expectClose(slopes.k[i], (above.k[i] - below.k[i]) / (2 * step), { absolute: 2e-5, because });
        }
      }),
      { numRuns: 40 },
    );
  });

  test("are one-sided where the lines join, from above, and at the end of the range from below", () => {
    const step = 1e-7;
    for (const [at, side] of [
      [nitrideIndexRange[0], 1],
      ...members.map((join) => [join, 1]),
      [nitrideIndexRange[1], -1],
    ]) {
      const [here, beside] = [at, at + side * step].map((index) => siliconNitride(index).along(grid));
      const slopes = nitrideSlopes(at, grid);
      for (let i = 0; i < grid.length; i++) {
        const because = "a one-sided difference over 1e-7 (measured 7e-9 in n, 2e-6 in k): its own rounding and bend";
        expectClose(slopes.n[i], (beside.n[i] - here.n[i]) / (side * step), { absolute: 1e-7, because });
        expectClose(slopes.k[i], (beside.k[i] - here.k[i]) / (side * step), { absolute: 1e-5, because });
      }
    }
  });

  test("is 1 for n at 632.8 nm, where the index is defined", () => {
    for (const index of [1.82, 1.95, 2.05, 2.11, 2.28]) {
      expectClose(nitrideSlopes(index, [632.8]).n[0], 1, { absolute: 1e-12, because: "rounding" });
    }
  });

  test("refuse what the family refuses", () => {
    expect(refusalCode(() => nitrideSlopes(2.31, grid))).toBe("index-out-of-range");
    expect(refusalCode(() => nitrideSlopes(2, [1241]))).toBe("outside-table");
  });
});
