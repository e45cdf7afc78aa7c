/**
 * An interrupted append: the end of the book cut at every byte, zeros or garbage behind it. It is set aside, never
 * deleted, told of once, and no acknowledged entry is lost.
 */
import { beforeAll, describe, expect, it } from "vitest";
import { Book } from "../../../recipes/record/book.ts";
import { encodeHead } from "../../../recipes/record/format.ts";
import { BOOK_PATH, bookOf, copyOf, FOLDER, HEAD_PATH, runDraft, runNumbers } from "../../support/book-bench.ts";
import { type MemoryFiles, memoryPorts } from "../../support/memory-files.ts";

let good: MemoryFiles;
let bytes: Uint8Array;
let lastStart: number;
let hashes: string[];

beforeAll(async () => {
  const { files, book } = await bookOf(4);
  good = files;
  bytes = files.read(BOOK_PATH);
  lastStart = bytes.subarray(0, -1).lastIndexOf(0x0a) + 1;
  hashes = book.entries.map((entry) => entry.hash);
});

/** A folder with this book, whose head names entry `head`. */
function folderWith(content: Uint8Array, head: number | null): MemoryFiles {
  const files = copyOf(good);
  files.put(BOOK_PATH, content);
  if (head === null) files.remove(HEAD_PATH);
  else files.put(HEAD_PATH, encodeHead(head, hashes[head]));
  return files;
}
const concat = (...parts: Uint8Array[]): Uint8Array => Uint8Array.from(parts.flatMap((part) => [...part]));
const tornFiles = (files: MemoryFiles): string[] => files.list(FOLDER).filter((name) => name.startsWith("book.torn-"));

/** Appends to the folder and checks that entries 0..kept-1 are there, the torn bytes are aside and told of. */
async function expectHealed(files: MemoryFiles, kept: number, torn: Uint8Array): Promise<void> {
  const book = Book.open(FOLDER, memoryPorts(files));
  expect(book.damage).toEqual([]);
  expect(book.entries).toHaveLength(kept);
  const receipt = await book.append(runDraft(77));
  const [name, ...more] = tornFiles(files);
  expect(more).toEqual([]);
  expect(files.read(`${FOLDER}/${name}`)).toEqual(torn);
  expect(receipt.notices.join()).toContain("interrupted append");
  const again = Book.open(FOLDER, memoryPorts(files));
  expect(again.damage).toEqual([]);
  expect(again.entries[kept]).toMatchObject({ kind: "torn", data: { file: name, bytes: torn.length } });
  expect(runNumbers(again)).toEqual([...Array(kept).keys(), 77]);
  expect((await again.append(runDraft(78))).notices).toEqual([]);
}

describe("a torn tail", () => {
  it("cut at every byte of an entry not acknowledged, is set aside and told of by the next entry", async () => {
    for (let cut = lastStart + 1; cut < bytes.length; cut++) {
      await expectHealed(folderWith(bytes.slice(0, cut), 2), 3, bytes.slice(lastStart, cut));
    }
  });

  it("without any head file too", async () => {
    for (let cut = lastStart + 1; cut < bytes.length; cut += 5) {
      await expectHealed(folderWith(bytes.slice(0, cut), null), 3, bytes.slice(lastStart, cut));
    }
  });

  it("of NULs or garbage, with line ends in it or not, is set aside when all acknowledged entries stand before it", async () => {
    let state = 12345;
    const random = (): number => {
      state = (state * 1103515245 + 12345) % 2147483648;
      return state >> 16;
    };
    for (const length of [1, 2, 3, 10, 75, 149, 512, 4096]) {
      await expectHealed(folderWith(concat(bytes, new Uint8Array(length)), 3), 4, new Uint8Array(length));
      const garbage = Uint8Array.from({ length }, () => random() & 0xff);
      await expectHealed(folderWith(concat(bytes, garbage), 3), 4, garbage);
      await expectHealed(
        folderWith(concat(bytes, garbage, Uint8Array.of(0x0a)), 3),
        4,
        concat(garbage, Uint8Array.of(0x0a)),
      );
    }
  });

  it("an acknowledged entry that lost only its line end is kept, and the line end put back", async () => {
    const files = folderWith(bytes.slice(0, -1), 3);
    const book = Book.open(FOLDER, memoryPorts(files));
    expect(book.entries).toHaveLength(4);
    const receipt = await book.append(runDraft(4));
    expect(receipt.seq).toBe(4);
    expect(receipt.notices.join()).toContain("complete again");
    expect(tornFiles(files)).toEqual([]);
    expect(runNumbers(Book.open(FOLDER, memoryPorts(files)))).toEqual([0, 1, 2, 3, 4]);
  });

  it("of an acknowledged entry cut shorter is damage, not a torn tail: it is refused", async () => {
    for (let cut = lastStart; cut < bytes.length - 1; cut += 3) {
      const files = folderWith(bytes.slice(0, cut), 3);
      const book = Book.open(FOLDER, memoryPorts(files));
      expect(book.damage[0]).toMatchObject({
        entry: 3,
        offset: lastStart,
        kind: cut === lastStart ? "loss" : "unreadable",
      });
      await expect(book.append(runDraft(9))).rejects.toMatchObject({ code: "damaged-book" });
      expect(tornFiles(files)).toEqual([]);
    }
  });

  it("garbage in front of entries that were written after the head lagged is damage, not a tail", () => {
    const damaged = concat(bytes.slice(0, lastStart), new TextEncoder().encode("garbage\n"), bytes.slice(lastStart));
    expect(Book.open(FOLDER, memoryPorts(folderWith(damaged, 2))).damage[0]).toMatchObject({ entry: 3 });
  });

  it("an import cut at every byte leaves none of its entries", async () => {
    const { files, ports, book } = await bookOf(2);
    const head = files.read(HEAD_PATH);
    const before = files.size(BOOK_PATH);
    await book.write(() => [
      { kind: "import", data: { file: "a.csv", entries: 2, skipped: 0 } },
      runDraft(2),
      runDraft(3),
    ]);
    const whole = files.read(BOOK_PATH);
    for (let cut = before + 1; cut < whole.length; cut += 3) {
      files.put(BOOK_PATH, whole.slice(0, cut));
      files.put(HEAD_PATH, head);
      const found = Book.open(FOLDER, ports);
      expect(found.damage).toEqual([]);
      expect(runNumbers(found)).toEqual([0, 1]);
      expect(found.tail).toMatchObject({ offset: before, bytes: cut - before });
    }
    files.put(BOOK_PATH, whole.slice(0, whole.length - 1));
    const healed = Book.open(FOLDER, ports);
    await healed.append(runDraft(9));
    expect(runNumbers(Book.open(FOLDER, ports))).toEqual([0, 1, 9]);
    expect(files.read(`${FOLDER}/${tornFiles(files)[0]}`)).toEqual(whole.slice(before, whole.length - 1));
  });

  it("an acknowledged import that lost its end is damage", async () => {
    const { files, ports, book } = await bookOf(2);
    await book.write(() => [
      { kind: "import", data: { file: "a.csv", entries: 2, skipped: 0 } },
      runDraft(2),
      runDraft(3),
    ]);
    const lines = files.text(BOOK_PATH).split("\n").slice(0, 4);
    files.put(BOOK_PATH, lines.join("\n") + "\n");
    expect(Book.open(FOLDER, ports).damage[0]).toMatchObject({ kind: "loss" });
  });
});
