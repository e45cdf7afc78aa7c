/** The filter and smoother of the reference wafer equal the dense Gaussian answer, and slips are told from jumps. */
import { Matrix, solve } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { type GaugeCovariance, gaugeBias, type ReferenceGauge } from "../../calibration/index.ts";
import { gaugeDrift } from "../../calibration/priors.ts";
import { type Day, forwards } from "../../calibration/reference-filter.ts";
import { smoothed } from "../../calibration/reference-walk.ts";
import { random } from "../../engine/index.ts";

const gauge: ReferenceGauge = {
  repeatability: [0.002 ** 2, 0.6 * 0.002 * 0.3, 0.3 ** 2],
  dayToDay: [0.001 ** 2, 0, 0.2 ** 2],
  certified: { index: null, thicknessNm: null },
};
const certified: ReferenceGauge = {
  ...gauge,
  certified: { index: { value: 2.045, sd: 0.001 }, thicknessNm: { value: 85, sd: 0.15 } },
};
const noise: GaugeCovariance = [5e-6, 2e-4, 0.13];

/** Some days apart by turns, one of them without a thickness. */
const days: Day[] = [0, 3, 4, 11, 30].map((day, i) => ({
  day,
  members: [i],
  value: [2.045 + 0.001 * i, 85 - 0.1 * i * i],
  seen: [true, i !== 2],
  noise,
}));

/**
 * The same question answered at once: unknowns r_n, r_d and b_n, b_d at every day asked or read; prior covariance written out
 * (var r, var b0, and of the wandering t <= u: s^2 T^2 (2t/T - 1 + e^(-t/T) + e^(-u/T) - e^(-(u-t)/T)),
 * the covariance of the integral of an Ornstein-Uhlenbeck process that was at rest with itself at 0), observations conditioned on by solving one linear system (textbook multivariate normal).
 */
function dense(given: ReferenceGauge, pace: readonly [number, number], asked: number) {
  const T = gaugeDrift.memoryDays;
  const wandered = (t: number, u: number) =>
    T ** 2 * ((2 * t) / T - 1 + Math.exp(-t / T) + Math.exp(-u / T) - Math.exp(-(u - t) / T));
  const times = [...new Set([...days.map((d) => d.day), asked])].sort((a, b) => a - b);
  const size = 2 + 2 * times.length;
  const prior = Matrix.zeros(size, size);
  const mean = Matrix.zeros(size, 1);
  for (const p of [0, 1]) {
    const known = p === 0 ? given.certified.index : given.certified.thicknessNm;
    prior.set(p, p, known ? known.sd ** 2 : (3 * gaugeDrift.farOff[p]) ** 2);
    mean.set(p, 0, known?.value ?? days[0].value[p]);
    const b0 = known ? gaugeDrift.start[p] ** 2 : 0;
    times.forEach((t, i) => {
      times.forEach((u, j) => {
        prior.set(2 + 2 * i + p, 2 + 2 * j + p, b0 + pace[p] ** 2 * wandered(Math.min(t, u), Math.max(t, u)));
      });
    });
  }
  const seen = days.flatMap((d, i) => [0, 1].filter((p) => d.seen[p]).map((p) => ({ d, p, i })));
  const H = Matrix.zeros(seen.length, size);
  const y = Matrix.zeros(seen.length, 1);
  const R = Matrix.zeros(seen.length, seen.length);
  seen.forEach(({ d, p, i }, row) => {
    H.set(row, p, 1);
    H.set(row, 2 + 2 * times.indexOf(d.day) + p, 1);
    y.set(row, 0, d.value[p]);
    seen.forEach((other, column) => {
      if (other.i === i) R.set(row, column, p !== other.p ? d.noise[1] : d.noise[p === 0 ? 0 : 2]);
    });
  });
  const S = H.mmul(prior).mmul(H.transpose()).add(R);
  const gain = solve(S, H.mmul(prior)).transpose();
  const posterior = Matrix.add(mean, gain.mmul(Matrix.sub(y, H.mmul(mean))));
  const covariance = Matrix.sub(prior, gain.mmul(H).mmul(prior));
  const at = 2 + 2 * times.indexOf(asked);
  return {
    index: posterior.get(at, 0),
    thicknessNm: posterior.get(at + 1, 0),
    covariance: [covariance.get(at, at), covariance.get(at, at + 1), covariance.get(at + 1, at + 1)],
  };
}

describe("the reference filter", () => {
  const pace: [number, number] = [0.0002, 0.02];
  for (const [name, given] of [
    ["an uncertified", gauge],
    ["a certified", certified],
  ] as const)
    it(`of ${name} wafer says what the dense multivariate normal says, on days read, between and beyond`, () => {
      const { steps, doubted } = forwards(days, given, pace, new Set());
      expect(doubted).toEqual([]);
      const at = smoothed(steps, pace);
      for (const asked of [0, 1, 3, 4, 7, 11, 20, 30, 33]) {
        const mine = at(asked);
        const want = dense(given, pace, asked);
        // Rounding of a 12-row solve with a prior 1e5 times wider than the noise: about 1e-9 of a nanometre.
        expect(mine.index).toBeCloseTo(want.index, 9);
        expect(mine.thicknessNm).toBeCloseTo(want.thicknessNm, 7);
        mine.covariance.forEach((v, i) => {
          expect(Math.abs(v - want.covariance[i])).toBeLessThan(1e-6 * noise[i === 1 ? 2 : i]);
        });
      }
    });
});

/** Readings every `every` days of a gauge whose bias is `bias(day)`. */
function played(seed: string, count: number, every: number, bias: (day: number) => number) {
  const source = random(seed);
  return Array.from({ length: count }, (_, i) => ({
    day: i * every + 0.4,
    index: 2.045 + bias(i * every) + 0.002 * source.normal(),
    thicknessNm: 85 + 0.3 * source.normal(),
  }));
}

describe("the bias of a gauge", () => {
  it("is followed through a drift of 0.01 in 60 days, within 0.003 at any day", () => {
    const drift = (day: number) => (0.01 * day) / 60;
    const bias = gaugeBias(played("drift", 13, 5, drift), gauge);
    for (let day = 0; day <= 60; day += 4)
      expect(Math.abs((bias?.at(day).index ?? 1) - drift(day))).toBeLessThan(0.003);
  });

  it("holds its standard deviation's word: 95 % of errors inside 1.96 of them, over gauges drawn from the prior", () => {
    let inside = 0;
    let asked = 0;
    for (let n = 0; n < 150; n++) {
      const source = random(`walk ${n}`);
      const { pacePerDay, memoryDays } = gaugeDrift;
      const kept = Math.exp(-1 / memoryDays);
      let pace = pacePerDay[0] * source.normal();
      let b = 0;
      const truth = [0];
      for (let day = 1; day <= 80; day++) {
        b += pace;
        pace = kept * pace + pacePerDay[0] * Math.sqrt(1 - kept ** 2) * source.normal();
        truth.push(b);
      }
      const bias = gaugeBias(
        played(`read ${n}`, 12, 7, (day) => truth[day]),
        { ...gauge, dayToDay: [0, 0, 0] },
      );
      for (const day of [10, 33, 60, 77]) {
        const { index, covariance } = bias?.at(day) ?? { index: 9, covariance: [0] };
        asked++;
        if (Math.abs(index - truth[day]) < 1.96 * Math.sqrt(covariance[0])) inside++;
      }
    }
    // 600 answers, four of a history: sd of the share about 0.012, and three speeds are tried where one is right.
    expect(inside / asked).toBeGreaterThan(0.91);
    expect(inside / asked).toBeLessThan(0.99);
  });

  it("of a gauge that stands still is nothing, known better than one reading tells", () => {
    const many = gaugeBias(
      played("still", 40, 5, () => 0),
      gauge,
    );
    const { index, covariance } = many?.at(195) ?? { index: 9, covariance: [9] };
    expect(Math.abs(index)).toBeLessThan(2 * Math.sqrt(covariance[0]));
    // 0.002 of the gauge and 0.001 of the day
    expect(Math.sqrt(covariance[0])).toBeLessThan(Math.hypot(0.002, 0.001));
  });

  it("is measured from certified values where there are some, from the first readings otherwise", () => {
    const readings = played("offset", 10, 5, () => 0.008);
    expect(gaugeBias(readings, certified)?.at(30).index).toBeCloseTo(0.008, 2.5);
    expect(Math.abs(gaugeBias(readings, gauge)?.at(30).index ?? 1)).toBeLessThan(0.003);
  });

  it("leaves a slip aside, and follows a jump that the next reading confirms", () => {
    const slip = played("slip", 10, 5, () => 0).map((r, i) => (i === 5 ? { ...r, index: r.index + 0.04 } : r));
    const slipped = gaugeBias(slip, gauge);
    expect(slipped?.doubted).toEqual([5]);
    expect(Math.abs(slipped?.at(27).index ?? 1)).toBeLessThan(0.003);
    const jumped = gaugeBias(
      played("jump", 10, 5, (day) => (day >= 25 ? 0.04 : 0)),
      gauge,
    );
    expect(jumped?.doubted).toEqual([]);
    expect(jumped?.at(45).index).toBeCloseTo(0.04, 2);
    expect(Math.abs(jumped?.at(19).index ?? 1)).toBeLessThan(0.003);
    expect(
      gaugeBias(
        played("jump", 10, 5, (day) => (day >= 45 ? 0.04 : 0)),
        gauge,
      )?.doubted,
    ).toEqual([9]);
  });

  it("does not take another wafer for itself, even as the first reading", () => {
    const readings = played("wafer", 6, 5, () => 0).map((r, i) => (i === 0 ? { ...r, index: 1.46 } : r));
    const bias = gaugeBias(readings, gauge);
    expect(bias?.doubted).toEqual([0]);
    expect(Math.abs(bias?.at(25).index ?? 1)).toBeLessThan(0.003);
  });

  it("is zero without doubt in a property nobody read, and unknown without any reading", () => {
    const bias = gaugeBias([{ day: 3, index: 2.04, thicknessNm: null }], certified);
    expect(bias?.at(40)).toMatchObject({ thicknessNm: 0 });
    expect(bias?.at(40).covariance.slice(1)).toEqual([0, 0]);
    expect(gaugeBias([], gauge)).toBe(null);
    expect(() => gaugeBias([{ day: Number.NaN, index: 2, thicknessNm: null }], gauge)).toThrow("NaN");
  });

  it("grows no vaguer than a gauge is feared to be, however long nobody read its reference", () => {
    const readings = played("long", 5, 5, () => 0);
    const sd = (day: number) => Math.sqrt(gaugeBias(readings, gauge)?.at(day).covariance[0] ?? 9);
    expect(sd(25)).toBeLessThan(sd(60));
    // 0.006 of what is feared at most, beside what was known on the last day and how the paces tried differ.
    expect(sd(5000)).toBeLessThan(0.01);
    expect(sd(5000) / sd(1000)).toBeCloseTo(1, 6);
  });

  it("counts readings of one day as one day: its own part does not average away", () => {
    const many = Array.from({ length: 50 }, (_, i) => ({ day: 0.2 + i / 100, index: 2.05, thicknessNm: null }));
    const sd = Math.sqrt(gaugeBias(many, { ...certified, dayToDay: [0.004 ** 2, 0, 0] })?.at(0).covariance[0] ?? 0);
    expect(sd).toBeGreaterThan(0.0038);
  });
});
