import { describe, expect, test } from "vitest";
import { type CauchyCoefficients, cauchyMaterial, constantMaterial, sellmeierMaterial } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("a constant material", () => {
  test("answers everywhere", () => {
    expect(constantMaterial(1.64, 0.01).at(5000)).toEqual({ n: 1.64, k: 0.01 });
    expect(constantMaterial(1.64).at(1)).toEqual({ n: 1.64, k: 0 });
  });

  test("refuses what is no index", () => {
    expect(refusalCode(() => constantMaterial(0))).toBe("material-value");
    expect(refusalCode(() => constantMaterial(2, -1))).toBe("material-value");
    expect(refusalCode(() => constantMaterial(Number.NaN))).toBe("not-a-number");
    expect(refusalCode(() => constantMaterial(2, Number.POSITIVE_INFINITY))).toBe("not-a-number");
  });
});

describe("Cauchy's formula", () => {
  const made = (change: Partial<CauchyCoefficients> = {}) =>
    cauchyMaterial({ a: 1.9, bNm2: 2e4, cNm4: 1e9, k: 0.002, rangeNm: [300, 1200], ...change });

  test("is a + b / l^2 + c / l^4 inside its range, ends included", () => {
    const { n, k } = made().at(500);
    expectClose(n, 1.9 + 2e4 / 250_000 + 1e9 / 6.25e10, { absolute: 1e-15, because: "rounding" });
    expect(k).toBe(0.002);
    expect(made({ k: undefined }).at(300).k).toBe(0);
    expect(made().at(1200).n).toBeGreaterThan(1.9);
  });

  test("refuses wavelengths outside its range, and those where it gives no index", () => {
    expect(refusalCode(() => made().at(299))).toBe("outside-table");
    expect(refusalCode(() => made().at(1200.1))).toBe("outside-table");
    expect(refusalCode(() => made().at(Number.NaN))).toBe("outside-table");
    expect(refusalCode(() => made({ a: 0.1, bNm2: -2e4, cNm4: 0 }).at(400))).toBe("material-value");
  });

  test("refuses coefficients and ranges that are none", () => {
    for (const key of ["a", "bNm2", "cNm4", "k"]) {
      expect(refusalCode(() => made({ [key]: Number.NaN }))).toBe("not-a-number");
    }
    expect(refusalCode(() => made({ k: -0.1 }))).toBe("material-value");
    expect(refusalCode(() => made({ rangeNm: [1200, 300] }))).toBe("material-range");
    expect(refusalCode(() => made({ rangeNm: [0, 300] }))).toBe("material-range");
    expect(refusalCode(() => made({ rangeNm: [300, Number.POSITIVE_INFINITY] }))).toBe("not-a-number");
  });
});

describe("Sellmeier's formula", () => {
  const made = (terms: [number, number][], rangeNm: [number, number] = [300, 1200]) =>
    sellmeierMaterial({ name: "film", source: "test", rangeNm, terms });

  test("is 1 + sum b l^2 / (l^2 - c^2), without absorption", () => {
    const { n, k } = made([
      [1, 0.1],
      [0.5, 9],
    ]).at(500);
    expectClose(n * n, 1 + 0.25 / (0.25 - 0.01) + (0.5 * 0.25) / (0.25 - 81), { relative: 1e-14, because: "rounding" });
    expect(k).toBe(0);
  });

  test("refuses a pole inside its range, and is not trusted across one", () => {
    expect(refusalCode(() => made([[1, 0.5]]))).toBe("material-value");
    expect(refusalCode(() => made([[1, 1.2]]))).toBe("material-value");
    const film = made([
      [1, 0.1],
      [0.5, 9],
    ]);
    expectClose(film.continuedAt?.(200).n ?? 0, Math.sqrt(1 + 4 / 3 - 0.02 / 80.96), {
      relative: 1e-12,
      because: "rounding",
    });
    // at 60 nm the formula gives n^2 = 0.44 on the far side of its pole at 100 nm
    expect(refusalCode(() => film.continuedAt?.(60))).toBe("material-value");
    expect(refusalCode(() => film.continuedAt?.(9500))).toBe("material-value");
    // a term of no weight has no pole
    expect(
      made([
        [1, 0.1],
        [0, 0.5],
      ]).at(600).n,
    ).toBeGreaterThan(1);
  });

  test("refuses terms that are none, and wavelengths where n^2 is not above 0", () => {
    expect(refusalCode(() => made([]))).toBe("material-value");
    expect(refusalCode(() => made([[1, -0.1]]))).toBe("material-value");
    expect(refusalCode(() => made([[Number.NaN, 0.1]]))).toBe("not-a-number");
    expect(refusalCode(() => made([[1, Number.NaN]]))).toBe("not-a-number");
    expect(refusalCode(() => made([[-2, 0.1]]).at(600))).toBe("material-value");
    expect(refusalCode(() => made([[1, 0.1]]).at(299))).toBe("outside-table");
    expect(refusalCode(() => made([[1, 0.1]], [1200, 300]))).toBe("material-range");
  });
});
