/** A real full disk and a real read-only mount. Needs root on Linux, who may write to any file, so only a mount can refuse. */
import { execFileSync } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, unlinkSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { realPorts } from "../../cli/ports.ts";
import { Book } from "../../recipes/record/book.ts";
import { runDraft, runNumbers } from "../support/book-bench.ts";

function tryMount(): string | null {
  if (process.platform !== "linux" || process.getuid?.() !== 0) return null;
  const folder = mkdtempSync(join(tmpdir(), "coatwright-disk-"));
  try {
    execFileSync("mount", ["-t", "tmpfs", "-o", "size=64k", "tmpfs", folder], { stdio: "ignore" });
    return folder;
  } catch {
    rmSync(folder, { recursive: true });
    return null;
  }
}
const possible = ((): boolean => {
  const folder = tryMount();
  if (folder !== null) release(folder);
  return folder !== null;
})();
function release(folder: string): void {
  execFileSync("umount", [folder]);
  rmSync(folder, { recursive: true });
}

describe.skipIf(!possible)("a disk of 64 kB", () => {
  it("that fills up while appending refuses, keeps all acknowledged entries, and goes on when space is freed", async () => {
    const folder = tryMount()!;
    try {
      writeFileSync(join(folder, "ballast"), Buffer.alloc(24_000));
      const book = Book.open(folder, realPorts());
      const acknowledged: number[] = [];
      let code = "";
      for (let n = 0; code === "" && n < 1000; n++) {
        try {
          await book.append(runDraft(n));
          acknowledged.push(n);
        } catch (error) {
          code = (error as { code: string }).code;
        }
      }
      expect(code).toBe("disk-full");
      expect(acknowledged.length).toBeGreaterThan(3);
      const found = Book.open(folder, realPorts());
      expect([found.damage, runNumbers(found)]).toEqual([[], acknowledged]);
      unlinkSync(join(folder, "ballast"));
      await found.append(runDraft(777));
      expect(runNumbers(Book.open(folder, realPorts()))).toEqual([...acknowledged, 777]);
    } finally {
      release(folder);
    }
  });

  it("mounted read-only is read, and writing is refused before any work", async () => {
    const folder = tryMount()!;
    try {
      await Book.open(folder, realPorts()).append(runDraft(1));
      const before = readFileSync(join(folder, "book.jsonl"));
      execFileSync("mount", ["-o", "remount,ro", folder]);
      const book = Book.open(folder, realPorts());
      expect(runNumbers(book)).toEqual([1]);
      await expect(book.append(runDraft(2))).rejects.toMatchObject({ code: "read-only" });
      expect(readFileSync(join(folder, "book.jsonl"))).toEqual(before);
    } finally {
      release(folder);
    }
  });
});
