/**
 * How two ways of doing the same thing are timed here: the answers are compared first, then the two take turns (who goes
 * first changes every round, so that a machine growing slower burdens both), every result is used, and what is reported
 * is the median of many rounds and the ratio, because seconds are the machine's and ratios are ours. A way may be a process
 * of another language that waits between its turns (`rivals/`), and may bring its own clock.
 */
import { spawnSync } from "node:child_process";

/** A number made from the result, so that no work can be optimised away; with the time it took, where the way has a clock. */
export type Outcome = number | { result: number; ms: number };

/** One of the two ways. */
export interface Way {
  name: string;
  run(): Outcome | Promise<Outcome>;
  /** How often one run does the work, 1 when left out. Times are reported for doing it once. */
  repeats?: number;
  /** Called when the bench is over, also when it failed. */
  close?(): void;
}

export interface Bench {
  title: string;
  a: Way;
  b: Way;
  /** Throws, or promises and then rejects, when the two do not give the same answer. Once, before anything is timed. */
  check(): unknown;
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
export async function time(bench: Bench, now: () => number = () => performance.now()): Promise<Timing> {
  try {
    await bench.check();
    return await timed(bench, now);
  } finally {
    bench.a.close?.();
    bench.b.close?.();
  }
}

async function timed(bench: Bench, now: () => number): Promise<Timing> {
  /** Milliseconds for doing the work once. */
  const once = async (way: Way): Promise<number> => {
    const from = now();
    const running = way.run();
    // A way that is done already is not made to wait for its turn among promises.
    const outcome = running instanceof Promise ? await running : running;
    const ms = now() - from;
    used += typeof outcome === "number" ? outcome : outcome.result;
    return (typeof outcome === "number" ? ms : outcome.ms) / (way.repeats ?? 1);
  };
  // Two untimed rounds: compiling and first-time loading belong to neither way.
  for (let warm = 0; warm < 2; warm++) for (const way of [bench.a, bench.b]) await once(way);
  const a: number[] = [];
  const b: number[] = [];
  for (let round = 0; round < bench.rounds; round++) {
    if (round % 2 === 0) {
      a.push(await once(bench.a));
      b.push(await once(bench.b));
    } else {
      b.push(await once(bench.b));
      a.push(await once(bench.a));
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
  const ms = (value: number) => (value < 0.1 ? `${(1000 * value).toPrecision(3)} us` : `${value.toPrecision(3)} ms`);
  const times = (value: number) => value.toPrecision(3);
  return [
    timing.title,
    `  ${timing.aName}: ${ms(timing.aMedianMs)}; ${timing.bName}: ${ms(timing.bMedianMs)} (medians of ${timing.rounds})`,
    `  ratio ${times(timing.ratio)}, middle half ${times(timing.ratioLow)} to ${times(timing.ratioHigh)}`,
  ].join("\n");
}

/** A whole process as a way: Node with these words, from start to exit. Throws when it does not exit with 0. */
export function nodeProcess(
  name: string,
  words: readonly string[],
  cwd: string,
): Way & { output(): string; run(): number } {
  const output = (): string => {
    const { status, stdout, stderr, error } = spawnSync(process.execPath, words, { cwd, encoding: "utf8", input: "" });
    if (error) throw error;
    if (status !== 0) throw new Error(`${name} ended with ${status}: ${stderr}`);
    return stdout;
  };
  return { name, output, run: () => output().length };
}
