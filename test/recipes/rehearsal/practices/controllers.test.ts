/**
 * The controllers held to what is known of them in closed form: the stability bound of the EWMA in its gain mismatch
 * (Ingolfsson and Sachs, J. Quality Technology 25 (1993) 271-287), and the price of correcting noise (Deming's funnel: full
 * compensation doubles the variance; an integrator of gain g has 2/(2 - g) of it; Box and Luceño 1997, from memory).
 */
import { describe, expect, it } from "vitest";
import { random } from "../../../../engine/index.ts";
import { coordinates } from "../../../../recipes/rehearsal/practices/dials.ts";
import { doubleEwma } from "../../../../recipes/rehearsal/practices/double-ewma.ts";
import { ewma } from "../../../../recipes/rehearsal/practices/ewma.ts";
import type { Hand, Practice } from "../../../../recipes/rehearsal/practices/practice.ts";
import { BY_HEART } from "../../../../recipes/rehearsal/practices/response.ts";
import { tunedEwma } from "../../../../recipes/rehearsal/practices/tuned-ewma.ts";
import type { Brief } from "../../../../recipes/rehearsal/stage.ts";

/** A line without sisters whose settings can be typed in as finely as wanted, so that only the controller is seen. */
const brief: Brief = {
  reference: new Map([
    ["silane", 300],
    ["ammonia", 1800],
    ["time", 126],
  ]),
  aim: { index: 2.05, thicknessNm: 80 },
  goal: { index: 2.06, thicknessNm: 80 },
  tolerance: { index: 0.02, thicknessNm: 2 },
  start: new Map(),
  levers: ["silane", "ammonia", "time"].map((name) => ({ name, low: 1, high: 1e5, smallest: 1e-9, tune: true })),
  ratio: [0.01, 1e4],
  gauge: { index: 0.003, thicknessNm: 0.4, correlation: 0, sites: 1 },
  sisters: [],
  history: [],
};
const truth = { film: () => brief.goal };

/** A chamber whose index answers the ratio with `gain` times the slope the controller assumes; its rate is as assumed. */
function plant(gain: number, offset: number) {
  return (settings: ReadonlyMap<string, number>) => {
    const { ratio, silane } = coordinates(brief, settings);
    const time = settings.get("time") ?? 0;
    return {
      index: brief.goal.index + offset + gain * BY_HEART.index * ratio,
      thicknessNm: (80 / 123) * (time - 3) * Math.exp(BY_HEART.rateSilane * silane),
    };
  };
}

/** Misses in index, run after run. */
function misses(hand: Hand, film: ReturnType<typeof plant>, runs: number, noise: () => number = () => 0): number[] {
  return Array.from({ length: runs }, () => {
    const settings = hand.next();
    const made = film(settings);
    const reading = { ...made, index: made.index + noise() };
    hand.saw({ settings, reading, tuning: false });
    return reading.index - brief.goal.index;
  });
}

describe("an EWMA whose slope is wrong", () => {
  const lambda = 0.6;
  const runs = (gain: number) => misses(ewma(lambda).begin(brief, truth), plant(gain, 0.002), 60).map(Math.abs);

  it("settles while lambda times the true slope over the assumed one is below two", () => {
    const found = runs(1.9 / lambda);
    // Each miss is 0.9 of the one before, of the other sign: 0.9^59 = 0.002.
    expect(found[59] / found[0]).toBeCloseTo(0.9 ** 59, 6);
  });

  it("swings ever wider beyond", () => {
    const found = runs(2.1 / lambda);
    // Beyond a dozen runs the readings are so far off that anybody takes them for slips.
    for (let i = 1; i < 12; i++) expect(found[i] / found[i - 1]).toBeCloseTo(1.1, 6);
  });

  it("is on goal at the second run when lambda matches the mismatch", () => {
    const found = runs(1 / lambda);
    expect(found[0]).toBeGreaterThan(0.001);
    expect(found[1]).toBeLessThan(1e-9);
  });
});

describe("correcting noise", () => {
  const RUNS = 20_000;
  const sd = 0.001;

  /** Variance of the misses of a practice on white noise, in units of the noise's own. */
  function inflation(practice: Practice): number {
    const source = random("funnel");
    const found = misses(practice.begin(brief, truth), plant(1, 0), RUNS, () => sd * source.normal()).slice(100);
    return found.reduce((sum, miss) => sum + miss ** 2, 0) / found.length / sd ** 2;
  }

  it.each([
    [1, 2],
    [0.6, 2 / 1.4],
    [0.3, 2 / 1.7],
  ])("with gain %f costs 2/(2 - g) of the variance", (gain, expected) => {
    // Standard error of a variance of 20 000 values: 1 %, a little more as they hang together; four of those.
    expect(Math.abs(inflation(ewma(gain)) / expected - 1)).toBeLessThan(0.05);
  });

  it("costs a double EWMA more than the single one of its first gain", () => {
    expect(inflation(doubleEwma)).toBeGreaterThan(2 / 1.5);
  });

  it("is hardly ever done behind a dead-band", () => {
    const source = random("funnel");
    const hand = tunedEwma.begin(brief, truth);
    const film = plant(1, 0);
    const set = new Set<number>();
    const noted = (settings: ReadonlyMap<string, number>) => {
      set.add(coordinates(brief, settings).ratio);
      return film(settings);
    };
    misses(hand, noted, RUNS, () => sd * source.normal());
    // 0.04 squared tolerances are a miss of 0.2 x 0.02 = 0.004; the filtered noise has an sd of 0.0006.
    expect(set.size).toBeLessThan(10);
  });
});

describe("a double EWMA", () => {
  /** Misses while the chamber drifts steadily. */
  function drifting(practice: Practice): number {
    const hand = practice.begin(brief, truth);
    let k = 0;
    const film = (settings: ReadonlyMap<string, number>) => plant(1, 1e-4 * k++)(settings);
    const found = misses(hand, film, 400);
    return Math.abs(found[399]);
  }

  it("follows a steady drift without lagging, where the single one lags by the drift over lambda", () => {
    expect(drifting(ewma(0.5))).toBeCloseTo(1e-4 / 0.5, 7);
    expect(drifting(doubleEwma)).toBeLessThan(1e-7);
  });
});

describe("the tuned EWMA", () => {
  const say = (hand: Hand, index: number) => {
    const settings = hand.next();
    const made = plant(1, 0)(settings);
    hand.saw({ settings, reading: { ...made, index: made.index + index }, tuning: false });
    return settings;
  };
  const ratioOf = (settings: ReadonlyMap<string, number>) => coordinates(brief, settings).ratio;

  it("believes the first reading of a new chamber in full, and later ones clipped and by half", () => {
    const hand = tunedEwma.begin(brief, truth);
    const first = ratioOf(say(hand, 0.05));
    const second = ratioOf(say(hand, 0.05));
    // The first miss includes that the chamber's own offset is 0.01 above what the reference is meant to lay.
    expect(first - second).toBeCloseTo((0.05 + 0.01) / BY_HEART.index, 9);
    const third = ratioOf(say(hand, 0.15));
    expect(third).toBeCloseTo(second, 9);
    expect(ratioOf(hand.next()) - third).toBeCloseTo(-(0.5 * 0.02) / BY_HEART.index, 9);
  });

  it("goes back to the chamber's mean offset at a clean", () => {
    const hand = tunedEwma.begin(brief, truth);
    for (let run = 0; run < 5; run++) say(hand, 0);
    const usual = ratioOf(hand.next());
    for (let run = 0; run < 5; run++) say(hand, 0.019);
    const moved = ratioOf(hand.next());
    hand.cleaned();
    const after = ratioOf(hand.next());
    // Half of the readings said 0.019 more: the mean stands half-way, less what EWMA and dead-band left.
    expect((after - usual) / (moved - usual)).toBeGreaterThan(0.4);
    expect((after - usual) / (moved - usual)).toBeLessThan(0.6);
  });
});
