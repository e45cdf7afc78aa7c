/** The plain 2x2 route is a yardstick for others, so it is held to closed forms (Born and Wolf, sections 1.5 and 1.6). */
import { describe, expect, it } from "vitest";
import { plainReflectance } from "./characteristic-matrix.ts";

// Rounding of a few dozen operations on numbers near 1.
const ROUNDING = 1e-13;

describe("the plain 2x2 route", () => {
  it("gives ((n0 - ns)/(n0 + ns))^2 for a bare interface at normal incidence, with absorption as |.|^2", () => {
    expect(Math.abs(plainReflectance(600, 0, 1, [], { n: 3.4, k: 0 }, "s") - (2.4 / 4.4) ** 2)).toBeLessThan(ROUNDING);
    const absorbing = (2 ** 2 + 3 ** 2) / (4 ** 2 + 3 ** 2);
    expect(Math.abs(plainReflectance(600, 0, 1, [], { n: 3, k: 3 }, "p") - absorbing)).toBeLessThan(ROUNDING);
  });

  it("gives ((n0 ns - n1^2)/(n0 ns + n1^2))^2 for a quarter wave, and the bare interface for a half wave", () => {
    const film = (thicknessNm: number) => [{ n: 2, k: 0, thicknessNm }];
    const quarter = ((3.9 - 4) / (3.9 + 4)) ** 2;
    expect(Math.abs(plainReflectance(600, 0, 1, film(75), { n: 3.9, k: 0 }, "s") - quarter)).toBeLessThan(ROUNDING);
    const bare = (2.9 / 4.9) ** 2;
    expect(Math.abs(plainReflectance(600, 0, 1, film(150), { n: 3.9, k: 0 }, "p") - bare)).toBeLessThan(ROUNDING);
  });

  it("reflects no p light at Brewster's angle and everything beyond the critical one", () => {
    expect(plainReflectance(600, Math.atan(1.5), 1, [], { n: 1.5, k: 0 }, "p")).toBeLessThan(ROUNDING);
    const beyond = Math.asin(1 / 1.5) + 0.1;
    expect(Math.abs(plainReflectance(600, beyond, 1.5, [], { n: 1, k: 0 }, "s") - 1)).toBeLessThan(ROUNDING);
  });

  it("reflects less of a film the more it absorbs on the way, down to the film's own front when it is thick", () => {
    const thick = [{ n: 2, k: 0.5, thicknessNm: 5000 }];
    const front = ((1 - 2) ** 2 + 0.25) / ((1 + 2) ** 2 + 0.25);
    expect(Math.abs(plainReflectance(600, 0, 1, thick, { n: 3.9, k: 0 }, "s") - front)).toBeLessThan(1e-9);
  });
});
