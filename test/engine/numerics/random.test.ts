import { describe, expect, it } from "vitest";
import { normalCdf, random } from "../../../engine/index.ts";
import { fnv1a64, splitMix64, xoshiro128 } from "../../../engine/numerics/random.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";

describe("the parts of the generator", () => {
  it("xoshiro128** 1.1 gives the reference outputs for state 1, 2, 3, 4 (rand_xoshiro's test, from the authors' C code)", () => {
    const next = xoshiro128([1, 2, 3, 4]);
    const expected = [
      11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849, 3729100597, 4258142804,
    ];
    expect(expected.map(() => next())).toEqual(expected);
  });

  it("SplitMix64 gives the reference outputs for seed 1234567 (Rosetta Code, 'Pseudo-random numbers/Splitmix64')", () => {
    const next = splitMix64(1234567n);
    const expected = [
      6457827717110365317n,
      3203168211198807973n,
      9817491932198370423n,
      4593380528125082431n,
      16408922859458223821n,
    ];
    expect(expected.map(() => next())).toEqual(expected);
  });

  it("FNV-1a gives the published 64-bit values of '', 'a' and 'foobar'", () => {
    expect(["", "a", "foobar"].map(fnv1a64)).toEqual([0xcbf29ce484222325n, 0xaf63dc4c8601ec8cn, 0x85944171f73967e8n]);
  });
});

describe("a seeded stream", () => {
  it("makes a uniform number of 27 and 26 bits of two outputs, high part first", () => {
    const bits = random("bits");
    const high = bits.bits() >>> 5;
    const low = bits.bits() >>> 6;
    expect(random("bits").uniform()).toBe(high / 2 ** 27 + low / 2 ** 53);
  });

  it("repeats for the same seed, number or text, and differs for another", () => {
    const five = (seed: number | string) => {
      const draw = random(seed);
      return Array.from({ length: 5 }, () => draw.uniform());
    };
    expect(five(7)).toEqual(five("7"));
    expect(five(7)).not.toEqual(five(8));
    expect(refusalCode(() => random(Number.NaN))).toBe("not-a-number");
  });

  it("forks by name, whatever was drawn before", () => {
    const fresh = random(1).fork("gauge").normal();
    const used = random(1);
    used.normal();
    expect(used.fork("gauge").normal()).toBe(fresh);
    expect(random(1).fork("process").normal()).not.toBe(fresh);
    expect(random(2).fork("gauge").normal()).not.toBe(fresh);
  });

  it("is uniform: a chi-square of 50 bins from 50000 draws is ordinary, and draws do not follow one another", () => {
    const draw = random("uniform");
    const bins = new Float64Array(50);
    let product = 0;
    let before = 0.5;
    const count = 50000;
    for (let i = 0; i < count; i++) {
      const u = draw.uniform();
      expect(u >= 0 && u < 1).toBe(true);
      bins[Math.floor(u * 50)]++;
      product += (u - 0.5) * (before - 0.5);
      before = u;
    }
    const chiSquare = bins.reduce((sum, b) => sum + (b - 1000) ** 2 / 1000, 0);
    // 49 degrees of freedom: 0.1 % points 23.98 and 85.35 (chi-square table, from memory).
    expect(chiSquare).toBeGreaterThan(23.98);
    expect(chiSquare).toBeLessThan(85.35);
    const because = "three and a half standard errors 1/sqrt(50000) of a correlation";
    expectClose((12 * product) / count, 0, { absolute: 3.5 / Math.sqrt(count), because });
  });

  it("is normal: mean, spread, fourth moment, and the largest distance to the distribution of 20000 draws", () => {
    const draw = random("normal");
    const count = 20000;
    const z = Array.from({ length: count }, () => draw.normal(1, 2)).map((x) => (x - 1) / 2);
    const moment = (power: number) => z.reduce((sum, v) => sum + v ** power, 0) / count;
    const because = "three and a half standard errors";
    expectClose(moment(1), 0, { absolute: 3.5 / Math.sqrt(count), because });
    expectClose(moment(2), 1, { absolute: 3.5 * Math.sqrt(2 / count), because });
    expectClose(moment(4), 3, { absolute: 3.5 * Math.sqrt(96 / count), because });
    const sorted = z.sort((a, b) => a - b);
    const distance = Math.max(...sorted.map((v, i) => Math.abs(normalCdf(v) - (i + 0.5) / count)));
    // Kolmogorov's 0.1 % point, 1.95/sqrt(n) (from memory).
    expect(distance).toBeLessThan(1.95 / Math.sqrt(count));
  });

  it("chooses every item about equally often, whole numbers below a limit, and events with their chance", () => {
    const draw = random("choice");
    const seen = { a: 0, b: 0, c: 0 };
    let hits = 0;
    for (let i = 0; i < 3000; i++) {
      seen[draw.choice(["a", "b", "c"] as const)]++;
      const k = draw.integer(4);
      expect(Number.isInteger(k) && k >= 0 && k < 4).toBe(true);
      if (draw.chance(0.2)) hits++;
    }
    for (const times of Object.values(seen)) {
      expectClose(times, 1000, { absolute: 91, because: "three and a half standard deviations, sqrt(3000 x 2/9)" });
    }
    expectClose(hits, 600, { absolute: 77, because: "three and a half standard deviations, sqrt(3000 x 0.16)" });
    expect(refusalCode(() => draw.choice([]))).toBe("nothing-to-choose");
    expect(refusalCode(() => draw.integer(2.5))).toBe("nothing-to-choose");
    expect(draw.normal(5, 0)).toBe(5);
    const between = draw.uniform(-3, -2);
    expect(between >= -3 && between < -2).toBe(true);
  });
});
