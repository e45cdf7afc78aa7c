/** What stands in the way on the disk, or at the other end of a pipe, is said in short, with the way out, and leaves nothing behind. */
import { spawnSync } from "node:child_process";
import { appendFileSync, cpSync, existsSync, mkdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { type Ended, type Program, program } from "../support/program.ts";

let cw: Program;
const at = (...parts: string[]) => join(cw.folder, ...parts);
/** A fresh copy of the demo line. */
const copy = (name: string): string => {
  cpSync(at("line"), at(name), { recursive: true });
  return name;
};
const short = ({ stderr }: Ended) => {
  expect(stderr).not.toMatch(/at .*\.(ts|mjs):\d+/);
  expect(stderr.length).toBeLessThan(1000);
};

beforeAll(async () => {
  cw = await program();
  expect(cw.run(["new", "line", "--demo"]).status).toBe(0);
  writeFileSync(at("file"), "x");
}, 60_000);
afterAll(() => cw.remove());

describe("new", () => {
  it.each([
    ["file", /a file of that name is in the way/],
    ["file/below", /in the way|a part of the path is a file/],
    [`fresh/below/${"a".repeat(300)}`, /the name is too long/],
  ])("%s: says what is in the way and makes nothing", (dir, says) => {
    const ended = cw.run(["new", dir, "--demo"]);
    expect(ended.status).toBe(2);
    expect(ended.stderr).toMatch(says);
    short(ended);
    expect(existsSync(at("fresh"))).toBe(false);
    expect(readFileSync(at("file"), "utf8")).toBe("x");
  });
});

describe("a folder where a file belongs", () => {
  it.each([
    ["book.lock", ["run", "A2", "2.05", "85"], /book\.lock is a folder.*remove or rename it/s],
    ["line.yaml", ["check"], /line\.yaml is a folder.*move the folder away/s],
    ["line.yaml", [], /line\.yaml is a folder/],
    ["book.jsonl", ["chamber", "A2"], /book: it is a folder.*move the folder away/s],
  ])("%s, met by %j, is named with the way out", (name, words, says) => {
    const line = copy("folders");
    rmSync(at(line, name), { force: true });
    mkdirSync(at(line, name));
    const ended = cw.run([...words, "--line", line]);
    rmSync(at(line), { recursive: true });
    expect(ended.status).toBe(2);
    expect(ended.stderr).toMatch(says);
    short(ended);
  });
});

describe("a file where the views' folder belongs", () => {
  it("keeps neither a run from being recorded nor the line from being checked", () => {
    const line = copy("no-views");
    rmSync(at(line, "recipes"), { recursive: true });
    writeFileSync(at(line, "recipes"), "x");
    const run = cw.run(["run", "A2", "2.05", "85", "--line", line]);
    expect([run.status, run.stderr]).toEqual([0, expect.stringMatching(/views could not be written/)]);
    expect(cw.run(["check", "--line", line]).status).toBe(0);
  });
});

describe("a book that is not whole", () => {
  it("with a torn tail is good, and the note says how many bytes nobody acknowledged", () => {
    const line = copy("torn");
    appendFileSync(at(line, "book.jsonl"), '{"torn');
    const { status, stdout } = cw.run(["check", "--line", line]);
    expect(status).toBe(0);
    expect(stdout).toMatch(/note: .* 6 bytes .*never acknowledged; the next writer sets them aside/);
    // the facet factor was pinned by the book: what the declared one spans is no news
    expect(stdout).toMatch(/pinned at 0\.8\d+ sd 0\.\d+ by 15 reflectance minima/);
    expect(stdout).not.toMatch(/facet factor alone spans/);
  });

  it("with a changed line says so at every verb, and how to go on, and blames no view", () => {
    const line = copy("damaged");
    const rows = readFileSync(at(line, "book.jsonl"), "utf8").split("\n");
    rows[39] = rows[39].replace('"by":"', '"by":"X');
    writeFileSync(at(line, "book.jsonl"), rows.join("\n"));
    const checked = cw.run(["check", "--line", line]);
    expect(checked.status).toBe(3);
    expect(checked.stdout).toMatch(/book\.jsonl:40: .*put the file back from a copy/);
    expect(checked.stdout).not.toMatch(/edited by hand/);
    for (const words of [
      ["report"],
      ["chamber", "A2"],
      ["predict", "--chamber", "A2"],
      ["record", "note", "--text", "x", "--dry-run"],
      ["enter", "c-000150"],
    ]) {
      const ended = cw.run([...words, "--line", line]);
      expect([words[0], ended.status]).toEqual([words[0], 3]);
      expect(ended.stderr).toMatch(/book\.jsonl:40: .*\n.*put the file back from a copy/);
    }
  });
});

describe.skipIf(!existsSync("/dev/full"))("a full disk behind stdout", () => {
  it.each([["chamber A2 --line line"], ["run A2 2.05 85 --line line --json"], ["--help"]])(
    "%s: one short line on stderr and exit 1",
    (words) => {
      const command = `"${process.execPath}" dist/coatwright.mjs ${words} > /dev/full`;
      const { status, stderr } = spawnSync("bash", ["-c", command], { cwd: cw.folder, encoding: "utf8" });
      expect(stderr).toBe("could not print (ENOSPC); what was recorded stays recorded\n");
      expect(status).toBe(1);
    },
  );
});

describe("words", () => {
  it.each([
    [["record", "--line", "line"], /^record what\?\n.*run, reading, recipe, clean/],
    [["run", "A2", "2,043", "84", "--line", "line"], /write 2\.043 with a decimal point, or 2043/],
    [["import", "", "--line", "line"], /no file is named/],
    [["import", ".", "--line", "line"], /is a folder/],
    [["film", "."], /is a folder/],
  ])("%j: says what is missing", (words, says) => {
    const ended = cw.run(words);
    expect(ended.status).toBe(2);
    expect(ended.stderr).toMatch(says);
    short(ended);
  });

  it("count what they count: 1 entry, and as many numbers as entries imported", () => {
    expect(cw.run(["new", "own"]).status).toBe(0);
    expect(cw.run(["check", "--line", "own"]).stdout).toMatch(/all good: 1 entry,/);
    const line = copy("counted");
    const rows = ["chamber,at,event", ...[1, 2, 3].map((hour) => `A2,2026-03-15T0${hour}:00:00Z,clean`)];
    writeFileSync(at("cleans.csv"), rows.join("\n"));
    const { imported, entries } = JSON.parse(cw.run(["import", "cleans.csv", "--line", line, "--json"]).stdout);
    expect([imported, entries.last - entries.first + 1]).toEqual([3, 3]);
    writeFileSync(at("cleans.csv"), `${rows[0]}\nA2,2026-03-15T05:00:00Z,clean\n`);
    const one = cw.run(["import", "cleans.csv", "--line", line]).stdout;
    expect(one).toContain(`imported 1 entry, #${entries.last + 2}\n`);
  });
});
