/**
 * The square-root filter beside the dense Gaussian answer: the same model written as one big multivariate normal and
 * conditioned in one go (textbook conditioning, solved with the general-purpose library ml-matrix). Tolerance 1e-10
 * relative: both routes are backward stable and the systems are small, so more than that means a wrong formula.
 */
import { CholeskyDecomposition, determinant, inverse, Matrix, solve } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { observe } from "../../calibration/hypotheses.ts";
import { hypothesisWeights, scatter } from "../../calibration/priors.ts";
import { drawChamber, hearSister, type Law } from "../../calibration/sisters.ts";
import {
  addNoise,
  copyState,
  covariance,
  diagonalState,
  resetLast,
  type State,
  updateScalar,
} from "../../calibration/square-root.ts";
import { logGamma, random } from "../../engine/index.ts";

const rng = random("filter-is-dense");
const tolerance = 1e-10;

interface Dense {
  mean: Matrix;
  cov: Matrix;
}

const denseOf = (s: State): Dense => ({
  mean: Matrix.columnVector(Array.from(s.mean)),
  cov: Matrix.from1DArray(s.n, s.n, Array.from(covariance(s))),
});

/** Conditions a dense Gaussian on y = H z + noise; returns the posterior and ln N(y). */
function condition(d: Dense, H: Matrix, R: Matrix, y: Matrix): Dense & { logN: number } {
  const raw = H.mmul(d.cov).mmul(H.transpose()).add(R);
  const S = Matrix.add(raw, raw.transpose()).mul(0.5); // the oracle wants exact symmetry
  const e = Matrix.sub(y, H.mmul(d.mean));
  const PHt = d.cov.mmul(H.transpose());
  const mean = Matrix.add(d.mean, PHt.mmul(solve(S, e)));
  const cov = Matrix.sub(d.cov, PHt.mmul(solve(S, PHt.transpose())));
  const L = new CholeskyDecomposition(S).lowerTriangularMatrix;
  let logDet = 0;
  for (let i = 0; i < S.rows; i++) logDet += 2 * Math.log(L.get(i, i));
  const q = e.transpose().mmul(solve(S, e)).get(0, 0);
  return { mean, cov, logN: -0.5 * (S.rows * Math.log(2 * Math.PI) + logDet + q) };
}

function expectSame(state: State, dense: Dense): void {
  const P = covariance(state);
  const scale = dense.cov.diag().map(Math.sqrt);
  for (let i = 0; i < state.n; i++) {
    expect(Math.abs(state.mean[i] - dense.mean.get(i, 0))).toBeLessThan(tolerance * Math.max(1, scale[i]));
    for (let j = 0; j < state.n; j++)
      expect(Math.abs(P[i * state.n + j] - dense.cov.get(i, j))).toBeLessThan(tolerance * scale[i] * scale[j] + 1e-16);
  }
}

const row = (n: number) => Float64Array.from({ length: n }, () => rng.normal());

describe("the square-root filter equals the dense Gaussian answer", () => {
  it("through updates, walks and a reset at a clean, for mean, covariance and likelihood", () => {
    const n = 9;
    const state = diagonalState(
      row(n),
      Float64Array.from({ length: n }, () => 0.2 + rng.uniform()),
    );
    let dense: Dense = denseOf(state);
    let logFilter = 0;
    let logDense = 0;
    for (let t = 0; t < 30; t++) {
      addNoise(state, n - 2, 0.1);
      addNoise(state, n - 1, 0.2);
      dense.cov.set(n - 2, n - 2, dense.cov.get(n - 2, n - 2) + 0.01);
      dense.cov.set(n - 1, n - 1, dense.cov.get(n - 1, n - 1) + 0.04);
      if (t % 11 === 10) {
        resetLast(state, [
          { mean: 0, sd: 0.7 },
          { mean: 0, sd: 0.4 },
        ]);
        for (const [i, sd] of [
          [n - 2, 0.7],
          [n - 1, 0.4],
        ]) {
          for (let j = 0; j < n; j++) {
            dense.cov.set(i, j, 0);
            dense.cov.set(j, i, 0);
          }
          dense.cov.set(i, i, sd * sd);
          dense.mean.set(i, 0, 0);
        }
      }
      const h = row(n);
      const y = rng.normal();
      const r = 0.05 + rng.uniform();
      logFilter += updateScalar(state, h, y, r);
      const next = condition(dense, Matrix.rowVector(Array.from(h)), new Matrix([[r]]), new Matrix([[y]]));
      logDense += next.logN;
      dense = { mean: next.mean, cov: next.cov };
    }
    expectSame(state, dense);
    expect(Math.abs(logFilter - logDense)).toBeLessThan(tolerance * Math.abs(logDense));
  });

  it("adds noise in the middle of the state as a dense matrix would", () => {
    const n = 5;
    const state = diagonalState(row(n), new Float64Array(n).fill(1));
    for (let t = 0; t < 4; t++) updateScalar(state, row(n), rng.normal(), 0.3);
    const dense = denseOf(state);
    addNoise(state, 1, 0.6);
    dense.cov.set(1, 1, dense.cov.get(1, 1) + 0.36);
    expectSame(state, dense);
  });
});

describe("merging the three hypotheses of a run keeps the mixture's mean and covariance", () => {
  for (const outputs of [[0, 1], [0], [1]] as (0 | 1)[][]) {
    it(`for output ${outputs.join(" and ")}, beside the mixture formed densely`, () => {
      const n = 7;
      const m = outputs.length;
      const state = diagonalState(
        new Float64Array(n),
        Float64Array.from({ length: n }, () => 0.01 + 0.02 * rng.uniform()),
      );
      for (let t = 0; t < 5; t++) updateScalar(state, row(n), 0, 0.001);
      const rows = outputs.map((o) => {
        const h = row(n);
        h[n - 2] = o === 0 ? 1 : 0;
        h[n - 1] = o === 1 ? 1 : 0;
        return h;
      });
      const noise = m === 1 ? [2e-5] : [2e-5, -5e-6, -5e-6, 4e-5];
      const values = outputs.map(() => 0.06);
      const step: [number, number] = [6e-5, 3e-4];
      const before = denseOf(state);
      const H = new Matrix(rows.map((h) => Array.from(h)));
      const parts = [0, 1, 2].map((hyp) => {
        const cov = before.cov.clone();
        const R = Matrix.from1DArray(m, m, noise);
        outputs.forEach((o, i) => {
          if (hyp === 1) R.set(i, i, R.get(i, i) + scatter.badMeasurement[o] ** 2);
        });
        if (hyp === 2) for (const o of [0, 1]) cov.set(n - 2 + o, n - 2 + o, cov.get(n - 2 + o, n - 2 + o) + step[o]);
        const posterior = condition({ mean: before.mean, cov }, H, R, Matrix.columnVector(values));
        if (hyp !== 1) return posterior;
        // A bad reading teaches nothing, and its density is Student's t with 4 degrees of freedom (its textbook form).
        const S = H.mmul(cov).mmul(H.transpose()).add(R);
        const e = Matrix.sub(Matrix.columnVector(values), H.mmul(before.mean));
        const q = e.transpose().mmul(inverse(S)).mmul(e).get(0, 0);
        const logT =
          logGamma((4 + m) / 2) -
          logGamma(2) -
          0.5 * m * Math.log(4 * Math.PI) -
          0.5 * Math.log(determinant(S)) -
          0.5 * (4 + m) * Math.log(1 + q / 4);
        return { mean: before.mean, cov: before.cov, logN: logT };
      });
      const weights = parts.map((p, h) => hypothesisWeights[h] * Math.exp(p.logN));
      const total = weights.reduce((a, b) => a + b, 0);
      const verdict = observe(state, { rows, values, noise, outputs }, step);
      expect(verdict.weights[0]).toBeLessThan(0.98);
      verdict.weights.forEach((w, h) => {
        expect(Math.abs(w - weights[h] / total)).toBeLessThan(1e-10);
      });
      expect(Math.abs(verdict.logDensity - Math.log(total))).toBeLessThan(1e-10 * Math.abs(Math.log(total)) + 1e-12);
      const mean = Matrix.zeros(n, 1);
      parts.forEach((p, h) => {
        mean.add(Matrix.mul(p.mean, weights[h] / total));
      });
      const cov = Matrix.zeros(n, n);
      parts.forEach((p, h) => {
        const d = Matrix.sub(p.mean, mean);
        cov.add(Matrix.mul(Matrix.add(p.cov, d.mmul(d.transpose())), weights[h] / total));
      });
      expectSame(state, { mean, cov });
    });
  }
});

describe("what sisters teach equals filtering all chambers at once", () => {
  it("for the fleet's law and for the evidence", () => {
    const p = 4;
    const fleet: Law = { p, mean: row(p), covariance: new Float64Array(p * p) };
    for (let i = 0; i < p; i++) fleet.covariance[i * p + i] = 0.5 + rng.uniform();
    const spread = Float64Array.from({ length: p }, () => 0.1 + 0.3 * rng.uniform());
    const generic = drawChamber(fleet, spread);
    const logs = [3, 6, 1].map((runs) =>
      Array.from({ length: runs }, () => ({ h: row(p), y: rng.normal(), r: 0.2 + rng.uniform() })),
    );
    // Route A: sister by sister.
    let heard = fleet;
    let logA = 0;
    for (const log of logs) {
      const state: State = diagonalState(
        generic.mean,
        Float64Array.from({ length: p }, (_, i) => Math.sqrt(generic.covariance[i * p + i])),
      );
      let logDensity = 0;
      for (const run of log) logDensity += updateScalar(state, run.h, run.y, run.r);
      const step = hearSister(heard, spread, {
        generic,
        posterior: { p, mean: copyState(state).mean, covariance: covariance(state) },
        logDensity,
      });
      heard = step.fleet;
      logA += step.logDensity;
    }
    // Route B: one Gaussian over [g, dev_1, dev_2, dev_3], conditioned on every reading at once.
    const size = p * (1 + logs.length);
    const mean = Matrix.zeros(size, 1);
    const cov = Matrix.zeros(size, size);
    for (let i = 0; i < p; i++) {
      mean.set(i, 0, fleet.mean[i]);
      cov.set(i, i, fleet.covariance[i * p + i]);
      logs.forEach((_, c) => {
        cov.set(p * (1 + c) + i, p * (1 + c) + i, spread[i]);
      });
    }
    const flat = logs.flatMap((log, c) => log.map((run) => ({ c, ...run })));
    const H = Matrix.zeros(flat.length, size);
    flat.forEach((run, t) => {
      for (let i = 0; i < p; i++) {
        H.set(t, i, run.h[i]);
        H.set(t, p * (1 + run.c) + i, run.h[i]);
      }
    });
    const all = condition(
      { mean, cov },
      H,
      Matrix.diag(flat.map((run) => run.r)),
      Matrix.columnVector(flat.map((run) => run.y)),
    );
    expect(Math.abs(logA - all.logN)).toBeLessThan(tolerance * Math.abs(all.logN));
    for (let i = 0; i < p; i++) {
      expect(Math.abs(heard.mean[i] - all.mean.get(i, 0))).toBeLessThan(tolerance);
      for (let j = 0; j < p; j++)
        expect(Math.abs(heard.covariance[i * p + j] - all.cov.get(i, j))).toBeLessThan(tolerance);
    }
  });
});
