/** Figures are sums by numbers and order statistics, and their errors are those over worlds. */
import { describe, expect, it } from "vitest";
import { random } from "../../engine/index.ts";
import { type Figure, figureOver, type How } from "./figures.ts";
import { figureInWords } from "./in-words.ts";

const figure = (how: How): Figure => ({ key: "x", words: "", how, digits: 3 });
const over = (how: How, worlds: number[][]) =>
  figureOver(
    figure(how),
    worlds.map((x) => ({ x })),
  );

describe("a share", () => {
  it("is hits by chances over all worlds, with the ratio estimator's error, by hand", () => {
    const found = over("share", [[1, 1, 0, 1], [0, 1], [1, 1], []]);
    expect(found.value).toBe(6 / 8);
    // Residuals 3 - 3, 1 - 1.5, 2 - 1.5: squares 0, .25, .25; sqrt(.5 * 3 / 2) / 8.
    expect(found.error).toBeCloseTo(Math.sqrt(0.75) / 8, 12);
    expect([found.values, found.worlds]).toEqual([8, 3]);
  });

  it("has an error as wide as it varies when worlds are drawn again", () => {
    const source = random("again");
    const study = () =>
      over(
        "share",
        Array.from({ length: 60 }, () => {
          const p = source.uniform(0.7, 1);
          return Array.from({ length: 5 + source.integer(10) }, () => Number(source.chance(p)));
        }),
      );
    const studies = Array.from({ length: 400 }, study);
    const mean = studies.reduce((sum, s) => sum + s.value, 0) / 400;
    const sd = Math.sqrt(studies.reduce((sum, s) => sum + (s.value - mean) ** 2, 0) / 399);
    const told = studies.reduce((sum, s) => sum + s.error, 0) / 400;
    // An sd of 400 values is known to 3.5 %; four of those.
    expect(Math.abs(told / sd - 1)).toBeLessThan(0.14);
  });

  it("that was never or always so is told by its bound", () => {
    const worlds = Array.from({ length: 60 }, () => [0]);
    expect(figureInWords(over("share", worlds))).toBe("0 (under 0.050)");
    expect(figureInWords(over("share", [...worlds.slice(1).map(() => [1]), [1]]))).toBe("1 (over 0.950)");
    expect(figureInWords(over("share", []))).toBe("none to tell");
  });
});

describe("a robust sd", () => {
  it("is the sd of a normal scatter, wild values or not, and so is its error", () => {
    const source = random("robust");
    const worlds = Array.from({ length: 400 }, (_, i) => [i % 50 === 0 ? 1e6 : source.normal(0, 2)]);
    const found = over("robust sd", worlds);
    // 1.48 MAD of 400 normals has a standard error of 1.167 sd / sqrt(400) = 0.117 (efficiency 37 %); 2 % wild values add 2.5 %.
    expect(Math.abs(found.value - 2)).toBeLessThan(0.4);
    expect(found.error).toBeGreaterThan(0.07);
    expect(found.error).toBeLessThan(0.18);
  });

  it("tails and shares below one are of absolute values", () => {
    const worlds = [[-1, 2, -3, 0.5], [0]];
    expect(over("tail", worlds).value).toBeCloseTo(2.8, 12);
    expect(over("below one", worlds).value).toBe(2 / 5);
  });
});
