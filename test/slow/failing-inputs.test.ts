/** Every failing input ends in a clear error that says what, where and what would be right, and changes nothing. */
import { spawnSync } from "node:child_process";
import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { type Program, program } from "../support/program.ts";

let cw: Program;
let line: string;
const book = () => readFileSync(join(line, "book.jsonl"));

beforeAll(async () => {
  cw = await program();
  line = join(cw.folder, "line");
  expect(cw.run(["new", "line", "--demo"]).status).toBe(0);
}, 60_000);
afterAll(() => cw.remove());

const csv = (text: string) => {
  writeFileSync(join(cw.folder, "runs.csv"), text);
  return ["import", "runs.csv", "--line", "line"];
};
const head = "chamber,at,recipe,silane_sccm,ammonia_sccm,time_s,index,thickness_nm\n";

/** What is typed, the exit, and what the error must say. */
const cases: [string, () => string[], number, RegExp][] = [
  ["a wrong unit", () => ["run", "A2", "2.05", "84.1", "--set", "time=560sccm", "--line", "line"], 2, /time.*sccm/],
  ["a decimal comma", () => ["run", "A2", "2,05", "84.1", "--line", "line"], 2, /decimal|comma|2\.05/],
  [
    "a thousands comma",
    () => ["record", "run", "--chamber", "A2", "--set", "ammonia=6,900sccm", "--line", "line"],
    2,
    /comma|6900/,
  ],
  ["a missing unit", () => ["run", "A2", "2.05", "84.1", "--set", "time=560", "--line", "line"], 2, /unit.*560 s|560/],
  ["NaN", () => ["run", "A2", "NaN", "84.1", "--line", "line"], 2, /NaN/],
  ["index and thickness swapped", () => ["run", "A2", "84.1", "2.05", "--line", "line"], 2, /impossible.*1\.3 to 4/s],
  ["an unknown chamber", () => ["run", "a2", "2.05", "84.1", "--line", "line"], 2, /did you mean A2/],
  [
    "an unknown setting",
    () => ["run", "A2", "2.05", "84.1", "--set", "silan=800sccm", "--line", "line"],
    2,
    /did you mean silane/,
  ],
  ["an unknown verb", () => ["propos", "--chamber", "A2"], 2, /did you mean propose/],
  ["an unknown flag", () => ["propose", "--chambre", "A2", "--line", "line"], 2, /did you mean --chamber/],
  ["a missing argument", () => ["propose", "--line", "line"], 2, /needs --chamber/],
  [
    "a recipe outside the window",
    () => ["record", "recipe", "--chamber", "A2", "--recipe", "blue", "--set", "silane=1150sccm", "--line", "line"],
    2,
    /window/,
  ],
  [
    "a recipe outside a range",
    () => ["record", "recipe", "--chamber", "A2", "--recipe", "blue", "--set", "time=1000s", "--line", "line"],
    2,
    /200 s to 900 s/,
  ],
  [
    "a setting no tool can have run",
    () => ["run", "A1", "2.06", "88.5", "--set", "silane=80sccm", "--line", "line"],
    2,
    /cannot have run on A1.*digit dropped/s,
  ],
  [
    "a negative setting",
    () => ["run", "A1", "2.06", "88.5", "--set", "silane=-5sccm", "--line", "line"],
    2,
    /cannot have run/,
  ],
  [
    "a recipe nobody stated",
    () => ["run", "A1", "2.06", "88.5", "--recipe", "blu", "--line", "line"],
    2,
    /did you mean blue/,
  ],
  [
    "a name that is a path",
    () => ["run", "A1", "2.06", "88.5", "--recipe", "../../etc", "--line", "line"],
    2,
    /cannot be a name/,
  ],
  [
    "a time to come",
    () => ["run", "A1", "2.06", "88.5", "--at", "2090-01-01T10:00:00Z", "--line", "line"],
    2,
    /future/,
  ],
  ["a nameless person", () => ["run", "A1", "2.06", "88.5", "--by", "", "--line", "line"], 2, /not a name/],
  [
    "weighted reflectance without its unit",
    () => ["record", "run", "--chamber", "A1", "--weighted-reflectance", "0.023", "--line", "line"],
    2,
    /no unit/,
  ],
  [
    "two columns for one setting",
    () => csv("chamber,at,recipe,silane_sccm,silane_slm,index\nA1,2026-03-15T10:00:00Z,blue,812,0.5,2.05\n"),
    2,
    /runs\.csv:1:5.*again/s,
  ],
  [
    "a far-off setting in a file",
    () => csv(`${head}A1,2026-03-15T10:00:00Z,blue,80,7000,560,2.05,84.1\n`),
    2,
    /runs\.csv:2:4/,
  ],
  ["a folder without a name", () => ["new", ""], 2, /needs DIR/],
  ["a folder where none can be", () => ["new", "/proc/nowhere/line"], 2, /could not make the folder/],
  ["a folder for a file", () => ["import", ".", "--line", "line"], 2, /is a folder/],
  ["no line folder", () => ["check", "--line", "nowhere"], 2, /no line\.yaml/],
  [
    "a proposal that is not one",
    () => ["adopt", "c-000001", "--reason", "x", "--line", "line"],
    2,
    /is a change, a proposal is needed/,
  ],
  ["closing what is not there", () => ["close", "c-000999", "--line", "line"], 2, /no change c-000999/],
  ["an empty file", () => csv(""), 2, /runs\.csv.*no table/s],
  ["a missing column", () => csv("at,recipe,index\n2026-03-01T10:00:00Z,blue,2.05\n"), 2, /chamber/],
  ["a column without unit", () => csv("chamber,at,silane,index\nA1,2026-03-01T10:00:00Z,800,2.05\n"), 2, /silane/],
  [
    "a decimal comma in a file",
    () => csv(`${head}A1,2026-03-15T10:00:00Z,blue,800,7000,560,"2,05",84.1\n`),
    2,
    /runs\.csv:2:7/,
  ],
  ["a NaN in a file", () => csv(`${head}A1,2026-03-15T10:00:00Z,blue,800,7000,560,2.05,nan\n`), 2, /runs\.csv:2:8/],
  [
    "a bad row behind good ones",
    () =>
      csv(
        `${head}A1,2026-03-15T10:00:00Z,blue,800,7000,560,2.05,84.1\nA9,2026-03-15T11:00:00Z,blue,800,7000,560,2.05,84.1\n`,
      ),
    2,
    /runs\.csv:3:1/,
  ],
];

describe("a failing input", () => {
  for (const [title, words, status, says] of cases) {
    it(`${title}: says so and changes nothing`, () => {
      const before = book();
      const ended = cw.run(words());
      expect(ended.status).toBe(status);
      expect(ended.stderr).toMatch(says);
      expect(ended.stderr).not.toMatch(/at .*\.(ts|mjs):\d+/); // no stack traces for what a person typed
      expect(ended.stdout).toBe("");
      expect(book().equals(before)).toBe(true);
    });
  }

  it("with --json is one document with code, message and place", () => {
    const ended = cw.run([...csv(`${head}A1,2026-03-15T10:00:00Z,blue,800,7000,560,2.05,nan\n`), "--json"]);
    const { schema, error } = JSON.parse(ended.stdout);
    expect(schema).toBe(1);
    expect(error).toMatchObject({ file: "runs.csv", row: 2, column: 8 });
    expect(error.code).toMatch(/^[a-z-]+$/);
  });

  it("in line.yaml is named by row and column, and a damaged book by its entry", () => {
    const other = join(cw.folder, "broken");
    expect(cw.run(["new", "broken", "--demo"]).status).toBe(0);
    const text = readFileSync(join(other, "line.yaml"), "utf8");
    writeFileSync(join(other, "line.yaml"), text.replace("2.06 within 0.02", "2,06 within 0.02"));
    const checked = cw.run(["check", "--line", "broken"]);
    expect(checked.status).toBe(3);
    expect(checked.stdout).toMatch(/line\.yaml:\d+:\d+: .*comma/);
    writeFileSync(join(other, "line.yaml"), text);
    const bytes = readFileSync(join(other, "book.jsonl"));
    bytes[bytes.indexOf("84", 2000)] = 0x39;
    writeFileSync(join(other, "book.jsonl"), bytes);
    const damaged = cw.run(["check", "--line", "broken"]);
    expect(damaged.status).toBe(3);
    expect(damaged.stdout).toMatch(/book\.jsonl:\d+/);
    expect(cw.run(["run", "A2", "2.05", "84", "--line", "broken"]).status).toBe(3);
  });
});

describe("a pipe", () => {
  it("closed early ends quietly", () => {
    const words = [
      "-c",
      `"${process.execPath}" dist/coatwright.mjs chamber A2 --line line --json | head -c 1 > nothing`,
    ];
    const { stderr } = spawnSync("bash", words, { cwd: cw.folder, encoding: "utf8" });
    expect(stderr).toBe("");
  });

  it("carries no escape codes", () => {
    for (const words of [[], ["chamber", "A2"], ["propose", "--chamber", "A1", "--dry-run"]])
      expect(cw.run([...words, ...(words.length ? ["--line", "line"] : [])]).stdout).not.toContain("\u001b");
  });
});

describe("a wrong entry", () => {
  it("is corrected by a new one, and what rested on it is named", () => {
    expect(cw.run(["new", "wrong", "--demo"]).status).toBe(0);
    const at = ["--line", "wrong"];
    const run = JSON.parse(cw.run(["run", "A2", "2.05", "48.1", "--json", ...at]).stdout) as { entry: number };
    cw.run(["propose", "--chamber", "A2", ...at]);
    const done = JSON.parse(
      cw.run([
        "correct",
        String(run.entry),
        "thickness=84.1nm",
        "time=550s",
        "--reason",
        "digits swapped",
        "--json",
        ...at,
      ]).stdout,
    );
    expect(done).toMatchObject({ corrects: run.entry, rests: [`p-${String(run.entry + 1).padStart(6, "0")}`] });
    const { stdout } = cw.run(["propose", "--chamber", "A2", "--dry-run", ...at]);
    expect(stdout).toMatch(/84\.\d nm on average/);
    expect(cw.run(["correct", "9999", "index=2", "--reason", "x", ...at]).stderr).toMatch(/no entry 9999/);
    expect(cw.run(["correct", String(run.entry), "silan=800sccm", "--reason", "x", ...at]).status).toBe(2);
  });
});
