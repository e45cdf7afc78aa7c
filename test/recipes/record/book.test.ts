/** The book's everyday life: what is appended is read back, by others too, and the chain holds. */
import { createHash } from "node:crypto";
import { describe, expect, it } from "vitest";
import { Book } from "../../../recipes/record/book.ts";
import { NO_HASH } from "../../../recipes/record/format.ts";
import { BOOK_PATH, bookOf, FOLDER, HEAD_PATH, runDraft, runNumbers } from "../../support/book-bench.ts";
import { MemoryFiles, memoryPorts } from "../../support/memory-files.ts";

describe("the book", () => {
  it("gives back what was appended, and a second reader sees the same", async () => {
    const { book, ports } = await bookOf(3);
    const other = Book.open(FOLDER, ports);
    expect(runNumbers(other)).toEqual([0, 1, 2]);
    expect(other.entries).toEqual(book.entries);
    expect(other.hash).toBe(book.hash);
    expect(other.damage).toEqual([]);
  });

  it("writes lines that a reader made from the header of format.ts alone verifies", async () => {
    const { files } = await bookOf(4, "Jos\u00e9");
    // this reader is written from the comment, not from the code
    let prev = "0".repeat(64);
    const lines = files.text(BOOK_PATH).split("\n");
    expect(lines.pop()).toBe("");
    for (const [i, line] of lines.entries()) {
      const bytes = Buffer.from(line, "utf8");
      const body = bytes.subarray(0, bytes.length - 75);
      const hash = createHash("sha256").update(body).digest("hex");
      expect(bytes.subarray(bytes.length - 75).toString()).toBe(`,"hash":"${hash}"}`);
      expect(body.subarray(body.length - 74).toString()).toBe(`,"prev":"${prev}"`);
      const entry: Record<string, unknown> = JSON.parse(line);
      expect(Object.keys(entry)).toEqual(["v", "seq", "at", "entered", "by", "kind", "data", "prev", "hash"]);
      expect(entry["seq"]).toBe(i);
      expect(entry["by"]).toBe("Jos\u00e9");
      prev = hash;
    }
    expect(files.text(HEAD_PATH)).toBe(`{"v":1,"seq":3,"hash":"${prev}"}\n`);
  });

  it("makes .gitattributes with its first entry and keeps what a person had in it", async () => {
    const { files } = await bookOf(1);
    expect(files.text("/line/.gitattributes")).toBe("book.jsonl -text\n");
    const kept = new MemoryFiles();
    kept.put("/line/.gitattributes", "*.png binary");
    const book = Book.open(FOLDER, memoryPorts(kept));
    await book.append(runDraft(0));
    await book.append(runDraft(1));
    expect(kept.text("/line/.gitattributes")).toBe("*.png binary\nbook.jsonl -text\n");
  });

  it("leaves no lock, no temporary file and no open handle", async () => {
    const { files } = await bookOf(3);
    expect(files.list(FOLDER)).toEqual([".gitattributes", "book.head", "book.jsonl"]);
    expect(files.openHandles()).toBe(0);
  });

  it("reads what another has written before it writes, so numbers never clash", async () => {
    const { files, book } = await bookOf(1);
    const other = Book.open(FOLDER, memoryPorts(files, { person: "Ben", pid: 7 }));
    const first = await other.append(runDraft(1));
    const second = await book.append(runDraft(2));
    expect([first.seq, second.seq]).toEqual([1, 2]);
    expect(other.refresh().map((entry) => entry.seq)).toEqual([2]);
    expect(runNumbers(other)).toEqual([0, 1, 2]);
    expect(other.entries.map((entry) => entry.by)).toEqual(["Ana", "Ben", "Ana"]);
  });

  it("is not written when somebody wrote to it without the lock in the meantime", async () => {
    const { files, book } = await bookOf(2);
    const rogue = book.write(() => {
      files.put(BOOK_PATH, files.text(BOOK_PATH) + "rogue");
      return [runDraft(2)];
    });
    await expect(rogue).rejects.toMatchObject({ code: "changed-meanwhile" });
    expect(files.text(BOOK_PATH).endsWith("rogue")).toBe(true);
    expect(files.list(FOLDER)).not.toContain("book.lock");
  });

  it("asks for the drafts under the lock, with the entries as they are then", async () => {
    const { files, book } = await bookOf(1);
    const other = Book.open(FOLDER, memoryPorts(files, { pid: 7 }));
    await other.append(runDraft(1));
    let seen = -1;
    let number = -1;
    const [receipt] = await book.write((entries, next) => {
      seen = entries.length;
      number = next;
      expect(files.exists("/line/book.lock")).toBe(true);
      return [runDraft(2)];
    });
    expect([seen, number, receipt.seq]).toEqual([2, 2, 2]);
  });

  it("keeps the time it happened and the time it was entered apart", async () => {
    const { book } = await bookOf(0);
    const { entry } = await book.append({ ...runDraft(0), at: "2026-02-28T23:40:00.000Z", by: "Cai" });
    expect([entry.at, entry.entered, entry.by]).toEqual([
      "2026-02-28T23:40:00.000Z",
      "2026-03-01T12:00:00.000Z",
      "Cai",
    ]);
  });

  it("says when the clock went back, and goes on by number", async () => {
    const files = new MemoryFiles();
    const ports = memoryPorts(files);
    const book = Book.open(FOLDER, ports);
    await book.append(runDraft(0));
    for (const ms of [ports.clock.ms - 86_400_000, 0, Date.UTC(2100, 0, 1)]) {
      ports.clock.ms = ms;
      const receipt = await book.append(runDraft(1));
      if (ms === Date.UTC(2100, 0, 1)) expect(receipt.notices).toEqual([]);
      else expect(receipt.notices.join()).toContain("the clock went back");
    }
    expect(Book.open(FOLDER, ports).entries.map((entry) => entry.seq)).toEqual([0, 1, 2, 3]);
  });

  it.each([
    ["a number that is none", runDraft(0, { count: Number.NaN }), "bad-entry"],
    ["an infinite setting", runDraft(0, { steps: [{ settings: { a: { value: Infinity, unit: "s" } } }] }), "bad-entry"],
    ["a time without a date", { ...runDraft(0), at: "12:00" }, "bad-time"],
    ["a day that does not exist", { ...runDraft(0), at: "2026-02-30T00:00:00.000Z" }, "bad-time"],
    ["nobody", { ...runDraft(0), by: "  " }, "nobody"],
    ["a note longer than a page", runDraft(0, { note: "x".repeat(4001) }), "bad-entry"],
  ] as const)("refuses %s and writes nothing", async (_, draft, code) => {
    const { files, book } = await bookOf(1);
    const before = files.text(BOOK_PATH);
    await expect(book.append(draft)).rejects.toMatchObject({ code });
    expect(files.text(BOOK_PATH)).toBe(before);
    expect(files.list(FOLDER)).not.toContain("book.lock");
  });

  it("refuses a line longer than the limit", async () => {
    const { book } = await bookOf(0);
    const site_values = Array.from({ length: 10_000 }, (_, i) => ({
      position: `boat ${i}`,
      site: "c".repeat(60),
      index: 2,
    }));
    const draft = runDraft(0, { readings: [{ gauge: "e", on: "polished", site_values }] });
    await expect(book.append(draft)).rejects.toMatchObject({ code: "too-long" });
  });

  it("an import is there as a whole: its entries are counted by the one before them", async () => {
    const { book, ports } = await bookOf(1);
    const receipts = await book.write(() => [
      { kind: "import", data: { file: "old.csv", entries: 2, skipped: 0 } },
      runDraft(1),
      runDraft(2),
    ]);
    expect(receipts.map((one) => one.seq)).toEqual([1, 2, 3]);
    expect(runNumbers(Book.open(FOLDER, ports))).toEqual([0, 1, 2]);
    const short = book.write(() => [
      { kind: "import", data: { file: "old.csv", entries: 2, skipped: 0 } },
      runDraft(1),
    ]);
    await expect(short).rejects.toMatchObject({ code: "bad-entry" });
  });

  it("an empty folder has an empty book, and writing nothing writes nothing", async () => {
    const files = new MemoryFiles();
    const book = Book.open(FOLDER, memoryPorts(files));
    expect([book.entries.length, book.hash]).toEqual([0, NO_HASH]);
    expect(await book.write(() => [])).toEqual([]);
    expect(files.list(FOLDER)).toEqual([]);
  });
});
