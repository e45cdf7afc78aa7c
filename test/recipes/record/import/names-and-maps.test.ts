/** Names in a file become paths and keys, so they must be names; what a map file gets wrong is named by key and place. */
import { describe, expect, it } from "vitest";
import { Refusal } from "../../../../engine/index.ts";
import { importRuns } from "../../../../recipes/desk/importing.ts";
import { demoLine } from "../../../support/desk-line.ts";

const HEAD = "chamber,at,recipe,silane_sccm,ammonia_sccm,time_s,index";
const ROW = "A2,2026-03-18T10:00:00Z,blue,812,6900,560,2.043";
const bytes = (text: string) => new TextEncoder().encode(text);

/** The problems that stop an import into the demo line, as "row:column code message hint"; none when it is taken. */
async function problems(csv: string, map?: string): Promise<string[]> {
  const ws = await demoLine();
  const given = map === undefined ? null : { file: "m.yaml", bytes: bytes(map) };
  try {
    await importRuns(ws, { file: "r.csv", bytes: bytes(csv), map: given }, { dryRun: false });
    return [];
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    return error.problems.map(({ file, row, column, code, message, hint }) =>
      [`${file}:${row}:${column}`, code, message, hint].join(" "),
    );
  } finally {
    // 155 entries is the demo line: all or nothing
    expect([155, 157]).toContain(ws.ledger.entries.length);
  }
}

const bad = ["../x", "a..b", "a b", ".x", "x".repeat(65), "__proto__", "constructor", "prototype"];

describe("a name in a file", () => {
  it.each(bad)("of a recipe: %j is refused by row and column", async (name) => {
    expect(await problems(`${HEAD}\n${ROW.replace("blue", name)}\n`)).toEqual([
      expect.stringMatching(/^r\.csv:2:3 bad-name /),
    ]);
  });

  it.each(bad)("of a step: %j is refused by row and column", async (name) => {
    expect(await problems(`${HEAD},step\n${ROW},${name}\n`)).toEqual([expect.stringMatching(/^r\.csv:2:8 bad-name /)]);
  });

  it.each(["__proto__", "constructor", "a/b", ""])("of a step in a heading: %j is refused there", async (name) => {
    const told = await problems(`${HEAD.replace("silane", `${name}.silane`)}\n${ROW}\n`);
    expect(told).toEqual([expect.stringMatching(/^r\.csv:1:4 bad-name /)]);
  });

  it("of a chamber must be one of the line, and of a person printable", async () => {
    expect((await problems(`${HEAD}\n${ROW.replace("A2", "__proto__")}\n`))[0]).toMatch(/^r\.csv:2:1 unknown-chamber/);
    expect((await problems(`${HEAD},by\n${ROW},a\u0007b\n`))[0]).toMatch(/^r\.csv:2:8 bad-name/);
  });

  it("that is one is taken", async () => {
    expect(await problems(`${HEAD},by\n${ROW.replace("blue", "Blue-2.1_a")},Ana Sá\n`)).toEqual([]);
  });
});

describe("a value in a file", () => {
  it.each([
    ["0", "impossible-setting"],
    ["80", "impossible-setting"],
    ["3700", "impossible-setting"],
    ["-5", "impossible-value"],
  ])("of silane, 300 to 1200 sccm: %s is impossible", async (value, code) => {
    const [told] = await problems(`${HEAD}\n${ROW.replace("812", value)}\n`);
    expect(told).toMatch(new RegExp(`^r\\.csv:2:4 ${code}`));
  });

  it.each(["250", "1300"])("of silane outside its range but near, %s, is recorded", async (value) => {
    expect(await problems(`${HEAD}\n${ROW.replace("812", value)}\n`)).toEqual([]);
  });

  it("comes from one column only", async () => {
    const told = await problems(`${HEAD},silane_slm\n${ROW},0.8\n`);
    expect(told).toEqual([expect.stringMatching(/^r\.csv:1:8 column-twice .*column 4/)]);
  });
});

describe("what is wrong in a map file", () => {
  it.each([
    ["skiplines: 2\n", /^m\.yaml:1:1 .*"skiplines" is not a key.*did you mean skip_lines/],
    ["\nskip_lines: many\n", /^m\.yaml:2:13 .*skip_lines.*whole number from 0 to 10000/],
    ["decimal: dot\n", /^m\.yaml:1:10 .*decimal.*point or comma/],
    ["separator: pipe\n", /^m\.yaml:1:12 .*"pipe".*semicolon/],
    ["encoding: constructor\n", /^m\.yaml:1:11 .*"constructor".*utf-8/],
    ["time_zone: Mars\n", /^m\.yaml:1:12 .*"Mars".*Europe\/Lisbon/],
    ["ignore: { a: 1 }\n", /^m\.yaml:1:9 .*ignore.*one heading, or a list/],
    ["columns: 3\n", /^m\.yaml:1:10 .*columns.*SiH4 flow: silane_sccm/],
    ["columns:\n  Flow: [ 1 ]\n", /^m\.yaml:2:9 .*columns: Flow/],
    ["columns:\n  AT: at\n  At: at\n", /^m\.yaml:3:3 .*twice/],
    ["- columns\n", /^m\.yaml:1:1 .*keys and values.*columns, ignore/],
    ["columns:\n  a: b\n  a: c\n", /^m\.yaml:3:3 .*twice/],
  ])("%j is named by key, place and what would do", async (map, says) => {
    const told = await problems(`${HEAD}\n${ROW}\n`, map);
    expect(told).toEqual([expect.stringMatching(says)]);
    expect(told[0]).not.toContain("Invalid input");
  });

  it("a column that means nothing is named with its meaning", async () => {
    const told = await problems(`${HEAD},flow\n${ROW},3\n`, "columns:\n  flow: presure_Pa\n");
    expect(told).toEqual([
      expect.stringMatching(/^r\.csv:1:8 .*"flow", mapped to "presure_Pa".*did you mean pressure_pa/i),
    ]);
  });
});
