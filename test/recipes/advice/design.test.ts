/** The search for the runs that teach most, against trying everything and against the dense answer. */
import { inverse, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { random } from "../../../engine/index.ts";
import { addMoments, design, meanVariance, readProbe, whitened } from "../../../recipes/advice/design.ts";

const source = random("design");
const vector = (n: number) => Float64Array.from({ length: n }, () => source.normal());

function covarianceOf(n: number): Float64Array {
  const p = new Float64Array(n * n);
  for (let i = 0; i < n + 2; i++) addMoments(p, n, vector(n), 1);
  return p;
}

/** A small problem: nine candidates of two correlated readings each, a walk between runs, a region of ten rows. */
function problem(n: number, runs: number) {
  const noise = [0.3, 0.1, 0.4] as const;
  const candidates = Array.from({ length: 9 }, () => whitened(vector(n), vector(n), noise));
  const region = new Float64Array(n * n);
  for (let i = 0; i < 10; i++) addMoments(region, n, vector(n), 0.1);
  return {
    n,
    covariance: covarianceOf(n),
    candidates: candidates.length,
    runs,
    probe: (c: number) => candidates[c],
    region,
    walk: [{ state: n - 1, variance: 0.05 }],
  };
}

function everything(q: ReturnType<typeof problem>): number {
  let best = Number.POSITIVE_INFINITY;
  const visit = (p: Float64Array, at: number): void => {
    if (at === q.runs) {
      best = Math.min(best, meanVariance(q.region, p));
      return;
    }
    for (let c = 0; c < q.candidates; c++) {
      const next = p.slice();
      if (at > 0) for (const { state, variance } of q.walk) next[state * (q.n + 1)] += variance;
      readProbe(next, q.n, q.probe(c));
      visit(next, at + 1);
    }
  };
  visit(q.covariance, 0);
  return best;
}

describe("the search for runs", () => {
  it("finds the best of all 729 plans of three runs from nine candidates, or one within 2 % of it", () => {
    let exact = 0;
    for (let i = 0; i < 40; i++) {
      const q = problem(5, 3);
      const found = design(q).criterion[3];
      const best = everything(q);
      // Exchanges may stop at a plan that no single exchange betters: theory promises no more. The worst here is 1.007.
      expect(found / best).toBeLessThan(1.02);
      expect(found / best).toBeGreaterThan(1 - 1e-9);
      if (found / best < 1 + 1e-9) exact++;
    }
    // 37 of the 40 when this was written.
    expect(exact).toBeGreaterThanOrEqual(34);
  });

  it("reads a run as the dense update of the covariance does", () => {
    const n = 5;
    const p = covarianceOf(n);
    const [a, b] = [vector(n), vector(n)];
    const noise = [0.3, -0.2, 0.5] as const;
    const H = new Matrix([[...a], [...b]]);
    const P = Matrix.from1DArray(n, n, [...p]);
    const R = new Matrix([
      [noise[0], noise[1]],
      [noise[1], noise[2]],
    ]);
    const S = H.mmul(P).mmul(H.transpose()).add(R);
    const dense = Matrix.sub(P, P.mmul(H.transpose()).mmul(inverse(S)).mmul(H).mmul(P)).to1DArray();
    const gain = readProbe(p, n, whitened(a, b, noise));
    const scale = Math.max(...dense.map(Math.abs));
    for (let i = 0; i < n * n; i++) expect(Math.abs(p[i] - dense[i])).toBeLessThan(1e-12 * scale * 100);
    const det = (m: Matrix) => m.get(0, 0) * m.get(1, 1) - m.get(0, 1) * m.get(1, 0);
    expect(gain).toBeCloseTo(Math.log(det(S) / det(R)), 10);
  });

  it("puts the runs in an order in which each early part has learned most", () => {
    const q = { ...problem(5, 4), walk: [] };
    const { chosen, criterion } = design(q);
    for (const other of chosen) {
      const p = q.covariance.slice();
      readProbe(p, q.n, q.probe(other));
      expect(criterion[1]).toBeLessThanOrEqual(meanVariance(q.region, p) * (1 + 1e-12));
    }
    for (let i = 1; i < criterion.length; i++) expect(criterion[i]).toBeLessThan(criterion[i - 1]);
  });

  it("takes simpler runs where they cost no more than the slack, and none where they cost more", () => {
    const q = problem(5, 3);
    const best = design(q);
    const moves = (c: number) => (best.chosen.includes(c) ? 2 : 1);
    const loose = design({ ...q, simplicity: { moves, slack: 1e3 } });
    expect(loose.chosen.every((c) => moves(c) === 1)).toBe(true);
    const tight = design({ ...q, simplicity: { moves, slack: 1e-6 } });
    expect([...tight.chosen].sort()).toEqual([...best.chosen].sort());
    const some = design({ ...q, simplicity: { moves, slack: 0.1 } });
    expect(some.criterion[3]).toBeLessThan(best.criterion[3] * 1.1 * (1 + 1e-6));
  });
});
