/** `film --improve` and `film --colours` as a person or a script calls them. */
import { describe, expect, it } from "vitest";
import { argsFromWords } from "../../../cli/args.ts";
import { verbNamed } from "../../../cli/verbs/table.ts";
import type { Call, Outcome } from "../../../cli/verbs/verb.ts";
import { refusalCode } from "../../support/refusal.ts";

const film = verbNamed("film");
const LIGHT = "light: { step: 40 nm }\n";
const DOUBLE = `${LIGHT}film:
  - { material: silica, thickness: 75 nm may be 0..200 nm }
  - { material: silicon nitride, index: 2.06 may be 1.95..2.13, thickness: 60 nm may be 20..120 nm }
`;
const SINGLE = `${LIGHT}film:\n  - { material: silicon nitride, index: 2.06, thickness: may be 40..120 nm }\n`;

function call(text: string, ...words: string[]): Outcome {
  const readFile = () => new TextEncoder().encode(text);
  const args = argsFromWords(film, ["stack.yaml", ...words]);
  return film.run({ args, readFile } as unknown as Call) as Outcome;
}
interface Improved {
  goal_met: boolean;
  loss_ma_cm2: number;
  unknowns: {
    layer: number;
    material: string;
    what: string;
    value: number;
    start: number | null;
    at_bound: string | null;
    flat: { low: number; high: number } | null;
  }[];
  optima: { values: number[]; loss_ma_cm2: number; goals: { goal: string; missed_by: number }[] }[];
  misses?: { goal: string; found: number; missed_by: number }[];
  start: { loss_ma_cm2: number } | null;
  held: {
    layers: { layer: number; index: number }[];
    cost_ma_cm2: number | null;
    optics_alone: { layer: number; index: number }[];
  } | null;
}
const improvedOf = (outcome: Outcome) => outcome.document.improved as Improved;

describe("film --improve", () => {
  it("gives the film document of the improved stack, with what to set beside", () => {
    const outcome = call(DOUBLE, "--improve");
    const improved = improvedOf(outcome);
    expect(outcome.exit).toBe(0);
    const { available, into_substrate } = outcome.document.current_ma_cm2 as {
      available: number;
      into_substrate: number;
    };
    expect(Math.abs(available - into_substrate - improved.loss_ma_cm2)).toBeLessThan(1e-9);
    expect(improved.unknowns.map(({ layer, material, what, start }) => [layer, material, what, start])).toEqual([
      [1, "silica", "thickness_nm", 75],
      [2, "silicon nitride", "thickness_nm", 60],
      [2, "silicon nitride", "index", 2.06],
    ]);
    for (const { flat, value } of improved.unknowns) {
      expect(flat?.low).toBeLessThanOrEqual(value);
      expect(flat?.high).toBeGreaterThanOrEqual(value);
    }
    expect(improved.optima[0].values).toEqual(improved.unknowns.map(({ value }) => value));
    expect(improved.start?.loss_ma_cm2).toBeGreaterThan(improved.loss_ma_cm2);
    expect(improved.held?.layers).toEqual([{ layer: 2, index: 2.06 }]);
    expect(improved.held?.optics_alone).toEqual([{ layer: 2, index: improved.unknowns[2].value }]);
    expect(improved.held?.cost_ma_cm2).toBeGreaterThan(0);
    expect(improved.misses).toBeUndefined();
  });

  it("tells a person what to set, how flat it is, and what holding the index costs", () => {
    const outcome = call(DOUBLE, "--improve");
    const { unknowns, held } = improvedOf(outcome);
    expect(outcome.text).toMatch(/^the least light lost \(\d+ searches, \d+ stacks\)\n/);
    expect(outcome.text).toContain(
      `set layer 1 silica           thickness  ${unknowns[0].value.toFixed(1).padStart(6)} nm   flat `,
    );
    expect(outcome.text).toContain(
      `layer 2 at 2.060: it costs ${held?.cost_ma_cm2?.toFixed(3)} mA/cm2; optics alone would choose ${unknowns[2].value.toFixed(3)}`,
    );
    expect(outcome.text).toContain("weighted reflectance");
  });

  it("ends with 3 where the goal is out of reach, naming what the nearest film misses", () => {
    const outcome = call(`${SINGLE}goal: { weighted_reflectance: at most 2 % }\n`, "--improve");
    expect(outcome.exit).toBe(3);
    const { goal_met, misses, unknowns } = improvedOf(outcome);
    expect([goal_met, misses?.map(({ goal }) => goal), unknowns[0].flat]).toEqual([
      false,
      ["weighted_reflectance_percent"],
      null,
    ]);
    expect(outcome.text).toMatch(/^out of reach: /);
    expect(outcome.text).toMatch(
      /weighted reflectance 9\.\d+ % \(at most 2 %\): MISSED by \d+\.\d\d tenths of the limit/,
    );
  });

  it("ends with 0 where it is met", () => {
    const outcome = call(`${SINGLE}goal: { reflectance_minimum: 640 nm within 5 nm }\n`, "--improve");
    expect([
      outcome.exit,
      improvedOf(outcome).goal_met,
      improvedOf(outcome).optima[0].goals[0].missed_by < 1e-4,
    ]).toEqual([0, true, true]);
    expect(outcome.text).toMatch(/^every goal met, then the least light lost/);
    expect(Math.abs((outcome.document.reflectance_minimum_nm as number) - 640)).toBeLessThan(5.02);
  });

  it("is refused where nothing is left open, and an open value without it", () => {
    expect(refusalCode(() => call(SINGLE.replace("may be 40..120 nm", "75 nm"), "--improve"))).toBe(
      "nothing-to-improve",
    );
    expect(refusalCode(() => call(SINGLE))).toBe("needs-improve");
    expect(refusalCode(() => call(DOUBLE, "--improve", "--colours"))).toBe("bad-argument");
  });

  it("is pointed to where a goal is read without it", () => {
    const goal = "goal: { weighted_reflectance: at most 2 % }\n";
    expect(call(DOUBLE).notices).toEqual([]);
    expect(call(`${DOUBLE}${goal}`).notices?.[0]).toContain("--improve");
  });
});

describe("film --colours", () => {
  const FIXED = SINGLE.replace("may be 40..120 nm", "75 nm");

  it("gives the colour by thickness, as text and rows", () => {
    const outcome = call(FIXED, "--colours", "--from", "60nm", "--to", "100nm", "--step", "20nm");
    const rows = outcome.document.rows as { thickness_nm: number; hex: string; words: string }[];
    expect(rows.map((row) => row.thickness_nm)).toEqual([60, 80, 100]);
    for (const { hex, words } of rows) {
      expect(outcome.text).toContain(hex);
      expect(outcome.text).toContain(words);
    }
    // at the thickness of the file it is the film verb's own colour
    const same = call(FIXED, "--colours", "--from", "75nm", "--to", "76nm", "--step", "1nm").document
      .rows as typeof rows;
    expect(same[0].hex).toBe((call(FIXED).document.colour as { hex: string }).hex);
  });

  it("asks which layer where there are several, and takes only layers that are there", () => {
    expect(refusalCode(() => call(DOUBLE, "--colours"))).toBe("missing-argument");
    expect(refusalCode(() => call(DOUBLE, "--colours", "--layer", "3"))).toBe("unknown-layer");
    expect(refusalCode(() => call(DOUBLE, "--layer", "1"))).toBe("bad-argument");
    expect(call(DOUBLE, "--colours", "--layer", "2").document.material).toBe("silicon nitride");
  });
});
