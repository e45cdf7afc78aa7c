/** Mistakes made on purpose in the readings of virtual chambers: each is named for what it was, with what would set it right. */
import { describe, expect, it } from "vitest";
import { filmMoments, readingMistakes } from "../../calibration/index.ts";
import { runAndLog, type VirtualLine, virtualLine } from "./virtual-line.ts";

type Film = { index: number; thicknessNm: number };

function lineWith(seed: string, facet = { mean: 0.85, sd: 0.05 }): VirtualLine {
  const line = virtualLine(
    seed,
    [
      { name: "A1", runs: 24 },
      { name: "A2", runs: 24 },
    ],
    { cycle: 20 },
  );
  line.options.facet = facet;
  // Twice the optical thickness: where a film of that index has its minimum, near enough to carry the facet factor.
  line.options.minimumOf = (index, facetNm) => 4 * index * facetNm;
  return line;
}

/** One more run of a chamber, its reading as somebody wrote it down. */
function misread(
  line: VirtualLine,
  chamber: 0 | 1,
  write: (film: Film) => Film,
  longer = 1,
): { entry: number; film: Film } {
  const one = line.chambers[chamber];
  const { start } = line.world;
  runAndLog(one, new Map(start).set("time", Math.round((start.get("time") as number) * longer)));
  const run = one.events.at(-1);
  if (run?.kind !== "run" || run.film?.index == null || run.film.thicknessNm === null) throw new Error("no reading");
  const film = { index: run.film.index, thicknessNm: run.film.thicknessNm };
  run.film = { ...run.film, ...write(film) };
  return { entry: run.entry, film };
}

function exchange(line: VirtualLine, a: readonly [0 | 1, number], b: readonly [0 | 1, number]): void {
  const of = ([chamber, entry]: readonly [0 | 1, number]) => {
    const run = line.chambers[chamber].events.find((e) => e.entry === entry);
    if (run?.kind !== "run") throw new Error("a run was expected");
    return run;
  };
  const [one, other] = [of(a), of(b)];
  [one.film, other.film] = [other.film, one.film];
}

describe("a thickness typed in another unit", () => {
  for (const factor of [10, 0.1, 1000, 0.001])
    it(`is a slip of units where it is ${factor} times what was read, and moves nothing`, () => {
      const line = lineWith("unit");
      const before = filmMoments(line.model().chamber("A1").law(line.world.start));
      const { entry, film } = misread(line, 0, (f) => ({ ...f, thicknessNm: f.thicknessNm * factor }));
      const model = line.model();
      const [found] = readingMistakes(model, "A1");
      expect(found).toMatchObject({ name: "unit_slip", entry, other: null });
      expect(found.probability).toBeGreaterThan(0.9);
      expect(found.corrected).toHaveLength(1);
      expect(found.corrected[0]).toMatchObject({ entry, from: entry, field: "thicknessNm", over: factor });
      expect(found.corrected[0].value).toBeCloseTo(film.thicknessNm, 6);
      const after = filmMoments(model.chamber("A1").law(line.world.start));
      expect(Math.abs(Math.exp(after.lnThickness) - Math.exp(before.lnThickness))).toBeLessThan(0.3);
    });

  it("is told of an index without its decimal point", () => {
    const line = lineWith("point");
    const { entry, film } = misread(line, 0, (f) => ({ ...f, index: f.index * 1000 }));
    const [found] = readingMistakes(line.model(), "A1");
    expect(found).toMatchObject({ name: "unit_slip", entry });
    expect(found.corrected[0].value).toBeCloseTo(film.index, 9);
  });

  it("is told of a reflectance minimum in micrometres", () => {
    const line = lineWith("minimum");
    const { entry } = misread(line, 0, (f) => f);
    const run = line.chambers[0].events.at(-1);
    if (run?.kind === "run") run.light = [{ kind: "reflectance_minimum_nm", value: 0.604, sd: 2 }];
    const [found] = readingMistakes(line.model(), "A1");
    expect(found.corrected).toEqual([{ entry, from: entry, field: "reflectanceMinimumNm", value: 604, over: 0.001 }]);
  });
});

describe("readings exchanged", () => {
  it("between two runs 6 % apart in time are named once, with both entries and both corrections", () => {
    const line = lineWith("exchanged");
    const a = misread(line, 0, (f) => f);
    const b = misread(line, 0, (f) => f, 1.06);
    exchange(line, [0, a.entry], [0, b.entry]);
    const found = readingMistakes(line.model(), "A1");
    expect(found).toHaveLength(1);
    expect(found[0].name).toBe("swapped_rows");
    expect([found[0].entry, found[0].other?.entry].sort()).toEqual([a.entry, b.entry]);
    const right = new Map(found[0].corrected.filter((c) => c.field === "thicknessNm").map((c) => [c.entry, c.value]));
    expect(right.get(a.entry)).toBeCloseTo(a.film.thicknessNm, 6);
    expect(right.get(b.entry)).toBeCloseTo(b.film.thicknessNm, 6);
  });

  it("between two chambers of one import are named with the other chamber", () => {
    const line = lineWith("two chambers");
    const a = misread(line, 0, (f) => f);
    const b = misread(line, 1, (f) => f, 1.12);
    exchange(line, [0, a.entry], [1, b.entry]);
    const [found] = readingMistakes(line.model(), "A1");
    expect(found).toMatchObject({ name: "swapped_rows", entry: a.entry, other: { chamber: "A2", entry: b.entry } });
  });
});

describe("a textured wafer read as the witness", () => {
  const textured = (f: Film) => ({ index: f.index - 0.04, thicknessNm: f.thicknessNm * 0.85 });
  it("is the wrong wafer where the line's facet factor is 0.85, and has no value to correct to", () => {
    const line = lineWith("textured");
    const { entry } = misread(line, 0, textured);
    const [found] = readingMistakes(line.model(), "A1");
    expect(found).toMatchObject({ name: "wrong_wafer", entry, corrected: [] });
  });

  it("is just a bad reading on a line of polished wafers", () => {
    const line = lineWith("textured", { mean: 1, sd: 0 });
    misread(line, 0, textured);
    expect(readingMistakes(line.model(), "A1")).toEqual([]);
  });
});

describe("ordinary readings", () => {
  it("are no mistakes, nor is a reading that is bad in no way one could name", () => {
    const line = lineWith("ordinary");
    expect(readingMistakes(line.model(), "A1")).toEqual([]);
    misread(line, 0, (f) => ({ index: f.index + 0.06, thicknessNm: f.thicknessNm - 5 }));
    expect(readingMistakes(line.model(), "A1")).toEqual([]);
  });
});
