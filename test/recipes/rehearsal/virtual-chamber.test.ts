/** The virtual chamber keeps the statistics it declares, repeats itself by seed, and ages as chambers do. */
import { describe, expect, it } from "vitest";
import { random } from "../../../engine/index.ts";
import { indexSlopePerLogRatio } from "../../../recipes/rehearsal/film-law.ts";
import { type Traits, virtualChamber } from "../../../recipes/rehearsal/virtual-chamber.ts";
import {
  CREDIBLE_SLOPE,
  credible,
  drawWorld,
  TUBE_LIKE,
  TUBE_START,
  type World,
} from "../../../recipes/rehearsal/worlds.ts";

const PLAIN: Traits = {
  index: 0,
  lnRate: 0,
  ignitionS: 4,
  facetFactor: 0.85,
  transient: { index: 0, rate: 0, fade: 3 },
  controllers: { silane: 1, ammonia: 1, nitrogen: 1 },
};

/** Nothing moves but what the test lets move. */
const STILL: World = {
  ...TUBE_LIKE,
  rateDriftPerCycle: 0,
  indexDriftPerCycle: 0,
  ignitionJitterS: 0,
  scatter: { index: 0, memory: 0.3, lnRate: 0 },
  controllerWalk: 0,
  slips: { reading: 0, setting: 0 },
};

const POLISHED = { reads: "film on polished" } as const;
const mean = (values: number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
const sd = (values: number[]) => {
  const middle = mean(values);
  return Math.sqrt(mean(values.map((value) => (value - middle) ** 2)));
};

describe("a virtual chamber's seed", () => {
  it("fixes everything that happens, and another seed makes another chamber", () => {
    const play = (seed: number) => {
      const chamber = virtualChamber(TUBE_LIKE, seed);
      const films = [1, 2, 3].map(() => chamber.deposit(TUBE_START));
      chamber.clean();
      chamber.swapControllers();
      chamber.leak();
      films.push(chamber.deposit(TUBE_START));
      return films.map((film) => [film.index, film.thicknessNm, chamber.measure(film, POLISHED).index]);
    };
    expect(play(7)).toEqual(play(7));
    expect(play(7)).not.toEqual(play(8));
  });

  it("gives the same films however often they are measured", () => {
    const often = virtualChamber(TUBE_LIKE, 3);
    const never = virtualChamber(TUBE_LIKE, 3);
    for (let run = 0; run < 20; run++) {
      const film = often.deposit(TUBE_START);
      for (let again = 0; again < run; again++) often.measure(film, POLISHED);
      expect(never.deposit(TUBE_START).thicknessNm).toBe(film.thicknessNm);
    }
  });
});

describe("the scatter of a virtual chamber", () => {
  const films = (() => {
    const world = { ...STILL, scatter: TUBE_LIKE.scatter };
    const chamber = virtualChamber(world, 11, { given: PLAIN });
    return Array.from({ length: 4000 }, () => chamber.deposit(TUBE_START));
  })();

  it("has the declared size in index, 0.005, and remembers 0.3 of the run before", () => {
    const indices = films.map((film) => film.index);
    // Standard error of an sd over 4000 AR(1) draws is about 1.3 %; of the correlation 0.016. Four of each.
    expect(Math.abs(sd(indices) / 0.005 - 1)).toBeLessThan(0.052);
    const middle = mean(indices);
    const lagged =
      mean(indices.slice(1).map((value, i) => (value - middle) * (indices[i] - middle))) / sd(indices) ** 2;
    expect(Math.abs(lagged - 0.3)).toBeLessThan(0.064);
  });

  it("has the declared size in rate, 0.9 %, independent from run to run", () => {
    const logs = films.map((film) => Math.log(film.thicknessNm));
    expect(Math.abs(sd(logs) / 0.009 - 1)).toBeLessThan(0.045);
    const middle = mean(logs);
    const lagged = mean(logs.slice(1).map((value, i) => (value - middle) * (logs[i] - middle))) / sd(logs) ** 2;
    expect(Math.abs(lagged)).toBeLessThan(0.064);
  });

  it("has the offsets of the line's chambers spread as declared: 0.015 in index and 3 % in rate", () => {
    const traits = Array.from({ length: 1000 }, (_, seed) => virtualChamber(TUBE_LIKE, seed).traits);
    // Four standard errors of an sd over 1000 draws: 9 %.
    expect(Math.abs(sd(traits.map((trait) => trait.index)) / 0.015 - 1)).toBeLessThan(0.09);
    expect(Math.abs(sd(traits.map((trait) => trait.lnRate)) / 0.03 - 1)).toBeLessThan(0.09);
    expect(Math.abs(sd(traits.map((trait) => trait.controllers.silane)) / 0.005 - 1)).toBeLessThan(0.09);
    for (const trait of traits) {
      expect(trait.facetFactor).toBeGreaterThanOrEqual(0.6);
      expect(trait.facetFactor).toBeLessThan(0.95);
    }
  });
});

describe("the ageing of a virtual chamber", () => {
  it("drifts in proportion to the depositions since the clean, and a clean sets it back", () => {
    const world = { ...STILL, cycle: 100, rateDriftPerCycle: 0.04, indexDriftPerCycle: 0.01 };
    const chamber = virtualChamber(world, 1, { given: PLAIN });
    const first = chamber.deposit(TUBE_START);
    for (let run = 0; run < 49; run++) chamber.deposit(TUBE_START);
    const aged = chamber.deposit(TUBE_START);
    expect(aged.sinceClean).toBe(50);
    expect(aged.index - first.index).toBeCloseTo(0.005, 12);
    expect(aged.thicknessNm / first.thicknessNm).toBeCloseTo(1.02, 12);
    chamber.clean({ index: 0, lnRate: 0 });
    expect(chamber.deposit(TUBE_START).thicknessNm).toBeCloseTo(first.thicknessNm, 12);
  });

  it("fades after each event by e over the declared number of depositions", () => {
    const given = { ...PLAIN, transient: { index: -0.02, rate: -0.06, fade: 4 } };
    const chamber = virtualChamber(STILL, 1, { given });
    const steady = virtualChamber(STILL, 1, { given: PLAIN }).expected(TUBE_START);
    for (let run = 0; run < 4; run++) {
      const film = chamber.deposit(TUBE_START);
      expect(film.index - steady.index).toBeCloseTo(-0.02 * Math.exp(-run / 4), 12);
      expect(film.thicknessNm / steady.thicknessNm - 1).toBeCloseTo(-0.06 * Math.exp(-run / 4), 12);
    }
    chamber.swapControllers({ silane: 1, ammonia: 1, nitrogen: 1 });
    expect(chamber.deposit(TUBE_START).index - steady.index).toBeCloseTo(-0.02, 12);
    expect(chamber.depositionsSinceClean).toBe(5);
    expect(chamber.depositionsSinceEvent).toBe(1);
  });

  it("steps at a clean by the declared 0.006 in index and 1.5 % in rate", () => {
    const chamber = virtualChamber(STILL, 5, { given: PLAIN });
    const steady = virtualChamber(STILL, 5, { given: PLAIN }).expected(TUBE_START);
    const steps = Array.from({ length: 1000 }, () => {
      chamber.clean();
      const film = chamber.expected(TUBE_START);
      return [film.index - steady.index, Math.log(film.thicknessNm / steady.thicknessNm)];
    });
    expect(Math.abs(sd(steps.map(([index]) => index)) / 0.006 - 1)).toBeLessThan(0.09);
    expect(Math.abs(sd(steps.map(([, rate]) => rate)) / 0.015 - 1)).toBeLessThan(0.09);
  });

  it("answers a controller that delivers 2 % too much ammonia as if 2 % more had been asked for", () => {
    const lying = virtualChamber(STILL, 1, {
      given: { ...PLAIN, controllers: { silane: 1, ammonia: 1.02, nitrogen: 1 } },
    });
    const honest = virtualChamber(STILL, 1, { given: PLAIN });
    const more = new Map([...TUBE_START, ["ammonia", 7020 * 1.02]]);
    expect(lying.expected(TUBE_START).index).toBeCloseTo(honest.expected(more).index, 12);
  });

  it("loses 0.05 to 0.1 in index to a leak, leaves the rate alone, and recovers when it is mended", () => {
    for (let seed = 0; seed < 20; seed++) {
      const chamber = virtualChamber(STILL, seed, { given: PLAIN });
      const before = chamber.expected(TUBE_START);
      chamber.leak();
      const leaking = chamber.expected(TUBE_START);
      expect(before.index - leaking.index).toBeGreaterThanOrEqual(0.05);
      expect(before.index - leaking.index).toBeLessThanOrEqual(0.1);
      expect(leaking.thicknessNm).toBe(before.thicknessNm);
      chamber.mend();
      expect(chamber.expected(TUBE_START).index).toBe(before.index);
    }
  });

  it("now and then runs a setting that nobody wrote down, and then tells the truth in the film's own settings", () => {
    const chamber = virtualChamber({ ...STILL, slips: { reading: 0, setting: 0.01 } }, 2, { given: PLAIN });
    const films = Array.from({ length: 4000 }, () => chamber.deposit(TUBE_START));
    const strange = films.filter((film) => film.settings !== TUBE_START);
    // 40 expected, sd 6.3; four of them.
    expect(Math.abs(strange.length - 40)).toBeLessThan(26);
    for (const film of strange) {
      const moved = [...film.settings].filter(([name, value]) => value !== TUBE_START.get(name));
      expect(moved).toHaveLength(1);
    }
  });
});

describe("the virtual gauge", () => {
  it("reads the witness with 0.002 and 0.3 nm, the textured wafer with 0.008 and 0.8 nm on the facet", () => {
    const chamber = virtualChamber(STILL, 4, { given: PLAIN });
    const film = chamber.deposit(TUBE_START);
    const read = (reads: "film on polished" | "film on textured") =>
      Array.from({ length: 2000 }, () => chamber.measure(film, { reads }));
    // Four standard errors over 2000: 6.4 % of an sd, 9 % of an sd in a mean.
    for (const [reads, index, nm, truth] of [
      ["film on polished", 0.002, 0.3, film.thicknessNm],
      ["film on textured", 0.008, 0.8, 0.85 * film.thicknessNm],
    ] as const) {
      const seen = read(reads);
      expect(Math.abs(sd(seen.map((one) => one.index!)) / index - 1)).toBeLessThan(0.064);
      expect(Math.abs(sd(seen.map((one) => one.thicknessNm!)) / nm - 1)).toBeLessThan(0.064);
      expect(Math.abs(mean(seen.map((one) => one.thicknessNm!)) - truth)).toBeLessThan(0.09 * nm);
    }
  });

  it("reads the light of the film that is on the facet, with 1.5 nm on the minimum", () => {
    const cellLight = {
      reflectanceMinimumNm: (index: number, facetNm: number) => 4 * index * facetNm,
      weightedReflectancePercent: () => 2,
    };
    const chamber = virtualChamber(STILL, 4, { cellLight, given: PLAIN });
    const film = chamber.deposit(TUBE_START);
    const seen = Array.from({ length: 2000 }, () => chamber.measure(film, { reads: "light on cell" }));
    const minima = seen.map((one) => one.reflectanceMinimumNm!);
    expect(Math.abs(mean(minima) - 4 * film.index * 0.85 * film.thicknessNm)).toBeLessThan(0.09 * 1.5);
    expect(Math.abs(sd(minima) / 1.5 - 1)).toBeLessThan(0.064);
    expect(seen[0].index).toBeNull();
  });

  it("slips at the declared rate, in every one of the ways that books show", () => {
    const chamber = virtualChamber({ ...STILL, slips: { reading: 0.03, setting: 0 } }, 9, { given: PLAIN });
    const counts = new Map<string, number>();
    for (let run = 0; run < 4000; run++) {
      const film = chamber.deposit(TUBE_START);
      const { slip, index, thicknessNm } = chamber.measure(film, POLISHED);
      if (slip === null) expect(Math.abs(thicknessNm! - film.thicknessNm)).toBeLessThan(6 * 0.3);
      if (slip === "wrong wafer") expect(thicknessNm! / film.thicknessNm).toBeLessThan(0.9);
      if (slip === "unit slip") expect(thicknessNm! / film.thicknessNm).toBeGreaterThan(9);
      if (slip === "missing value") expect(index).toBeNull();
      if (slip !== null) counts.set(slip, (counts.get(slip) ?? 0) + 1);
    }
    expect([...counts.keys()].sort()).toEqual([
      "heavy tail",
      "missing value",
      "swapped rows",
      "unit slip",
      "wrong wafer",
    ]);
    // 120 expected, sd 10.8; four of them.
    expect(Math.abs([...counts.values()].reduce((sum, count) => sum + count, 0) - 120)).toBeLessThan(44);
  });

  it("refuses to read light when no optics were handed in, and a place outside the boat", () => {
    const chamber = virtualChamber(STILL, 4, { given: PLAIN });
    const film = chamber.deposit(TUBE_START);
    expect(() => chamber.measure(film, { reads: "light on cell" })).toThrow(/light/);
    expect(() => chamber.measure(film, { ...POLISHED, place: 1.2 })).toThrow(/boat/);
  });

  it("sees the film fall from one end of the boat to the other by the declared tilt", () => {
    const film = virtualChamber(STILL, 4, { given: PLAIN }).deposit(TUBE_START);
    expect((film.at(0).thicknessNm - film.at(1).thicknessNm) / film.thicknessNm).toBeCloseTo(STILL.boat.tilt, 12);
    expect(film.at(0.5)).toEqual({ index: film.index, thicknessNm: film.thicknessNm });
  });
});

describe("drawn worlds", () => {
  it("all have a credible slope and a goal that even an odd chamber can reach, and differ from one another", () => {
    const source = random("worlds");
    const worlds = Array.from({ length: 60 }, () => drawWorld(source));
    for (const world of worlds) {
      const slope = indexSlopePerLogRatio(world, world.start);
      expect(slope).toBeGreaterThanOrEqual(CREDIBLE_SLOPE[0]);
      expect(slope).toBeLessThanOrEqual(CREDIBLE_SLOPE[1]);
      expect(credible(world)).toBe(true);
    }
    expect(new Set(worlds.map((world) => world.xMost)).size).toBe(60);
  });

  it("gives up by name when the goal is out of every world's reach", () => {
    const base = { ...TUBE_LIKE, goal: { index: 2.9, thicknessNm: 73 } };
    expect(() => drawWorld(random(1), base)).toThrow(/no world/);
  });
});
