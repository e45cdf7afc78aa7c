/** What a history cannot tell, on histories made to hide one thing each. */
import { describe, expect, it } from "vitest";
import { type ChamberEvent, LineModel, type Untold, type UntoldOptions, untold } from "../../calibration/index.ts";
import { random } from "../../engine/index.ts";
import { TUBE_START } from "../../recipes/rehearsal/worlds.ts";
import { levers } from "./virtual-line.ts";

type Factors = Partial<Record<string, number>>;

/** Runs at the start recipe times the factors given, read as whatever film: only the settings count here. */
function history(runs: readonly Factors[], options?: UntoldOptions): Untold[] {
  const source = random("identifiability");
  const events = runs.map((factors, i): ChamberEvent => {
    const settings = new Map([...TUBE_START].map(([name, v]) => [name, v * (factors[name] ?? 1)]));
    const film = {
      index: 2.04 + 0.003 * source.normal(),
      thicknessNm: 73 * (factors["time"] ?? 1) * (1 + 0.005 * source.normal()),
      gauge: [4e-6, 0, 0.09] as const,
    };
    return { kind: "run", entry: i + 1, settings, count: 1, sinceClean: null, film, light: [] };
  });
  const model = new LineModel([{ chamber: "A1", events }], {
    levers,
    reference: TUBE_START,
    aim: { index: 2.04, thicknessNm: 73 },
    facet: { mean: 1, sd: 0 },
    minimumOf: null,
  });
  return untold(model.chamber("A1"), levers, options);
}

/** 12 runs whose factors come from a function of two unlike, independent wiggles of a few per cent. */
const wiggled = (of: (a: number, b: number) => Factors) =>
  Array.from({ length: 12 }, (_, i) => of(1 + 0.04 * Math.sin(1 + 2.1 * i), 1 + 0.04 * Math.cos(1.3 * i)));
const kinds = (found: readonly Untold[]) => found.map((u) => u.kind);
const about = (found: readonly Untold[], kind: Untold["kind"]) => found.find((u) => u.kind === kind);

describe("what a history cannot tell", () => {
  it("is nothing of the settings that moved well and apart, and the others by name", () => {
    const found = history(wiggled((a, b) => ({ silane: a, ammonia: b })));
    expect(kinds(found)).toEqual(["never moved"]);
    expect(found[0].settings).toEqual(["time", "power", "pressure", "temperature"]);
  });

  it("is ratio against total flow where only silane moved, with the run that would tell", () => {
    const found = history(wiggled((a) => ({ silane: a })));
    const [first] = found;
    expect(first.kind).toBe("moved together");
    expect(first.settings).toEqual(["silane", "ammonia"]);
    expect(first.sentence).toContain("gas ratio and total flow cannot be told apart");
    expect(first.sentence).toContain("A run with ammonia 3 % higher would tell.");
  });

  it("is the ratio where both gases kept it", () => {
    const found = history(wiggled((a) => ({ silane: a, ammonia: a })));
    expect(about(found, "moved together")?.sentence).toContain("the gas ratio never moved, total flow alone did");
  });

  it("is two settings that always moved together, whatever the sign", () => {
    for (const sign of [1, -1]) {
      const found = history(wiggled((a, b) => ({ silane: a, ammonia: b, power: a ** sign })));
      const pair = about(found, "moved together");
      expect(pair?.settings).toEqual(["silane", "power"]);
      expect(pair?.sentence).toContain(`correlation ${sign < 0 ? "-" : ""}1.000`);
    }
  });

  it("is three settings that moved by one rule, though no two of them moved together", () => {
    const found = history(wiggled((a, b) => ({ silane: a, ammonia: b, power: a * b })));
    expect(about(found, "moved together")?.settings).toEqual(["silane", "ammonia", "power"]);
  });

  it("is the bend where the gases ran at two levels, and not where at three", () => {
    const at = (levelsOf: readonly number[]) =>
      history(
        Array.from({ length: 12 }, (_, i) => ({
          silane: levelsOf[i % levelsOf.length],
          ammonia: 1 + 0.04 * (Math.floor(i / 3) % 2),
        })),
      );
    expect(about(at([1, 1.04]), "two levels")?.settings).toEqual(["silane", "ammonia"]);
    expect(about(at([1, 1.04, 0.96]), "two levels")).toBeUndefined();
  });

  it("is a setting moved too little against the scatter, until runs make up for it", () => {
    const found = history(wiggled((a, b) => ({ silane: a, ammonia: b, power: 1 + 0.0004 * (a > 1 ? 1 : -1) })));
    expect(about(found, "hardly moved")?.settings).toEqual(["power"]);
    const gas = history(wiggled((a, b) => ({ silane: a, ammonia: 1 + 0.0004 * (b > 1 ? 1 : -1) })));
    expect(about(gas, "hardly moved")?.settings).toEqual(["ammonia"]);
    const wide = history(wiggled((a, b) => ({ silane: a, ammonia: b, power: 1 + 0.05 * Math.sin(a * b * 400) })));
    expect(about(wide, "hardly moved")).toBeUndefined();
  });

  it("is that few runs moved many settings", () => {
    const runs = wiggled((a, b) => ({ silane: a, ammonia: b, time: 2 - a, power: b * b }));
    expect(about(history(runs.slice(0, 4)), "too few runs")?.sentence).toContain("at least 5 are needed");
    expect(about(history(runs.slice(0, 6)), "too few runs")).toBeUndefined();
  });
});

describe("the list", () => {
  const crowded = wiggled((a) => ({ silane: a, time: a, power: a ** 2, pressure: 1 / a }));

  it("holds the most important, counts the rest, and names it", () => {
    const all = history(crowded, { most: 100 });
    expect(all.length).toBeGreaterThan(2);
    const short = history(crowded, { most: 2 });
    expect(short).toHaveLength(3);
    expect(short[2].kind).toBe("more");
    expect(short[2].sentence.startsWith(`${all.length - 2} more of the kind: `)).toBe(true);
  });

  it("puts the settings that may be tuned first", () => {
    const found = history(crowded, { most: 100, tunable: new Set(["pressure"]) });
    expect(found[0].settings).toContain("pressure");
  });

  it("says the run in the words it is given, the other way where that is free, and none where neither is", () => {
    const only = wiggled((a) => ({ silane: a }));
    const [up] = history(only, { move: (s, by) => (by > 0 ? `${s} at 7230 sccm` : null) });
    expect(up.sentence).toContain("A run with ammonia at 7230 sccm would tell.");
    const [down] = history(only, { move: (s, by) => (by < 0 ? `${s} at 6810 sccm` : null) });
    expect(down.sentence).toContain("A run with ammonia at 6810 sccm would tell.");
    const [none] = history(only, { move: () => null });
    expect(none.sentence).not.toContain("A run with");
  });

  it("is empty without a measured run", () => {
    const model = new LineModel([{ chamber: "A1", events: [] }], {
      levers,
      reference: TUBE_START,
      aim: { index: 2.04, thicknessNm: 73 },
      facet: { mean: 1, sd: 0 },
      minimumOf: null,
    });
    expect(untold(model.chamber("A1"), levers)).toEqual([]);
  });
});
