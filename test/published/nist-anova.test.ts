/**
 * One-way analysis of variance against the certified values of the NIST Statistical Reference Datasets: silicon
 * resistivity by five instruments, and generated data without and with seven leading digits in common.
 */
import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { nestedVariance } from "../../engine/index.ts";
import { digitsAgreed } from "../support/close.ts";

/** Groups and values in the order of the file, and the certified table: [degrees, sum, mean square, F] and [d, s, m]. */
function readAnova(name: string) {
  const lines = readFileSync(new URL(`../fixtures/nist/${name}.dat`, import.meta.url), "utf8").split(/\r?\n/);
  const after = (words: RegExp) => {
    const line = lines.find((candidate) => words.test(candidate));
    if (!line) throw new Error(`${name} has no line with ${words}`);
    return line.replace(words, "").trim().split(/\s+/).map(Number);
  };
  const head = lines.findLastIndex((line) => line.startsWith("Data:"));
  const rows = lines.slice(head + 1).flatMap((line) => (line.trim() ? [line.trim().split(/\s+/).map(Number)] : []));
  return { rows, between: after(/^Between \w+/), within: after(/^Within \w+/) };
}

describe("analysis of variance on NIST's certified datasets", () => {
  it.each([
    // Seven common digits of sixteen are gone once the values are written down as doubles: 1e6 x 1e-16 beside 0.1.
    ["SiRstv", [5, 5], 12.5],
    ["SmLs01", [9, 21], 14],
    ["SmLs04", [9, 21], 9],
  ] as const)("%s: sums of squares, mean squares and F", (name, sizes, digits) => {
    const { rows, between, within } = readAnova(name);
    const values = Array.from({ length: sizes[0] }, (_, group) =>
      rows.filter(([of]) => of === group + 1).map(([, value]) => value),
    ).flat();
    expect(values.length).toBe(rows.length);
    const [outer, inner] = nestedVariance(values, sizes);
    const worst = Math.min(
      digitsAgreed(outer.sumOfSquares, between[1]),
      digitsAgreed(outer.meanSquare, between[2]),
      digitsAgreed(outer.f ?? 0, between[3]),
      digitsAgreed(inner.sumOfSquares, within[1]),
      digitsAgreed(inner.meanSquare, within[2]),
    );
    expect(worst).toBeGreaterThanOrEqual(digits);
    expect([outer.degrees, inner.degrees]).toEqual([between[0], within[0]]);
  });
});
