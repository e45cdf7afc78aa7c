/** The benches are honest only if their harness is: answers first, turns taken, medians, results used. */
import { describe, expect, it } from "vitest";
import { type Bench, inWords, nodeProcess, quantile, time, usedResults } from "./harness.ts";

/** A clock that only work moves, and a diary of who worked. */
function staged(aMs: (round: number) => number, bMs: (round: number) => number) {
  let now = 0;
  const diary: string[] = [];
  const way = (name: string, cost: (round: number) => number) => {
    let round = 0;
    return {
      name,
      run() {
        diary.push(name);
        now += cost(round++);
        return 1;
      },
    };
  };
  const bench: Bench = {
    title: "staged",
    a: way("a", aMs),
    b: way("b", bMs),
    check: () => diary.push("check"),
    rounds: 5,
  };
  return { bench, diary, clock: () => now };
}

describe("the bench harness", () => {
  it("compares the answers before it times anything, and times nothing when they differ", async () => {
    const { bench, diary, clock } = staged(
      () => 1,
      () => 1,
    );
    await time(bench, clock);
    expect(diary[0]).toBe("check");
    const wrong = staged(
      () => 1,
      () => 1,
    );
    wrong.bench.check = () => {
      throw new Error("they differ");
    };
    await expect(time(wrong.bench, wrong.clock)).rejects.toThrow("they differ");
    expect(wrong.diary).toEqual([]);
  });

  it("lets the two take turns at going first, after two untimed rounds", async () => {
    const { bench, diary, clock } = staged(
      () => 1,
      () => 1,
    );
    await time(bench, clock);
    expect(diary.slice(1).join("")).toBe("abab" + "abbaabbaab");
  });

  it("reports the median of the timed rounds, which one stall does not move, and uses every result", async () => {
    const before = usedResults();
    // Rounds 0 and 1 are the untimed ones.
    const { bench, clock } = staged(
      (round) => [900, 900, 2, 2, 500, 2, 2][round],
      () => 4,
    );
    const timing = await time(bench, clock);
    expect(timing.aMedianMs).toBe(2);
    expect(timing.bMedianMs).toBe(4);
    expect(timing.ratio).toBe(0.5);
    expect(usedResults() - before).toBe(14);
    expect(inWords(timing)).toContain("ratio 0.500");
  });

  it("divides by how often a run does the work, and takes a way's own clock before its own", async () => {
    const { bench, clock } = staged(
      () => 6,
      () => 6,
    );
    bench.a.repeats = 3;
    const run = bench.b.run.bind(bench.b);
    bench.b.run = async () => ({ result: Number(run()), ms: 10 });
    const timing = await time(bench, clock);
    expect(timing.aMedianMs).toBe(2);
    expect(timing.bMedianMs).toBe(10);
  });

  it("lets go of both ways in the end, also when it failed", async () => {
    const { bench, clock } = staged(
      () => 1,
      () => 1,
    );
    let closed = 0;
    bench.a.close = bench.b.close = () => {
      closed++;
    };
    await time(bench, clock);
    expect(closed).toBe(2);
    bench.check = async () => {
      throw new Error("they differ");
    };
    await expect(time(bench, clock)).rejects.toThrow("they differ");
    expect(closed).toBe(4);
  });

  it("interpolates between sorted values", () => {
    expect(quantile([3, 1, 2], 0.5)).toBe(2);
    expect(quantile([4, 1, 2, 3], 0.5)).toBe(2.5);
    expect(quantile([0, 10], 0.25)).toBe(2.5);
  });

  it("does not pass off a process that failed as a fast one", () => {
    expect(() => nodeProcess("failing", ["-e", "process.exit(3)"], ".").run()).toThrow(/ended with 3/);
  });
});
