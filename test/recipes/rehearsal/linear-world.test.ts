/** The linear worlds keep the laws and statistics they declare, repeat themselves by seed, and each variant is what it says. */
import { describe, expect, it } from "vitest";
import { random } from "../../../engine/index.ts";
import {
  drawLinearWorld,
  type LinearLaw,
  type LinearVariant,
  type LinearWorld,
  linearChamber,
  statedGauge,
} from "../../../recipes/rehearsal/linear-world.ts";

const mean = (values: number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
const sd = (values: number[]) => Math.sqrt(mean(values.map((value) => (value - mean(values)) ** 2)));
const times = <T>(count: number, make: (i: number) => T) => Array.from({ length: count }, (_, i) => make(i));
const draw = (seed: string, variant?: LinearVariant) => drawLinearWorld(random(seed), variant);

/** Nothing moves but the laws. */
function still(world: LinearWorld): LinearWorld {
  const none = { index: 0, lnRate: 0 };
  return { ...world, step: none, walk: none, scatter: { ...none, heavy: false }, slips: 0 };
}

const GIVEN: LinearLaw = {
  index: 2.05,
  indexPerRatio: -0.25,
  indexPerRatioSquared: 0.06,
  indexPerSilane: 0.02,
  indexDrift: 3e-4,
  lnRate: Math.log(0.65),
  ratePerRatio: -0.08,
  ratePerSilane: 0.75,
  rateDrift: -4e-4,
  ignitionS: 3,
};

describe("a linear chamber", () => {
  it("obeys its laws, worked out by hand", () => {
    const world = still(draw("laws"));
    const chamber = linearChamber(world, 1, { given: GIVEN });
    const settings = new Map([
      ["silane", 300 * 1.1],
      ["ammonia", 1800 * 1.1 * 1.2],
      ["time", 103],
    ]);
    for (let k = 0; k < 10; k++) chamber.deposit(world.reference);
    const [x, s] = [Math.log(1.2), Math.log(1.1)];
    const film = chamber.deposit(settings);
    expect(film.sinceClean).toBe(10);
    expect(film.index).toBeCloseTo(2.05 - 0.25 * x + 0.06 * x * x + 0.02 * s + 0.003, 12);
    expect(film.thicknessNm).toBeCloseTo(0.65 * Math.exp(-0.08 * x + 0.75 * s - 0.004) * 100, 10);
  });

  it("is the same by seed, however often it is measured and whatever slips", () => {
    const world = draw("seed");
    const play = (seed: number, slips: number, measures: number) => {
      const chamber = linearChamber({ ...world, slips }, seed);
      return times(30, (i) => {
        if (i === 12) chamber.clean();
        const film = chamber.deposit(world.reference);
        times(measures, () => chamber.measure(film));
        return film;
      });
    };
    expect(play(1, 0, 1)).toEqual(play(1, 0.5, 3));
    expect(play(1, 0, 1)).not.toEqual(play(2, 0, 1));
  });

  it("reads the same with slips as without, but for the readings that slipped", () => {
    const world = draw("slips");
    const [few, many] = [0, 0.3].map((slips) => linearChamber({ ...world, slips }, 4));
    let slipped = 0;
    for (let i = 0; i < 300; i++) {
      const [a, b] = [few, many].map((chamber) => chamber.measure(chamber.deposit(world.reference)));
      if (b.slip === null) expect(b).toEqual(a);
      else {
        slipped++;
        expect(Math.abs(b.index - a.index)).toBeGreaterThan(0.015 - 1e-12);
        expect(Math.abs(b.index - a.index)).toBeLessThan(0.045);
        expect(Math.abs(b.thicknessNm - a.thicknessNm)).toBeGreaterThan(2 - 1e-9);
        expect(Math.abs(b.thicknessNm - a.thicknessNm)).toBeLessThan(6);
      }
    }
    // 90 expected, binomial sd 8.
    expect(slipped).toBeGreaterThan(60);
    expect(slipped).toBeLessThan(120);
  });

  it("foretells a deposition but for its scatter, and falls by a leak until mended", () => {
    const world = still(draw("leak"));
    const chamber = linearChamber(world, 2);
    const { index, thicknessNm } = chamber.expected(world.reference);
    expect(chamber.deposit(world.reference)).toMatchObject({ index, thicknessNm });
    const before = chamber.expected(world.reference);
    chamber.leak(-0.07);
    expect(chamber.expected(world.reference).index).toBeCloseTo(before.index - 0.07, 12);
    expect(chamber.expected(world.reference).thicknessNm).toBe(before.thicknessNm);
    chamber.mend();
    expect(chamber.expected(world.reference)).toEqual(before);
  });

  it("refuses a time that is over before anything grows", () => {
    const chamber = linearChamber(draw("short"), 3, { given: GIVEN });
    expect(() => chamber.deposit(new Map([...draw("short").reference, ["time", 3]]))).toThrow(/plasma/);
  });
});

describe("the statistics", () => {
  it("of the gauge are what the line states: sites averaged, index and thickness correlated", () => {
    const world = { ...draw("gauge"), slips: 0 };
    const chamber = linearChamber(world, 5);
    const film = { index: 2, thicknessNm: 80 };
    const read = times(4000, () => chamber.measure(film));
    const [n, d] = [read.map((r) => r.index - 2), read.map((r) => r.thicknessNm - 80)];
    const [vn, cov, vd] = statedGauge(world);
    // By hand: .004 and .5 nm a site, five sites, correlation -.5.
    expect([vn, cov, vd].map((v) => v * 5)).toEqual(
      [0.004 ** 2, -0.5 * 0.004 * 0.5, 0.25].map((v) => expect.closeTo(v, 12)),
    );
    // An sd of 4000 values is known to 1.1 %, a correlation of -.5 to .012; four of those.
    expect(sd(n) / Math.sqrt(vn)).toBeCloseTo(1, 1);
    expect(Math.abs(sd(n) / Math.sqrt(vn) - 1)).toBeLessThan(0.045);
    expect(Math.abs(sd(d) / Math.sqrt(vd) - 1)).toBeLessThan(0.045);
    const correlation = mean(n.map((v, i) => v * d[i])) / sd(n) / sd(d);
    expect(Math.abs(correlation + 0.5)).toBeLessThan(0.05);
  });

  it("of cleans and depositions are those of the world", () => {
    const world = { ...still(draw("steps")), step: { index: 0.007, lnRate: 0.015 } };
    const chamber = linearChamber(world, 6, { given: { ...GIVEN, indexDrift: 0, rateDrift: 0 } });
    const steps = times(2000, () => {
      chamber.clean();
      return chamber.expected(world.reference);
    });
    const typical = 0.65 * 123;
    // An sd of 2000 values is known to 1.6 %; four of those.
    expect(Math.abs(sd(steps.map((f) => f.index)) / 0.007 - 1)).toBeLessThan(0.065);
    expect(Math.abs(sd(steps.map((f) => Math.log(f.thicknessNm / typical))) / 0.015 - 1)).toBeLessThan(0.065);
    const noisy = { ...world, scatter: { index: 0.003, lnRate: 0.005, heavy: false } };
    const other = linearChamber(noisy, 7, { given: { ...GIVEN, indexDrift: 0, rateDrift: 0 } });
    const films = times(2000, () => other.deposit(world.reference));
    expect(Math.abs(sd(films.map((f) => f.index)) / 0.003 - 1)).toBeLessThan(0.065);
    expect(Math.abs(sd(films.map((f) => Math.log(f.thicknessNm))) / 0.005 - 1)).toBeLessThan(0.065);
  });

  it("of chambers and lines have the spread declared, twice it between chambers in the wide variant", () => {
    const offsets = (variant: LinearVariant) => {
      const world = draw("fleet", variant);
      return times(1500, (i) => linearChamber(world, i).law.lnRate);
    };
    // An sd of 1500 values is known to 1.8 %; four of those.
    expect(Math.abs(sd(offsets("base")) / 0.05 - 1)).toBeLessThan(0.075);
    expect(Math.abs(sd(offsets("wide")) / 0.1 - 1)).toBeLessThan(0.075);
    const lines = times(1500, (i) => draw(`line ${i}`).law);
    expect(Math.abs(sd(lines.map((law) => law.index)) / 0.03 - 1)).toBeLessThan(0.075);
    // Mean -.25, sd .05: its standard error is .0013.
    expect(Math.abs(mean(lines.map((law) => law.indexPerRatio)) + 0.25)).toBeLessThan(0.0055);
  });
});

describe("the variants", () => {
  it("are the same line but for what they change", () => {
    const base = draw("variants");
    const changed: Record<Exclude<LinearVariant, "base">, Partial<LinearWorld>> = {
      tight: { tolerance: { index: 0.01, thicknessNm: 1 } },
      cold: { sisters: 0 },
      fifth: { measuredEvery: 5 },
      wide: { spread: draw("variants", "wide").spread },
      misfit: {
        interactions: draw("variants", "misfit").interactions,
        driftEnds: 8,
        scatter: { ...base.scatter, heavy: true },
        gauge: { ...base.gauge, inexact: 1.5 },
        unwrittenCleans: 0.3,
      },
    };
    for (const variant of ["tight", "cold", "fifth", "wide", "misfit"] as const)
      expect(draw("variants", variant)).toEqual({ ...base, ...changed[variant], variant });
  });

  it("misfit: the gauge is half as wide again as stated, and three cleans in ten are not written down", () => {
    const world = { ...draw("misfit", "misfit"), slips: 0 };
    const chamber = linearChamber(world, 8);
    const read = times(4000, () => chamber.measure({ index: 2, thicknessNm: 80 }).index);
    expect(Math.abs(sd(read) / Math.sqrt(statedGauge(world)[0]) - 1.5)).toBeLessThan(0.07);
    const unwritten = times(3000, () => Number(!chamber.clean().written));
    // Binomial sd of the mean .0084; four of those.
    expect(Math.abs(mean(unwritten) - 0.3)).toBeLessThan(0.034);
  });

  it("misfit: the scatter has the tails of Student's t with 3 degrees of freedom at the declared variance", () => {
    const drawn = draw("tails", "misfit");
    const world = { ...still(drawn), scatter: { index: 0.003, lnRate: 0.005, heavy: true } };
    const chamber = linearChamber(world, 9, { given: { ...GIVEN, indexDrift: 0, rateDrift: 0 } });
    const z = times(6000, () => (chamber.deposit(world.reference).index - 2.05) / 0.003);
    // t3 has variance 3, so scaled to 1: P(|z| > 1) = P(|t3| > sqrt 3) = 0.1817; P(|z| > 3) = P(|t3| > 5.196) = 0.0138 (closed
    // form F(t) = 1/2 + (atan(t/sqrt 3) + sqrt 3 t/(3 + t^2))/pi). A normal would have 0.317 and 0.0027. Binomial sds .005 and .0015.
    const beyond = (limit: number) => mean(z.map((v) => Number(Math.abs(v) > limit)));
    expect(Math.abs(beyond(1) - 0.1817)).toBeLessThan(0.02);
    expect(Math.abs(beyond(3) - 0.0138)).toBeLessThan(0.006);
  });

  it("misfit: the drift comes to an end, elsewhere it does not", () => {
    const drifted = (variant: LinearVariant, after: number) => {
      const world = { ...still(draw("drift", variant)), interactions: { index: 0, lnRate: 0, indexDrift: 0 } };
      const chamber = linearChamber(world, 10, { given: { ...GIVEN, indexDrift: 0.001 } });
      for (let k = 0; k < after; k++) chamber.deposit(world.reference);
      return chamber.expected(world.reference).index - 2.05;
    };
    expect(drifted("base", 200)).toBeCloseTo(0.2, 10);
    expect(drifted("misfit", 200)).toBeCloseTo(0.008, 10);
    expect(drifted("misfit", 1)).toBeCloseTo(0.008 * (1 - Math.exp(-1 / 8)), 10);
  });
});
