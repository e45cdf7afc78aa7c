/** A gauge that moves is read on all chambers at once: the cause they share is named, and not where one chamber moved alone. */
import { describe, expect, it } from "vitest";
import { allMoved } from "../../calibration/index.ts";
import { runAndLog, type VirtualLine, virtualLine } from "./virtual-line.ts";

const names = ["A1", "A2", "B1"];
const plan = names.map((name) => ({ name, runs: 24 }));

/** One run of every chamber, read with a gauge that is off. */
function round(line: VirtualLine, gauge: { index: number; factor: number } = { index: 0, factor: 1 }): void {
  for (const chamber of line.chambers) {
    runAndLog(chamber, line.world.start);
    const run = chamber.events.at(-1);
    if (run?.kind !== "run" || !run.film) continue;
    const { index, thicknessNm } = run.film;
    run.film = {
      ...run.film,
      index: index === null ? null : index + gauge.index,
      thicknessNm: thicknessNm === null ? null : thicknessNm * gauge.factor,
    };
  }
}

function settledLine(seed: string): VirtualLine {
  const line = virtualLine(seed, plan, { cycle: 20 });
  for (let i = 0; i < 3; i++) round(line);
  return line;
}

describe("all chambers at once", () => {
  it("are named together where the gauge reads index 0.03 low, with the shift, its onset and the runs since", () => {
    for (const seed of ["gauge 1", "gauge 2", "gauge 3"]) {
      const line = settledLine(seed);
      const first = (line.chambers[0].events.at(-1)?.entry ?? 0) + names.length;
      round(line, { index: -0.03, factor: 1 });
      round(line, { index: -0.03, factor: 1 });
      const found = allMoved(line.model(), "B1");
      expect(found?.probability).toBeGreaterThan(0.9);
      expect(found?.chambers).toEqual(names.map((chamber) => ({ chamber, runs: 2 })));
      expect(found?.onsetEntry).toBe(first);
      // The shift within three of the standard deviations it is given with.
      const index = found?.index ?? { mean: 0, sd: 0 };
      expect(Math.abs(index.mean + 0.03)).toBeLessThan(3 * index.sd);
      expect(index.sd).toBeLessThan(0.01);
    }
  });

  it("are not named where one chamber leaks and the others stay", () => {
    const line = settledLine("one leaks");
    line.chambers[0].virtual.leak(-0.08);
    for (let i = 0; i < 3; i++) round(line);
    expect(allMoved(line.model(), "A1")?.probability ?? 0).toBeLessThan(0.05);
  });

  it("are not looked at where the chamber asked about shows no move, or is alone", () => {
    const calm = settledLine("calm");
    expect(allMoved(calm.model(), "A1")?.probability ?? 0).toBeLessThan(0.05);
    const alone = virtualLine("alone", [{ name: "A1", runs: 24 }], { cycle: 20 });
    alone.chambers[0].virtual.leak(-0.08);
    for (let i = 0; i < 3; i++) round(alone);
    expect(allMoved(alone.model(), "A1")).toBeNull();
  });

  it("go by the moments given, not by the order of entry", () => {
    const line = settledLine("late entries");
    const before = (line.chambers[0].events.at(-1)?.entry ?? 0) + names.length;
    round(line, { index: -0.03, factor: 1 });
    round(line, { index: -0.03, factor: 1 });
    // A1's readings are said to be from long before the others': they no longer share a moment with them.
    const own = new Set(line.chambers[0].events.map((e) => e.entry));
    const order = (entry: number) => (own.has(entry) ? entry - 1e6 : entry);
    const found = allMoved(line.model(), "B1", order);
    expect(found?.chambers.map((c) => c.chamber)).toEqual(["A2", "B1"]);
    expect(found?.onsetEntry).toBe(before + 1);
  });
});
