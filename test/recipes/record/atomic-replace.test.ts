/** A file replaced is the old one or the new one, at every failure, kill or power loss; never half, never neither. */
import { mkdtempSync, readFileSync, rmSync, statSync, symlinkSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { realPorts } from "../../../cli/ports.ts";
import { hashOfFile, replaceFile } from "../../../recipes/record/atomic-replace.ts";
import { Book } from "../../../recipes/record/book.ts";
import { sha256 } from "../../../recipes/record/canonical.ts";
import { leftovers } from "../../../recipes/record/leftovers.ts";
import { faultyFiles, Killed } from "../../support/faulty-files.ts";
import { MemoryFiles, memoryPorts, seededRandom } from "../../support/memory-files.ts";

const PATH = "/line/line.yaml";
const bytes = (text: string): Uint8Array => new TextEncoder().encode(text);

function start(): MemoryFiles {
  const files = new MemoryFiles();
  files.put(PATH, "old text");
  return files;
}

describe("replacing a file", () => {
  it("puts the new content there and leaves no temporary file", () => {
    const files = start();
    replaceFile(memoryPorts(files), PATH, bytes("new"), sha256("old text"));
    expect(files.text(PATH)).toBe("new");
    expect(files.list("/line")).toEqual(["line.yaml"]);
  });

  it("is refused when the file changed since it was read, and touches nothing", () => {
    for (const expected of [sha256("what I read"), null]) {
      const files = start();
      expect(() => replaceFile(memoryPorts(files), PATH, bytes("new"), expected)).toThrow(/changed by somebody else/);
      expect(files.text(PATH)).toBe("old text");
      expect(files.list("/line")).toEqual(["line.yaml"]);
    }
  });

  it("makes a file that was not there, and knows when one has come since", () => {
    const files = new MemoryFiles();
    expect(hashOfFile({ files }, PATH)).toBe(null);
    replaceFile(memoryPorts(files), PATH, bytes("first"), null);
    expect(files.text(PATH)).toBe("first");
  });

  it("with an error at any call leaves the old or the new file, and no temporary", () => {
    const count = faultyFiles(start(), null);
    replaceFile(memoryPorts(count), PATH, bytes("new"), sha256("old text"));
    for (const how of ["EIO", "ENOSPC"]) {
      for (let at = 1; at <= count.calls(); at++) {
        const files = start();
        const faulty = faultyFiles(files, { at, how, from: "once" });
        let failed = false;
        try {
          replaceFile(memoryPorts(faulty), PATH, bytes("new"), sha256("old text"));
        } catch (error) {
          failed = true;
          expect(error).toMatchObject({ code: how === "EIO" ? "io-error" : "disk-full" });
        }
        expect(["old text", "new"]).toContain(files.text(PATH));
        if (!failed) expect(files.text(PATH)).toBe("new");
        expect(files.list("/line"), `${how} at ${faulty.trace().at(-1)}`).toEqual(["line.yaml"]);
      }
    }
  });

  it("killed at any call, and with any disk after it, leaves the old or the new file", () => {
    const count = faultyFiles(start(), null);
    replaceFile(memoryPorts(count), PATH, bytes("new"));
    const random = seededRandom(1);
    for (let at = 1; at <= count.calls() + 1; at++) {
      const files = start();
      let done = false;
      try {
        replaceFile(memoryPorts(faultyFiles(files, { at, how: "killed" })), PATH, bytes("new"));
        done = true;
      } catch (error) {
        expect(error).toBeInstanceOf(Killed);
      }
      for (let image = 0; image < 40; image++) {
        const text = files.afterPowerLoss(random).text(PATH);
        expect(done ? ["new"] : ["old text", "new"], `killed at ${at}`).toContain(text);
      }
    }
  });

  it("killed half-way, leaves a file that check can name; a line folder at rest has none", async () => {
    const named = new Set<string>();
    for (let at = 1; at < 40; at++) {
      const files = new MemoryFiles();
      const ports = memoryPorts(faultyFiles(files, { at, how: "killed" }));
      const work = async () => Book.open("/line", ports).append({ kind: "note", data: { text: "x" } });
      await work().catch((error: unknown) => expect(error).toBeInstanceOf(Killed));
      const known = new Set([".gitattributes", "book.jsonl", "book.head", "book.lock"]);
      const strange = files.list("/line").filter((name) => !known.has(name));
      const left = leftovers("/line", { files });
      expect(left.map(({ file }) => file)).toEqual(strange);
      for (const { what } of left) named.add(what);
    }
    expect([...named].sort()).toEqual(["a file that was to replace another", "a lock that was being taken"]);
  });

  it("on a real disk keeps permission bits and follows a symbolic link to the file it names", () => {
    const folder = mkdtempSync(join(tmpdir(), "coatwright-replace-"));
    try {
      const target = join(folder, "name with spaces \u00e9.yaml");
      writeFileSync(target, "old", { mode: 0o640 });
      symlinkSync(target, join(folder, "link.yaml"));
      replaceFile(realPorts(), join(folder, "link.yaml"), bytes("new"), sha256("old"));
      expect(readFileSync(target, "utf8")).toBe("new");
      if (process.platform !== "win32") expect(statSync(target).mode & 0o777).toBe(0o640);
    } finally {
      rmSync(folder, { recursive: true });
    }
  });
});
