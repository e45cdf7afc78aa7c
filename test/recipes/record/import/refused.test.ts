/** Files of runs that are refused: every problem named by row and column, and nothing imported. */
import { describe, expect, it } from "vitest";
import { Refusal } from "../../../../engine/index.ts";
import { readLine } from "../../../../recipes/line/read-line.ts";
import { DEMO_LINE } from "../../../../recipes/line/template.ts";
import { type ImportRequest, planImport } from "../../../../recipes/record/import/import.ts";
import { readImportMap } from "../../../../recipes/record/import/map-file.ts";
import { emptyLedger } from "../../../../recipes/record/ledger.ts";

const line = readLine(DEMO_LINE, "line.yaml");
const NOW = Date.UTC(2026, 5, 1);
const HEAD = "chamber,at,recipe,silane_sccm,ammonia_sccm,time_s,index,thickness_nm";
const ROW = "A2,2026-03-01T10:00,blue,812,6900,560,2.043,84.1";

function plan(text: string | Uint8Array, more: Partial<ImportRequest> = {}) {
  const bytes = typeof text === "string" ? new TextEncoder().encode(text) : text;
  return planImport({ bytes, file: "old.csv", line, ledger: emptyLedger(), nowMs: NOW, ...more });
}
const mapped = (map: unknown): Partial<ImportRequest> => ({ map: readImportMap(map) });

function problemsOf(text: string | Uint8Array, more: Partial<ImportRequest> = {}) {
  try {
    plan(text, more);
  } catch (error) {
    if (error instanceof Refusal) return error.problems;
    throw error;
  }
  return expect.fail("was not refused");
}

describe("an import that is refused", () => {
  const row = (changes: Record<string, string>): string => {
    const cells = ROW.split(",");
    for (const [name, value] of Object.entries(changes)) cells[HEAD.split(",").indexOf(name)] = value;
    return `${HEAD}\n${ROW}\n${cells.join(",")}\n`;
  };

  it.each([
    ["a decimal comma in quotes", row({ index: '"2,043"' }), { code: "decimal-comma", row: 3, column: 7 }],
    ["a thousands comma in quotes", row({ ammonia_sccm: '"6,900"' }), { code: "decimal-comma", row: 3, column: 5 }],
    ["NaN", row({ index: "NaN" }), { code: "not-a-number", row: 3, column: 7 }],
    ["an infinity", row({ index: "inf" }), { code: "not-a-number", row: 3, column: 7 }],
    ["a number too large for any", row({ index: "1e999" }), { code: "not-a-number", row: 3, column: 7 }],
    ["a hexadecimal number", row({ index: "0x2" }), { code: "not-a-number", row: 3, column: 7 }],
    [
      "a unit in the cell",
      row({ silane_sccm: "812 sccm" }),
      { code: "not-a-number", row: 3, column: 4, hint: "the unit belongs in the heading" },
    ],
    ["an index below any film's", row({ index: "1.29" }), { code: "impossible-value", row: 3, column: 7 }],
    [
      "a thickness in the place of the index",
      row({ index: "84.1" }),
      { code: "impossible-value", hint: "is it the thickness?" },
    ],
    ["a thickness beyond the possible", row({ thickness_nm: "2001" }), { code: "impossible-value", row: 3, column: 8 }],
    ["a negative flow", row({ silane_sccm: "-1" }), { code: "impossible-value", row: 3, column: 4 }],
    ["no time at all", row({ time_s: "0" }), { code: "impossible-value", row: 3, column: 6 }],
    ["a chamber of another line", row({ chamber: "Z9" }), { code: "unknown-chamber", row: 3, column: 1 }],
    ["a chamber in other capitals", row({ chamber: "a2" }), { code: "unknown-chamber", hint: "it is written A2" }],
    ["no chamber", row({ chamber: "" }), { code: "missing-value", row: 3, column: 1 }],
    ["no time", row({ at: "" }), { code: "missing-value", row: 3, column: 2 }],
    ["a time without a date", row({ at: "23:40" }), { code: "not-a-time", row: 3, column: 2 }],
    ["a day that does not exist", row({ at: "2026-02-30T10:00" }), { code: "not-a-time", row: 3, column: 2 }],
    ["an American date", row({ at: "3/1/2026 10:00" }), { code: "not-a-time", row: 3, column: 2 }],
    ["a time that came twice", row({ at: "2025-10-26T01:30" }), { code: "ambiguous-time", row: 3, column: 2 }],
    ["a time that never came", row({ at: "2026-03-29T01:30" }), { code: "missing-time", row: 3, column: 2 }],
    ["a time to come", row({ at: "2026-07-01T10:00" }), { code: "in-the-future", row: 3, column: 2 }],
    ["a setting left out", row({ silane_sccm: "" }), { code: "missing-setting", row: 3 }],
    ["a recipe left out where none is known", row({ recipe: "" }), { code: "missing-recipe", row: 3 }],
    ["a row too short", `${HEAD}\nA2,2026-03-01T10:00\n`, { code: "wrong-length", row: 2 }],
    [
      "a bare decimal comma",
      `${HEAD}\n${ROW.replace("2.043", "2,043")}\n`,
      { code: "wrong-length", row: 2, hint: expect.stringContaining("decimal comma") },
    ],
    ["a quote out of place", `${HEAD}\nA2,"2026`, { code: "not-a-table" }],
    ["an empty file", "", { code: "empty-file" }],
    ["a picture", "\u0089PNG\u0000\u0001", { code: "not-a-table", row: 1 }],
  ])("because of %s, named by row and column", (_, text, problem) => {
    expect(problemsOf(text)[0]).toMatchObject({ file: "old.csv", ...problem });
  });

  it.each([
    ["an unknown column", "speed_of_light", { code: "unknown-column", column: 9 }],
    [
      "a misspelt one, with the right word",
      "thicknes_nm",
      { code: "unknown-column", hint: expect.stringContaining("thickness_nm") },
    ],
    [
      "a setting without a unit",
      "power",
      { code: "missing-unit", column: 9, hint: expect.stringContaining("power_kW") },
    ],
    ["a film value without a unit", "thickness", { code: "missing-unit", column: 9, hint: "write thickness_nm" }],
    ["a unit of another dimension", "power_sccm", { code: "wrong-unit", column: 9 }],
    ["a column that comes twice", "INDEX", { code: "column-twice", column: 9 }],
  ])("because of %s", (_, heading, problem) => {
    expect(problemsOf(`${HEAD},${heading}\n${ROW},1\n`)[0]).toMatchObject({ row: 1, ...problem });
  });

  it.each([
    ["chamber", "at,silane_sccm\n2026-03-01T10:00,812\n"],
    ["at", "chamber,silane_sccm\nA2,812\n"],
  ])("because there is no column %s", (name, text) => {
    expect(problemsOf(text)[0]).toMatchObject({ code: "missing-column", message: expect.stringContaining(name) });
  });

  it("because of a decimal point where a comma was declared", () => {
    const text = `${HEAD}\n${ROW}\n`.replaceAll(",", ";");
    expect(problemsOf(text, mapped({ decimal: "," }))[0]).toMatchObject({ code: "decimal-point", row: 2, column: 7 });
  });

  it("because an event is none, a count is none, or a service says nothing", () => {
    const text =
      "chamber,at,event,count\nA2,2026-03-01T10:00Z,party,\nA2,2026-03-01T10:00Z,precoat,1.5\nA2,2026-03-01T10:00Z,service,\n";
    expect(problemsOf(text).map(({ code, row }) => [code, row])).toEqual([
      ["unknown-word", 2],
      ["not-a-count", 3],
      ["missing-value", 4],
    ]);
  });

  it("because an index was read on a textured cell", () => {
    expect(problemsOf(`${HEAD},on\n${ROW},cell\n`)[0]).toMatchObject({ code: "index-on-texture", row: 2, column: 7 });
  });

  it("names all problems, up to fifty, and counts the rest", () => {
    const bad = `${HEAD}\n${`${ROW.replace("2.043", "NaN").replace("84.1", "-3")}\n`.repeat(40)}`;
    const problems = problemsOf(bad);
    expect(problems).toHaveLength(51);
    expect(problems.slice(0, 3).map(({ row: at, column }) => [at, column])).toEqual([
      [2, 7],
      [2, 8],
      [3, 7],
    ]);
    expect(problems[50]).toMatchObject({ code: "more-problems", message: "and 30 more problems" });
  });

  it("keeps rows right below a quoted cell with line ends in it", () => {
    const text = `${HEAD},note\n${ROW},"two\nlines"\n${ROW.replace("2.043", "x")},\n`;
    expect(problemsOf(text)[0]).toMatchObject({ row: 4, column: 7 });
  });
});

describe("an import map", () => {
  it.each([
    ["an unknown key", { colums: {} }],
    ["a decimal sign that is none", { decimal: "'" }],
    ["a separator that is none", { separator: "pipe" }],
    ["an encoding not known", { encoding: "ebcdic" }],
    ["a zone that is none", { time_zone: "Lisbon" }],
    ["a list", [1]],
    ["a negative count", { skip_lines: -1 }],
  ])("is refused for %s", (_, map) => {
    expect(() => readImportMap(map)).toThrow(Refusal);
  });

  it("is refused when it names a column that the file does not have", () => {
    const text = `${HEAD}\n${ROW}\n`;
    expect(problemsOf(text, mapped({ ignore: ["shift"] }))[0].code).toBe("no-such-heading");
    expect(problemsOf(text, mapped({ columns: { Ofen: "chamber" } }))[0].code).toBe("no-such-heading");
  });
});
