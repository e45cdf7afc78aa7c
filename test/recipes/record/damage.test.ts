/**
 * Whatever happens to the bytes of a book is noticed and named: every single byte, lines moved, doubled or lost, line
 * ends converted. Truth here is what the test did to the file.
 */
import { createHash } from "node:crypto";
import { beforeAll, describe, expect, it } from "vitest";
import { Book } from "../../../recipes/record/book.ts";
import type { Damage } from "../../../recipes/record/damage.ts";
import { BOOK_PATH, bookOf, copyOf, FOLDER, HEAD_PATH, runDraft } from "../../support/book-bench.ts";
import { type MemoryFiles, memoryPorts } from "../../support/memory-files.ts";

const ENTRIES = 5;
let good: MemoryFiles;
let bytes: Uint8Array;
let starts: number[];
let lines: string[];

beforeAll(async () => {
  good = (await bookOf(ENTRIES)).files;
  bytes = good.read(BOOK_PATH);
  lines = good.text(BOOK_PATH).trimEnd().split("\n");
  starts = [0];
  for (const line of lines) starts.push(starts[starts.length - 1] + line.length + 1);
});

function openWith(content: Uint8Array | string): Book {
  const files = copyOf(good);
  files.put(BOOK_PATH, content);
  return Book.open(FOLDER, memoryPorts(files));
}
const found = (content: Uint8Array | string): readonly Damage[] => openWith(content).damage;
const text = (list: readonly string[]): string => list.map((line) => line + "\n").join("");

describe("damage", () => {
  it("any byte flipped anywhere is noticed, and the entry it lies in is named with its place", () => {
    for (let i = 0; i < bytes.length; i++) {
      const entry = starts.findLastIndex((start) => start <= i);
      for (const flip of [0x01, 0x20, 0x80]) {
        const changed = bytes.slice();
        changed[i] ^= flip;
        const [first] = found(changed);
        if (first?.entry !== entry || first.offset !== starts[entry] || first.row !== entry + 1) {
          expect.fail(`byte ${i} ^ ${flip}: ${JSON.stringify(first)} instead of entry ${entry}`);
        }
      }
    }
  });

  it("any byte taken out or put in is noticed, and the entry is named", () => {
    // without its very last byte the book is whole but for a line end: torn-tail.test.ts
    for (let i = 0; i < bytes.length - 1; i += 7) {
      const entry = starts.findLastIndex((start) => start <= i);
      const without = Uint8Array.from([...bytes.slice(0, i), ...bytes.slice(i + 1)]);
      const within = Uint8Array.from([...bytes.slice(0, i), 0x37, ...bytes.slice(i)]);
      expect(found(without)[0]?.entry, `without byte ${i}`).toBe(entry);
      // a digit put exactly before a line belongs to that line
      expect(found(within)[0]?.entry, `within byte ${i}`).toBe(entry);
    }
  });

  it("names a line that was removed", () => {
    for (let k = 0; k < ENTRIES - 1; k++) {
      const damage = found(text(lines.filter((_, i) => i !== k)));
      expect(damage[0]).toMatchObject({ entry: k, kind: "gap", offset: starts[k] });
    }
  });

  it("names two lines that were swapped", () => {
    for (let k = 0; k + 1 < ENTRIES; k++) {
      const swapped = [...lines];
      [swapped[k], swapped[k + 1]] = [swapped[k + 1], swapped[k]];
      const damage = found(text(swapped));
      expect(damage.map((one) => one.kind)).toContain("swapped");
      expect(damage[0].entry).toBe(k);
    }
  });

  it("names a line that is there twice", () => {
    for (let k = 0; k < ENTRIES; k++) {
      const damage = found(text([...lines.slice(0, k + 1), ...lines.slice(k)]));
      expect(damage).toEqual([expect.objectContaining({ entry: k, kind: "duplicate" })]);
    }
  });

  it("names a line from another book", async () => {
    const other = await bookOf(ENTRIES, "Eve");
    const foreign = other.files.text(BOOK_PATH).split("\n");
    const damage = found(text([...lines.slice(0, 3), foreign[3], ...lines.slice(4)]));
    expect(damage[0]).toMatchObject({ entry: 3, kind: "broken chain" });
  });

  it("names a line that follows rightly but has a wrong number", () => {
    const body = lines[2].slice(0, -75).replace('"seq":2', '"seq":7');
    const hash = createHash("sha256").update(body).digest("hex");
    expect(found(text([...lines.slice(0, 2), `${body},"hash":"${hash}"}`]))[0]).toMatchObject({
      entry: 2,
      kind: "gap",
    });
  });

  it("names converted line ends once, with how many", () => {
    const damage = found(text(lines).replaceAll("\n", "\r\n"));
    expect(damage).toHaveLength(1);
    expect(damage[0]).toMatchObject({ entry: 0, kind: "CRLF line ends" });
    expect(damage[0].message).toContain(`${ENTRIES} lines`);
  });

  it("names a byte-order mark and NUL bytes", () => {
    expect(found("\ufeff" + text(lines))[0]).toMatchObject({ entry: 0, kind: "byte-order mark" });
    const zeros = bytes.slice();
    zeros.fill(0, starts[2] + 10, starts[2] + 40);
    expect(found(zeros)[0]).toMatchObject({ entry: 2, kind: "NUL bytes", offset: starts[2] });
  });

  it("names every one of several damages", () => {
    const changed = bytes.slice();
    changed[starts[1] + 30] ^= 1;
    changed[starts[4] + 30] ^= 1;
    expect(found(changed).map((one) => one.entry)).toEqual([1, 4]);
  });

  it("knows from book.head that whole entries were cut off at the end", () => {
    for (let kept = 0; kept < ENTRIES; kept++) {
      const damage = found(text(lines.slice(0, kept)));
      expect(damage).toEqual([expect.objectContaining({ entry: kept, kind: "loss" })]);
    }
  });

  it("knows from book.head that the book was exchanged for another", async () => {
    const other = await bookOf(ENTRIES, "Eve");
    expect(found(other.files.read(BOOK_PATH))).toEqual([
      expect.objectContaining({ entry: ENTRIES - 1, kind: "other head" }),
    ]);
  });

  it("a head that lags or is gone is no damage, only said", () => {
    const files = copyOf(good);
    files.put(HEAD_PATH, `{"v":1,"seq":2,"hash":"${JSON.parse(lines[2]).hash}"}\n`);
    expect(Book.open(FOLDER, memoryPorts(files)).damage).toEqual([]);
    files.put(HEAD_PATH, "?");
    const book = Book.open(FOLDER, memoryPorts(files));
    expect([book.damage.length, book.notices.length]).toEqual([0, 1]);
  });

  it("writing to a damaged book is refused with the place, and the file is not touched", async () => {
    const files = copyOf(good);
    const changed = bytes.slice();
    changed[starts[3] + 25] ^= 1;
    files.put(BOOK_PATH, changed);
    const book = Book.open(FOLDER, memoryPorts(files));
    expect(book.entries).toHaveLength(3);
    const problem = { code: "damaged-book", row: 4, file: "book.jsonl" };
    await expect(book.append(runDraft(9))).rejects.toMatchObject({ code: "damaged-book", problems: [problem] });
    expect(files.read(BOOK_PATH)).toEqual(changed);
    expect(book.problems()).toHaveLength(1);
  });

  it("damage done while the book was open is noticed before the next write", async () => {
    const { files, book } = await bookOf(3);
    files.put(BOOK_PATH, files.text(BOOK_PATH).replace("\n", "\r\n"));
    await expect(book.append(runDraft(3))).rejects.toMatchObject({ code: "damaged-book" });
  });

  it("an entry of a newer format is refused with the version needed, not called damaged", () => {
    const body = lines[ENTRIES - 1].slice(0, -75).replace('"v":1', '"v":2');
    const hash = createHash("sha256").update(body).digest("hex");
    const newer = text([...lines.slice(0, -1), `${body},"hash":"${hash}"}`]);
    expect(() => openWith(newer)).toThrow(/newer format 2/);
  });
});
