import { describe, expect, test } from "vitest";
import { tabulated } from "../../../engine/index.ts";
import { unrounded } from "../../../engine/materials/unrounded.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

const rows: [number, number, number][] = [
  [400, 2.2, 0.1],
  [500, 2.1, 0.01],
  [600, 2.05, 0],
  [700, 2.04, 0],
];
const film = tabulated({ name: "film", source: "test", rows });

describe("a tabulated material", () => {
  test("passes through its rows and stays between them", () => {
    for (const [wavelengthNm, n, k] of rows) {
      expectClose(film.at(wavelengthNm).n, n, { absolute: 1e-15, because: "rounding" });
      expectClose(film.at(wavelengthNm).k, k, { absolute: 1e-15, because: "rounding" });
    }
    for (let wavelengthNm = 400; wavelengthNm < 700; wavelengthNm += 7) {
      const i = Math.floor((wavelengthNm - 400) / 100);
      const { n, k } = film.at(wavelengthNm);
      expect(n).toBeLessThanOrEqual(rows[i][1] + 1e-12);
      expect(n).toBeGreaterThanOrEqual(rows[i + 1][1] - 1e-12);
      expect(k).toBeLessThanOrEqual(rows[i][2] + 1e-12);
      expect(k).toBeGreaterThanOrEqual(rows[i + 1][2] - 1e-12);
    }
  });

  test("follows ln k between rows that absorb, and k itself beside a zero", () => {
    expectClose(film.at(450).k, Math.sqrt(0.1 * 0.01), {
      relative: 1e-12,
      because: "two rows: a straight line in ln k",
    });
    expectClose(film.at(550).k, 0.005, { absolute: 1e-15, because: "rounding" });
    expect(film.at(650).k).toBe(0);
  });

  test("refuses wavelengths outside the table, with the numbers", () => {
    expect(refusalCode(() => film.at(399.9))).toBe("outside-table");
    expect(refusalCode(() => film.at(700.1))).toBe("outside-table");
    expect(refusalCode(() => film.at(Number.NaN))).toBe("outside-table");
    expect(() => film.at(399.9)).toThrow("film is known from 400 to 700 nm, 399.9 nm was asked");
  });

  test("refuses a table that is none", () => {
    const make =
      (...bad: [number, number, number][]) =>
      () =>
        tabulated({ name: "bad", source: "test", rows: bad });
    expect(refusalCode(make([400, 2, 0]))).toBe("bad-table");
    expect(refusalCode(make([400, 2, 0], [400, 2, 0]))).toBe("not-increasing");
    expect(refusalCode(make([400, 2, 0], [500, Number.NaN, 0]))).toBe("not-a-number");
    expect(refusalCode(make([400, 2, 0], [500, 2, -0.1]))).toBe("table-value");
    expect(refusalCode(make([400, 2, 0], [500, 0, 0.1]))).toBe("table-value");
  });
});

describe("smooth values behind a rounded table", () => {
  const truth = Array.from({ length: 80 }, (_, i) => 2 + 5 / (i + 20) ** 1.2);
  const printed = truth.map((value) => Math.round(value * 1000) / 1000);
  const smooth = unrounded(printed, 0.001);

  test("stay within half a step of the printed ones", () => {
    smooth.forEach((value, i) => {
      expect(Math.abs(value - printed[i])).toBeLessThanOrEqual(0.0005 + 1e-15);
    });
  });

  test("have slopes nearer the truth than the printed ones", () => {
    // Away from the steep first rows, where the table moves by many steps a row and rounding does not matter.
    const worst = (values: ArrayLike<number>) =>
      Math.max(...truth.map((value, i) => (i < 15 ? 0 : Math.abs(values[i] - values[i - 1] - (value - truth[i - 1])))));
    expect(worst(smooth)).toBeLessThan(worst(printed) / 3);
  });
});
