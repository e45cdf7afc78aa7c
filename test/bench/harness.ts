/**
 * How two ways of doing the same thing are timed here: the answers are compared first, then the two take turns (who goes
 * first changes every round, so that a machine growing slower burdens both), every result is used, and what is reported
 * is the median of many rounds and the ratio, because seconds are the machine's and ratios are ours.
 */
import { spawnSync } from "node:child_process";

/** One of the two ways. `run` returns a number made from its result, so that no work can be optimised away. */
export interface Way {
  name: string;
  run(): number;
}

export interface Bench {
  title: string;
  a: Way;
  b: Way;
  /** Throws when the two do not give the same answer. Called once, before anything is timed. */
  check(): void;
  /** Timed rounds; each runs both ways once. Odd, so that the median is one of them. */
  rounds: number;
  /** Why it cannot be run here, if so; shown in place of a result. */
  skip?: string;
}

export interface Timing {
  title: string;
  aName: string;
  bName: string;
  aMedianMs: number;
  bMedianMs: number;
  /** Median over the rounds of time(a)/time(b), and the range that holds the middle half of them. */
  ratio: number;
  ratioLow: number;
  ratioHigh: number;
  rounds: number;
}

/** The value below which the fraction `p` of the values lies, by linear interpolation between the sorted ones. */
export function quantile(values: readonly number[], p: number): number {
  const sorted = [...values].sort((x, y) => x - y);
  const at = p * (sorted.length - 1);
  const below = Math.floor(at);
  const above = Math.min(below + 1, sorted.length - 1);
  return sorted[below] + (at - below) * (sorted[above] - sorted[below]);
}

/** Sum of everything the timed runs returned; printed at the end, so that it counts as used. */
let used = 0;
export const usedResults = () => used;

/** Checks and times one bench. `now` gives milliseconds. */
export function time(bench: Bench, now: () => number = () => performance.now()): Timing {
  bench.check();
  const once = (way: Way): number => {
    const from = now();
    used += way.run();
    return now() - from;
  };
  // Two untimed rounds: compiling and first-time loading belong to neither way.
  for (let warm = 0; warm < 2; warm++) for (const way of [bench.a, bench.b]) once(way);
  const a: number[] = [];
  const b: number[] = [];
  for (let round = 0; round < bench.rounds; round++) {
    if (round % 2 === 0) {
      a.push(once(bench.a));
      b.push(once(bench.b));
    } else {
      b.push(once(bench.b));
      a.push(once(bench.a));
    }
  }
  const ratios = a.map((ms, round) => ms / b[round]);
  return {
    title: bench.title,
    aName: bench.a.name,
    bName: bench.b.name,
    aMedianMs: quantile(a, 0.5),
    bMedianMs: quantile(b, 0.5),
    ratio: quantile(ratios, 0.5),
    ratioLow: quantile(ratios, 0.25),
    ratioHigh: quantile(ratios, 0.75),
    rounds: bench.rounds,
  };
}

/** Three lines a person can read. */
export function inWords(timing: Timing): string {
  const ms = (value: number) => `${value.toPrecision(3)} ms`;
  const times = (value: number) => value.toPrecision(3);
  return [
    timing.title,
    `  ${timing.aName}: ${ms(timing.aMedianMs)}; ${timing.bName}: ${ms(timing.bMedianMs)} (medians of ${timing.rounds})`,
    `  ratio ${times(timing.ratio)}, middle half ${times(timing.ratioLow)} to ${times(timing.ratioHigh)}`,
  ].join("\n");
}

/** A whole process as a way: Node with these words, from start to exit. Throws when it does not exit with 0. */
export function nodeProcess(name: string, words: readonly string[], cwd: string): Way & { output(): string } {
  const output = (): string => {
    const { status, stdout, stderr, error } = spawnSync(process.execPath, words, { cwd, encoding: "utf8", input: "" });
    if (error) throw error;
    if (status !== 0) throw new Error(`${name} ended with ${status}: ${stderr}`);
    return stdout;
  };
  return { name, output, run: () => output().length };
}
