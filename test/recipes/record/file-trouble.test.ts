/** What the system says becomes an answer with a stable code and a way out; what is no file trouble is not swallowed. */
import { describe, expect, it } from "vitest";
import { fileRefusal, folderOf, inFolder, quietly, writeAll } from "../../../recipes/record/file-trouble.ts";
import { MemoryFiles } from "../../support/memory-files.ts";

const failure = (code: string): Error => Object.assign(new Error(code), { code });

describe("file trouble", () => {
  it.each([
    ["ENOSPC", "disk-full"],
    ["EDQUOT", "disk-full"],
    ["EFBIG", "disk-full"],
    ["EROFS", "read-only"],
    ["EACCES", "read-only"],
    ["EPERM", "read-only"],
    ["EIO", "io-error"],
    ["EMFILE", "io-error"],
    ["ESTALE", "io-error"],
  ])("%s is answered as %s, with the file and a way out", (system, code) => {
    const refusal = fileRefusal(failure(system), "write the entry", "book.jsonl", 918);
    expect(refusal.code).toBe(code);
    expect(refusal.problems[0]).toMatchObject({ file: "book.jsonl", hint: expect.stringMatching(/./) });
    expect(refusal.message).toContain(system);
  });

  it("an error of the program passes through, also while tidying up", () => {
    const fault = new TypeError("ours");
    expect(() => fileRefusal(fault, "write", "x")).toThrow(fault);
    expect(() =>
      quietly(() => {
        throw fault;
      }),
    ).toThrow(fault);
  });

  it("a write that makes no progress is refused, not tried for ever", () => {
    const files = new MemoryFiles();
    const handle = files.createExclusive("/line/a");
    files.write = () => 0;
    expect(() => writeAll(files, handle, Uint8Array.of(1, 2))).toThrow(/took none of 2 bytes/);
  });

  it("paths are put together and apart", () => {
    expect([inFolder("/line", "a"), inFolder("/", "a"), folderOf("/line/a"), folderOf("/a"), folderOf("a")]).toEqual([
      "/line/a",
      "/a",
      "/line",
      "/",
      ".",
    ]);
  });
});
