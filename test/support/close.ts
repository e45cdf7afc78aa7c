/**
 * The one numeric comparison of the tests. Every tolerance has to say why it is that large: `because` is required and
 * is printed when the comparison fails.
 */
import { expect } from "vitest";

/** At least one of the two must be given; a value passes when it is within either. */
export interface Tolerance {
  /** Largest |actual - expected| / |expected|. */
  relative?: number;
  /** Largest |actual - expected|, in the unit of the values. */
  absolute?: number;
  /** Why the tolerance is this large: rounding of a printed table, method error, statistics of a sample, ... */
  because: string;
}

/** Fails unless `actual` is a finite number within the tolerance of `expected`. */
export function expectClose(actual: number, expected: number, { relative, absolute, because }: Tolerance): void {
  if (relative === undefined && absolute === undefined)
    throw new Error("expectClose needs a relative or absolute bound");
  if (!Number.isFinite(expected)) throw new Error(`expectClose needs a finite expected value, got ${expected}`);
  const difference = Math.abs(actual - expected);
  const allowed = Math.max((relative ?? 0) * Math.abs(expected), absolute ?? 0);
  const passes = Number.isFinite(actual) && difference <= allowed;
  expect(
    passes,
    `${actual} should be ${expected}: differs by ${difference}, allowed ${allowed} because ${because}`,
  ).toBe(true);
}

/** `expectClose` for each pair of two equally long lists. */
export function expectAllClose(actual: ArrayLike<number>, expected: ArrayLike<number>, tolerance: Tolerance): void {
  expect(actual.length, "as many values as expected").toBe(expected.length);
  for (let i = 0; i < expected.length; i++) {
    expectClose(actual[i], expected[i], { ...tolerance, because: `${tolerance.because} (value ${i + 1})` });
  }
}

/**
 * Decimal digits on which a value agrees with a certified one: -log10 of the relative error, or of the absolute error
 * when the certified value is zero. At most 16; 0 for anything that is not finite or has no digit right.
 * (The "log relative error" of B. D. McCullough, The American Statistician 52 (1998) 358-366; from memory.)
 */
export function digitsAgreed(actual: number, certified: number): number {
  if (!Number.isFinite(actual)) return 0;
  const error = Math.abs(actual - certified);
  if (error === 0) return 16;
  const digits = -Math.log10(certified === 0 ? error : error / Math.abs(certified));
  return Math.min(16, Math.max(0, digits));
}

/** The smallest `digitsAgreed` over two equally long lists. */
export function fewestDigits(actual: ArrayLike<number>, certified: ArrayLike<number>): number {
  expect(actual.length, "as many values as certified").toBe(certified.length);
  let fewest = 16;
  for (let i = 0; i < certified.length; i++) fewest = Math.min(fewest, digitsAgreed(actual[i], certified[i]));
  return fewest;
}
