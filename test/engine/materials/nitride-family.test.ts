import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { nitrideIndexRange, nitrideMemberIndices, siliconNitride } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

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

  test("mixes n linearly and ln k linearly between members at a fixed wavelength", () => {
    const [low, middle, high] = nitrideMemberIndices();
    const mean = (a: number, b: number) => siliconNitride((a + b) / 2);
    const because = "rounding";
    const n = (index: number) => siliconNitride(index).at(500).n;
    expectClose(mean(low, middle).at(500).n, (n(low) + n(middle)) / 2, { absolute: 1e-13, because });
    expectClose(mean(middle, high).at(500).n, (n(middle) + n(high)) / 2, { absolute: 1e-13, because });
    const k = (index: number) => siliconNitride(index).at(400).k;
    expectClose(mean(low, high).at(400).k, Math.sqrt(k(low) * k(high)), { relative: 1e-12, because });
    // 550 nm: the lower member is below its detection limit, so k itself is mixed.
    expectClose(mean(low, high).at(550).k, siliconNitride(high).at(550).k / 2, { relative: 1e-12, because });
  });

  test("says when it goes beyond the measured members, and how far it will", () => {
    const [low, , high] = nitrideMemberIndices();
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
