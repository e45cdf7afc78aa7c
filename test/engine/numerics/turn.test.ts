import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { writeTurn } from "../../../engine/numerics/turn.ts";
import { expectClose } from "../../support/close.ts";

const turn = (angleRad: number): [number, number] => {
  const out = new Float64Array(3);
  writeTurn(angleRad, out, 1);
  return [out[1], out[2]];
};

describe("sine and cosine together", () => {
  const tolerance = { absolute: 2.3e-16, because: "one unit in the last place of a number near 1" };
  test.each([1, 100, 2.9e5, 1e7])("are those of the language for angles up to %f", (most) => {
    fc.assert(
      fc.property(fc.double({ min: -most, max: most, noNaN: true }), (angleRad) => {
        const [cosine, sine] = turn(angleRad);
        expectClose(cosine, Math.cos(angleRad), tolerance);
        expectClose(sine, Math.sin(angleRad), tolerance);
      }),
      { numRuns: 3000, seed: 3 },
    );
  });

  test("at the quarters, and of what is no angle", () => {
    for (let quarter = -9; quarter <= 9; quarter++) {
      const [cosine, sine] = turn((quarter * Math.PI) / 2);
      expectClose(cosine, Math.cos((quarter * Math.PI) / 2), tolerance);
      expectClose(sine, Math.sin((quarter * Math.PI) / 2), tolerance);
    }
    expect(turn(0)).toEqual([1, 0]);
    expect(turn(Number.NaN)).toEqual([Number.NaN, Number.NaN]);
    expect(turn(Number.POSITIVE_INFINITY)).toEqual([Number.NaN, Number.NaN]);
  });
});
