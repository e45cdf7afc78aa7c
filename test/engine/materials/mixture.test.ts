import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  bruggeman,
  bruggemanByIteration,
  constantMaterial,
  type Dielectric,
  dielectricOf,
  indexFrom,
  materialByName,
  mixtureMaterial,
  tabulated,
} from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

/** Films and metals: n 0.05 to 5, k 0 to 10. */
const component = fc
  .record({
    n: fc.double({ min: 0.05, max: 5, noNaN: true }),
    k: fc.oneof(fc.constant(0), fc.double({ min: 1e-6, max: 10, noNaN: true })),
  })
  .map(dielectricOf);
const share = fc.double({ min: 0.001, max: 0.999, noNaN: true });

/** |sum f (e - eps) / (e + 2 eps)| with the complex division written out. */
function imbalance(components: readonly Dielectric[], shares: readonly number[], eps: Dielectric): number {
  let [re, im] = [0, 0];
  components.forEach((e, i) => {
    const top = [e.eps1 - eps.eps1, -(e.eps2 - eps.eps2)];
    const bottom = [e.eps1 + 2 * eps.eps1, -(e.eps2 + 2 * eps.eps2)];
    const square = bottom[0] ** 2 + bottom[1] ** 2;
    re += (shares[i] * (top[0] * bottom[0] + top[1] * bottom[1])) / square;
    im += (shares[i] * (top[1] * bottom[0] - top[0] * bottom[1])) / square;
  });
  return Math.hypot(re, im);
}

const apart = (a: Dielectric, b: Dielectric): number =>
  Math.hypot(a.eps1 - b.eps1, a.eps2 - b.eps2) / Math.hypot(b.eps1, b.eps2);

describe("an effective medium", () => {
  test("satisfies its defining equation and absorbs or is clear, never amplifies", () => {
    fc.assert(
      fc.property(component, component, component, share, share, (a, b, c, f, g) => {
        const two = bruggeman([a, b], [f, 1 - f]);
        expect(imbalance([a, b], [f, 1 - f], two)).toBeLessThan(1e-12);
        expect(two.eps2).toBeGreaterThanOrEqual(0);
        const shares = [f * g, f * (1 - g), 1 - f];
        const three = bruggeman([a, b, c], shares);
        expect(imbalance([a, b, c], shares, three)).toBeLessThan(1e-12);
        expect(three.eps2).toBeGreaterThanOrEqual(0);
      }),
      { numRuns: 500 },
    );
  });

  test("is the same by the closed form for two and by the solver for many", () => {
    fc.assert(
      fc.property(component, component, share, (a, b, f) => {
        const closed = bruggeman([a, b], [f, 1 - f]);
        expect(apart(bruggemanByIteration([a, b], [f, 1 - f]), closed)).toBeLessThan(1e-10);
        // a component cut in two is the same mixture
        expect(apart(bruggeman([a, b, b], [f, (1 - f) / 3, (2 * (1 - f)) / 3]), closed)).toBeLessThan(1e-10);
      }),
      { numRuns: 500 },
    );
  });

  test("does not depend on the order of its components", () => {
    fc.assert(
      fc.property(component, component, component, share, share, (a, b, c, f, g) => {
        const order = bruggeman([a, b, c], [f * g, f * (1 - g), 1 - f]);
        const other = bruggeman([c, a, b], [1 - f, f * g, f * (1 - g)]);
        expect(apart(other, order)).toBeLessThan(1e-10);
        expect(apart(bruggeman([b, a], [1 - f, f]), bruggeman([a, b], [f, 1 - f]))).toBeLessThan(1e-12);
      }),
    );
  });

  test("is a component at its share of 1, and moves from one to the other without a jump", () => {
    fc.assert(
      fc.property(component, component, (a, b) => {
        expect(bruggeman([a, b], [1, 0])).toEqual(a);
        expect(bruggeman([a, b], [0, 1])).toEqual(b);
        const path = Array.from({ length: 2001 }, (_, i) => bruggeman([a, b], [1 - i / 2000, i / 2000]));
        const whole = Math.hypot(a.eps1 - b.eps1, a.eps2 - b.eps2);
        for (let i = 1; i < path.length; i++) {
          const step = Math.hypot(path[i].eps1 - path[i - 1].eps1, path[i].eps2 - path[i - 1].eps2);
          // The steepest course is a square root where a nearly lossless metal percolates: sqrt(1/2000) of the whole.
          if (step > 0.05 * (whole + Math.hypot(a.eps1, a.eps2))) throw new Error(`step ${step} of ${whole} at ${i}`);
        }
      }),
      { numRuns: 40 },
    );
  });

  test("refuses shares that are none", () => {
    const e = { eps1: 2, eps2: 0 };
    expect(refusalCode(() => bruggeman([e, e], [0.5, 0.4]))).toBe("mixture-shares");
    expect(refusalCode(() => bruggeman([e, e], [1.5, -0.5]))).toBe("mixture-shares");
    expect(refusalCode(() => bruggeman([e, e], [1]))).toBe("bad-mixture");
    expect(refusalCode(() => bruggeman([], []))).toBe("bad-mixture");
    expect(refusalCode(() => bruggeman([e, e], [Number.NaN, 1]))).toBe("not-a-number");
  });
});

describe("a mixture as a material", () => {
  const silica = materialByName("silica");
  const silicon = materialByName("amorphous silicon");

  test("names its components, their shares and their sources, and is known where all are", () => {
    const film = mixtureMaterial([
      { material: silica, share: 0.3 },
      { material: silicon, share: 0.7 },
    ]);
    expect(film.name).toBe("mixture of silica 30 %, amorphous silicon 70 %");
    expect(film.source).toContain("Bruggeman");
    expect(film.source).toContain("Malitson");
    expect(film.source).toContain("Pierce");
    expect(film.rangeNm).toEqual([
      Math.max(silica.rangeNm[0], silicon.rangeNm[0]),
      Math.min(silica.rangeNm[1], silicon.rangeNm[1]),
    ]);
    const { n, k } = film.at(500);
    expect(n).toBeGreaterThan(silica.at(500).n);
    expect(n).toBeLessThan(silicon.at(500).n);
    expect(k).toBeGreaterThan(0);
    expect(k).toBeLessThan(silicon.at(500).k);
    expect(refusalCode(() => film.at(200))).toBe("outside-table");
  });

  test("of equal components is that component", () => {
    const film = mixtureMaterial([
      { material: constantMaterial(2.05, 0.01), share: 0.25 },
      { material: constantMaterial(2.05, 0.01), share: 0.75 },
    ]);
    expectClose(film.at(600).n, 2.05, { relative: 1e-14, because: "rounding" });
    expectClose(film.at(600).k, 0.01, { relative: 1e-12, because: "rounding" });
  });

  test("refuses components that are known at no common wavelength", () => {
    const table = (from: number) =>
      tabulated({
        name: "t",
        source: "test",
        rows: [
          [from, 2, 0],
          [from + 100, 2, 0],
        ],
      });
    const parts = [300, 500].map((from) => ({ material: table(from), share: 0.5 }));
    expect(refusalCode(() => mixtureMaterial(parts))).toBe("mixture-range");
  });
});

describe("n and k from a dielectric function", () => {
  test("come back as they went in, however small one of them is", () => {
    const any = fc.double({ min: 1e-9, max: 10, noNaN: true });
    fc.assert(
      fc.property(any, any, (n, k) => {
        const back = indexFrom(dielectricOf({ n, k }), "test");
        // n = k has eps1 = 0: nothing small is left to lose digits
        expectClose(back.n, n, { relative: 1e-13, because: "rounding" });
        expectClose(back.k, k, { relative: 1e-13, because: "rounding" });
      }),
    );
    expect(indexFrom({ eps1: 4, eps2: 0 }, "test")).toEqual({ n: 2, k: 0 });
  });

  test("are refused where there is no n, or light would grow", () => {
    expect(refusalCode(() => indexFrom({ eps1: -4, eps2: 0 }, "test"))).toBe("material-value");
    expect(refusalCode(() => indexFrom({ eps1: 0, eps2: 0 }, "test"))).toBe("material-value");
    expect(refusalCode(() => indexFrom({ eps1: 4, eps2: -1 }, "test"))).toBe("material-value");
    expect(refusalCode(() => indexFrom({ eps1: Number.NaN, eps2: 0 }, "test"))).toBe("material-value");
  });
});
