/**
 * Seeded random numbers. Role: rehearsals, simulated chambers and searches, where the same seed must give the same numbers on
 * every machine; the forecast of a drift draws from it with a seed of its own, so that asking twice gives one answer.
 *
 * Generator: xoshiro128** 1.1 (D. Blackman and S. Vigna, ACM Trans. Math. Softw. 47 (2021) article 36), state of four
 * 32-bit words filled by two draws of SplitMix64 (G. L. Steele, D. Lea, C. H. Flood, OOPSLA 2014), low word first,
 * seeded with the 64-bit FNV-1a hash (G. Fowler, L. C. Noll, K.-P. Vo) of the seed written as UTF-8 text. So 7 and "7"
 * are the same seed. A normal number is the normal quantile of one uniform: one draw each, which keeps two simulations
 * with the same seed in step.
 */
import { refuse } from "../errors.ts";
import { normalQuantile } from "./normal.ts";

/** A stream of random numbers. Every method advances the stream; `fork` does not. */
export interface Random {
  /** The next 32 bits, an integer from 0 to 2^32 - 1. */
  bits(): number;
  /** Uniform on [low, high), 53 bits; default [0, 1). */
  uniform(low?: number, high?: number): number;
  /** Normal with this mean and standard deviation (default 0 and 1; sd 0 gives the mean). */
  normal(mean?: number, sd?: number): number;
  /** Integer from 0 to count - 1, each equally likely. */
  integer(count: number): number;
  /** True with probability p. */
  chance(p: number): boolean;
  /** One of the items, each equally likely; refuses (`nothing-to-choose`) an empty list. */
  choice<T>(items: readonly T[]): T;
  /** A separate stream named within this one; depends on seed and label only, not on what was drawn before. */
  fork(label: number | string): Random;
}

const MASK_64 = (1n << 64n) - 1n;

/** 64-bit FNV-1a hash of the UTF-8 bytes of a text. */
export function fnv1a64(text: string): bigint {
  let hash = 0xcbf29ce484222325n;
  for (const byte of new TextEncoder().encode(text)) hash = ((hash ^ BigInt(byte)) * 0x100000001b3n) & MASK_64;
  return hash;
}

/** A function that gives successive outputs of SplitMix64 started at `state` (64-bit, unsigned). */
export function splitMix64(state: bigint): () => bigint {
  let x = state & MASK_64;
  return () => {
    x = (x + 0x9e3779b97f4a7c15n) & MASK_64;
    let z = x;
    z = ((z ^ (z >> 30n)) * 0xbf58476d1ce4e5b9n) & MASK_64;
    z = ((z ^ (z >> 27n)) * 0x94d049bb133111ebn) & MASK_64;
    return z ^ (z >> 31n);
  };
}

/** A function that gives successive outputs of xoshiro128** 1.1 from four 32-bit words, not all zero. */
export function xoshiro128(words: readonly [number, number, number, number]): () => number {
  let [a, b, c, d] = words;
  return () => {
    const scrambled = Math.imul(b, 5);
    const result = Math.imul((scrambled << 7) | (scrambled >>> 25), 9);
    const shifted = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= shifted;
    d = (d << 11) | (d >>> 21);
    return result >>> 0;
  };
}

/** A stream from a seed, number or text. A number must be finite. */
export function random(seed: number | string): Random {
  if (typeof seed === "number" && !Number.isFinite(seed)) refuse("not-a-number", `the seed is ${seed}`);
  const seedText = String(seed);
  const fill = splitMix64(fnv1a64(seedText));
  const first = fill();
  const second = fill();
  const word = (value: bigint, shift: bigint) => Number((value >> shift) & 0xffffffffn);
  const bits = xoshiro128([word(first, 0n), word(first, 32n), word(second, 0n), word(second, 32n)]);

  const unit = () => {
    const high = bits() >>> 5;
    const low = bits() >>> 6;
    return (high * 67108864 + low) / 9007199254740992;
  };
  const integer = (count: number) => {
    if (!Number.isInteger(count) || count < 1) refuse("nothing-to-choose", `cannot choose among ${count}`);
    // 53 random bits times a count far below 2^53: the bias is under count / 2^53.
    return Math.floor(unit() * count);
  };
  return {
    bits,
    uniform: (low = 0, high = 1) => low + (high - low) * unit(),
    normal: (mean = 0, sd = 1) => {
      const u = unit();
      // The smallest step keeps u = 0 (once in 2^53) from becoming minus infinity.
      return mean + sd * normalQuantile(u === 0 ? 2 ** -54 : u);
    },
    integer,
    chance: (p) => unit() < p,
    choice: (items) => items[integer(items.length)],
    fork: (label) => random(`${seedText}/${label}`),
  };
}
