/** The views ahead agree with the model's own predictions where both speak. */
import { describe, expect, it } from "vitest";
import { beliefOf, beliefRows, coursesOf, filmMoments } from "../../calibration/index.ts";
import { random } from "../../engine/index.ts";
import { levers, scattered, virtualLine } from "./virtual-line.ts";

const line = virtualLine("ahead", [
  { name: "A", runs: 30 },
  { name: "B", runs: 12 },
]);
const model = line.model().chamber("A");
const settings = new Map([...line.world.start]);
const elsewhere = new Map([...scattered(line.world, random("elsewhere"), 0.05)]);
// Nobody moved the power, so its effect stands at the prior beside what was learned.
elsewhere.set("power", (settings.get("power") as number) * 1.06);

const along = (p: Float64Array, n: number, a: Float64Array, b: Float64Array) => {
  let sum = 0;
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) sum += a[i] * b[j] * p[i * n + j];
  return sum;
};

describe("a chamber looked at ahead", () => {
  it("is believed to lay the film the model predicts, moved and never moved settings alike", () => {
    expect(levers.map((l) => l.setting)).toContain("power");
    const belief = beliefOf(model);
    for (const s of [settings, elsewhere]) {
      const { index, lnThickness, known } = beliefRows(model, s, model.k);
      const quick = model.quick(s);
      const { n, mean, covariance, walk, process } = belief;
      const dot = (h: Float64Array) => h.reduce((sum, v, i) => sum + v * mean[i], 0);
      expect(dot(index)).toBeCloseTo(quick.index, 10);
      expect(dot(lnThickness) + known).toBeCloseTo(quick.lnThickness, 10);
      // The model's state has already walked to the next deposition; the belief has not.
      expect(along(covariance, n, index, index) + walk[0] + process[0]).toBeCloseTo(quick.covariance[0], 12);
      expect(along(covariance, n, index, lnThickness)).toBeCloseTo(quick.covariance[1], 12);
      expect(along(covariance, n, lnThickness, lnThickness) + walk[1] + process[1]).toBeCloseTo(
        quick.covariance[2],
        12,
      );
    }
  });

  it("takes a course whose next deposition has the moments of the prediction, scatter and unlogged steps left out", () => {
    const { courses, regressors } = coursesOf(model, elsewhere);
    const { index, lnThickness } = regressors(1);
    const parts = courses.map(({ weight, size, mean, factor, walk }) => {
      const p = new Float64Array(size * size);
      for (let i = 0; i < size; i++)
        for (let j = 0; j < size; j++)
          for (let k = 0; k <= Math.min(i, j); k++) p[i * size + j] += factor[i * size + k] * factor[j * size + k];
      const [a, b] = [new Float64Array(size), new Float64Array(size)];
      a.set(index);
      b.set(lnThickness, index.length);
      const dot = (h: Float64Array) => h.reduce((sum, v, i) => sum + v * mean[i], 0);
      return {
        weight,
        index: dot(a),
        lnThickness: dot(b),
        covariance: [
          along(p, size, a, a) + walk[0] ** 2 + model.processScatter[0],
          along(p, size, a, b),
          along(p, size, b, b) + walk[1] ** 2 + model.processScatter[1],
        ] as const,
      };
    });
    const { index: n, lnThickness: d, covariance } = filmMoments({ parts });
    const quick = model.quick(elsewhere);
    // Nodes under 1e-6 of the weight are left out of a course.
    expect(n).toBeCloseTo(quick.index, 5);
    expect(d).toBeCloseTo(quick.lnThickness, 5);
    // The idle terms' spread is each node's own here and the standard one there: a few per cent of a part of the variance.
    expect(covariance[0] / quick.covariance[0]).toBeCloseTo(1, 1);
    expect(covariance[2] / quick.covariance[2]).toBeCloseTo(1, 1);
  });

  it("drifts by the drift the model has learned", () => {
    const { courses, regressors } = coursesOf(model, settings);
    const far = regressors(101).index;
    const near = regressors(1).index;
    const gained = courses.reduce(
      (sum, { weight, mean }) => sum + weight * far.reduce((s, v, i) => s + (v - near[i]) * mean[i], 0),
      0,
    );
    const of = (name: string) =>
      model.coefficients().find((c) => c.term.name === name && c.term.output === "index")?.mean ?? Number.NaN;
    const dies = Math.exp(-(model.k + 100) / 4) - Math.exp(-model.k / 4);
    expect(gained).toBeCloseTo(100 * of("drift") + dies * of("transient"), 6);
  });
});
