/**
 * The distributions over their everyday range against a table of 400 values computed with mpmath at 40 digits
 * (test/fixtures/distributions). What is asked of them is 1e-9; what they keep is 1e-12 and better.
 */
import { readFileSync } from "node:fs";
import { describe, it } from "vitest";
import {
  chiSquareCdf,
  chiSquareQuantile,
  chiSquareUpper,
  fCdf,
  fUpper,
  noncentralTCdf,
  normalCdf,
  normalQuantile,
  studentTCdf,
  studentTQuantile,
} from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";

const table = JSON.parse(
  readFileSync(new URL("../fixtures/distributions/mpmath.json", import.meta.url), "utf8"),
) as Record<string, number[][]>;

type Law = (...args: number[]) => number;

/** Rows of one law: arguments, then a value for each of the functions. */
const laws: [string, Law[], number][] = [
  // exp(-x^2/2) turns the rounding of x = 37 into 1e-13.
  ["normal", [(z) => normalCdf(z)], 1e-13],
  ["normalQuantile", [(p) => normalQuantile(p)], 2e-15],
  ["studentT", [studentTCdf], 1e-13],
  ["studentTQuantile", [studentTQuantile], 1e-12],
  ["chiSquare", [chiSquareCdf, chiSquareUpper], 1e-12],
  ["chiSquareQuantile", [chiSquareQuantile], 1e-12],
  ["fRatio", [fCdf, fUpper], 1e-12],
  // By quadrature.
  ["noncentralT", [noncentralTCdf], 1e-11],
];

describe("distributions over their everyday range", () => {
  for (const [name, functions, relative] of laws) {
    it(`${name}: ${table[name].length} rows to ${relative}`, () => {
      for (const row of table[name]) {
        const args = row.slice(0, row.length - functions.length);
        functions.forEach((law, i) => {
          const expected = row[args.length + i];
          expectClose(law(...args), expected, {
            relative,
            absolute: 1e-300,
            because: `rounding, at ${name}(${args.join(", ")})`,
          });
        });
      }
    });
  }
});
