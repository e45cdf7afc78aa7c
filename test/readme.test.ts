/** The README's walk is run as written: every command, and every line of output shown must be printed, in that order. */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { type Program, program } from "./support/program.ts";
import { PROJECT } from "./support/source-tree.ts";

const readme = readFileSync(join(PROJECT, "README.md"), "utf8");

interface Step {
  words: string[];
  shown: string[];
}

/** Commands and shown output of all console blocks, in order. */
function steps(): Step[] {
  const out: Step[] = [];
  for (const [, block] of readme.matchAll(/```console\n([\s\S]*?)```/g))
    for (const line of block.split("\n")) {
      if (line.startsWith("$ coatwright")) out.push({ words: shellWords(line.slice(13)), shown: [] });
      else if (line.trim() !== "") out.at(-1)?.shown.push(line);
    }
  return out;
}

const shellWords = (text: string) => [...text.matchAll(/"([^"]*)"|(\S+)/g)].map(([, quoted, bare]) => quoted ?? bare);

let cw: Program;
beforeAll(async () => {
  cw = await program();
}, 60_000);
afterAll(() => cw.remove());

describe("the README's walk", () => {
  it("has the whole job in it", () => {
    const verbs = steps().map((s) => s.words[0]);
    for (const verb of ["new", "propose", "adopt", "enter", "run", "close", "report", "check"])
      expect(verbs).toContain(verb);
  });

  for (const { words, shown } of steps()) {
    it(`coatwright ${words.join(" ")}`, () => {
      const { status, stdout, stderr } = cw.run(words);
      expect(status, stderr).toBe(0);
      let from = 0;
      for (const line of shown) {
        const at = stdout.indexOf(line, from);
        expect(at, `"${line}" is printed, in order\n${stdout}`).toBeGreaterThanOrEqual(0);
        from = at + line.length;
      }
    });
  }
});
