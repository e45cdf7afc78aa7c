/**
 * The book between real processes on a real disk: many writers at once, and writers killed without warning. A writer is
 * a small program that appends runs and prints the number of each entry once it is acknowledged.
 */
import { type ChildProcess, spawn } from "node:child_process";
import { mkdtempSync, readdirSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { build } from "esbuild";
import { afterAll, beforeAll, expect, it } from "vitest";
import { realPorts } from "../../cli/ports.ts";
import { Book } from "../../recipes/record/book.ts";
import { seededRandom } from "../support/memory-files.ts";

const WRITER = `
  import { realPorts } from "./cli/ports.ts";
  import { Book } from "./recipes/record/book.ts";
  const [folder, name, count] = process.argv.slice(2);
  const book = Book.open(folder, { ...realPorts(), person: name });
  const steps = [{ settings: { silane: { value: 812, unit: "sccm" } } }];
  for (let i = 0; i < Number(count); i++) {
    const note = name + " " + i + " " + "x".repeat((i * 397) % 3000);
    const data = { chamber: "A2", recipe: "blue", settings_from: "given", steps, count: 1, readings: [], note };
    const { seq } = await book.append({ kind: "run", data });
    process.stdout.write(seq + " " + name + " " + i + "\\n");
  }
`;

let work: string;
let script: string;

beforeAll(async () => {
  work = mkdtempSync(join(tmpdir(), "coatwright-book-"));
  script = join(work, "writer.mjs");
  const resolveDir = join(import.meta.dirname, "../..");
  await build({
    stdin: { contents: WRITER, resolveDir, loader: "ts" },
    outfile: script,
    bundle: true,
    platform: "node",
    format: "esm",
    logLevel: "error",
  });
});
afterAll(() => rmSync(work, { recursive: true, force: true }));

interface Writer {
  child: ChildProcess;
  /** Acknowledged lines so far: "seq name i". */
  acknowledged(): string[];
  errors(): string;
  ended: Promise<number | null>;
}

function start(folder: string, name: string, count: number): Writer {
  const child = spawn(process.execPath, [script, folder, name, String(count)], { stdio: ["ignore", "pipe", "pipe"] });
  let out = "";
  let errors = "";
  child.stdout.on("data", (part: Buffer) => {
    out += part.toString();
  });
  child.stderr.on("data", (part: Buffer) => {
    errors += part.toString();
  });
  return {
    child,
    acknowledged: () => out.split("\n").slice(0, -1),
    errors: () => errors,
    ended: new Promise((resolve) => child.on("close", (code) => resolve(code))),
  };
}

/** "seq name i" of every run in the book, from what its own note says. */
function written(folder: string): string[] {
  const book = Book.open(folder, realPorts());
  expect(book.damage).toEqual([]);
  return book.entries.flatMap((entry) => {
    if (entry.kind !== "run") return [];
    const [name, i] = (entry.data.note ?? "").split(" ");
    return [`${entry.seq} ${name} ${i}`];
  });
}

it("eight processes appending fifty entries each at once lose none and interleave none", async () => {
  const folder = mkdtempSync(join(work, "many-"));
  const writers = Array.from({ length: 8 }, (_, n) => start(folder, `w${n}`, 50));
  const codes = await Promise.all(writers.map((writer) => writer.ended));
  expect(codes, writers.map((writer) => writer.errors()).join("\n")).toEqual(Array(8).fill(0));
  const found = written(folder);
  expect(found).toHaveLength(400);
  expect([...found].sort()).toEqual(writers.flatMap((writer) => writer.acknowledged()).sort());
  const book = Book.open(folder, realPorts());
  expect(book.entries.map((entry) => entry.seq)).toEqual([...Array(400).keys()]);
  expect(readdirSync(folder).sort()).toEqual([".gitattributes", "book.head", "book.jsonl"]);
});

it("of a writer killed twenty times without warning, every acknowledged entry is there", async () => {
  const folder = mkdtempSync(join(work, "killed-"));
  const random = seededRandom(20);
  const acknowledged: string[] = [];
  for (let kill = 0; kill < 20; kill++) {
    const writer = start(folder, `k${kill}`, 1_000_000);
    // let it come to work, then a moment that falls anywhere in an append
    while (writer.acknowledged().length < 3) {
      if (writer.child.exitCode !== null) expect.fail(writer.errors());
      await new Promise((resolve) => setTimeout(resolve, 2));
    }
    await new Promise((resolve) => setTimeout(resolve, random() * 40));
    writer.child.kill("SIGKILL");
    await writer.ended;
    acknowledged.push(...writer.acknowledged());
    const found = new Set(written(folder));
    expect(acknowledged.filter((line) => !found.has(line))).toEqual([]);
  }
  expect(acknowledged.length).toBeGreaterThan(60);
  const last = await Book.open(folder, realPorts()).append({ kind: "note", data: { text: "after all that" } });
  expect(last.seq).toBeGreaterThanOrEqual(acknowledged.length);
  expect(readdirSync(folder).filter((name) => name === "book.lock" || name.includes(".tmp-"))).toEqual([]);
});
