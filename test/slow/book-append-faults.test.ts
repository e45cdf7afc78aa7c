/**
 * The file system fails at the Nth call of an append, for every N until an append meets no failure; the process is killed
 * at the Nth call; the power goes at the Nth call. After each: every acknowledged entry is there, unchanged and in order,
 * and the book can be written again.
 *
 * The manner (every Nth call, once and from then on, integrity check after each) is SQLite's, as told on its testing page.
 */
import { describe, expect, it } from "vitest";
import type { Refusal } from "../../engine/index.ts";
import { Book } from "../../recipes/record/book.ts";
import { lockHolder } from "../../recipes/record/lock.ts";
import { BOOK_PATH, bookOf, copyOf, FOLDER, runDraft, runNumbers } from "../support/book-bench.ts";
import { appendTwo, callsNeeded, expectSound, STARTS } from "../support/book-faults.ts";
import { type Fault, faultyFiles, Killed } from "../support/faulty-files.ts";
import { MemoryFiles, memoryPorts, seededRandom } from "../support/memory-files.ts";

/** One of each answer; which code gives which answer is asked in file-trouble.test.ts. */
const CODES = ["EIO", "ENOSPC", "EROFS"];
const ANSWERS = ["disk-full", "read-only", "io-error", "unsafe-after-fsync"];

describe.each(STARTS)("appending to $name", (start) => {
  it("with an error at the Nth call loses nothing acknowledged and says what happened", async () => {
    const calls = await callsNeeded(start);
    expect(calls).toBeGreaterThan(30);
    for (const how of CODES) {
      for (const from of ["once", "from then on"] as const) {
        // the code decides the words only: every call with one code, a third of them with the others
        for (let at = 1; at <= calls; at += how === "EIO" ? 1 : 3) {
          const files = await start.files();
          const { acknowledged, refusals, faulty } = await appendTwo(files, { at, how, from });
          const told = `${how} ${from} at call ${at} (${faulty.trace().at(-1)})`;
          expect(faulty.struck(), told).toBe(true);
          for (const refusal of refusals) expect(ANSWERS, told).toContain(refusal.code);
          await expectSound(files, [...start.acknowledged, ...acknowledged], told);
        }
      }
    }
  });

  it("with an error once, the next append of the same process goes through", async () => {
    const calls = await callsNeeded(start);
    let both = 0;
    for (let at = 1; at <= calls; at++) {
      const { acknowledged, refusals } = await appendTwo(await start.files(), { at, how: "EIO", from: "once" });
      expect(acknowledged.length + refusals.length).toBe(2);
      expect(acknowledged.length).toBeGreaterThanOrEqual(1);
      if (acknowledged.length === 2) both++;
    }
    // failures while tidying up after the entry is safe are no failures of the entry
    expect(both).toBeGreaterThan(0);
  });

  it("killed at the Nth call, and once more while the next one heals, loses nothing acknowledged", async () => {
    const calls = await callsNeeded(start);
    for (let at = 1; at <= calls; at++) {
      const files = await start.files();
      const first = await appendTwo(files, { at, how: "killed" });
      expect(first.killed).toBe(true);
      const kept = [...start.acknowledged, ...first.acknowledged];
      for (let second = 1; ; second += 7) {
        const copy = copyOf(files);
        const faulty = faultyFiles(copy, { at: second, how: "killed" });
        const ports = memoryPorts(faulty, { pid: 66, processAlive: (pid) => pid === 66 });
        const done: number[] = [];
        try {
          await Book.open(FOLDER, ports).append(runDraft(20));
          done.push(20);
        } catch (error) {
          if (!(error instanceof Killed)) throw error;
        }
        const after = memoryPorts(copy, { pid: 77, processAlive: (pid) => pid === 77 });
        const book = Book.open(FOLDER, after);
        const told = `killed at ${at}, then at ${second}`;
        expect(book.damage, told).toEqual([]);
        expect(
          runNumbers(book).filter((n) => kept.includes(n) || done.includes(n)),
          told,
        ).toEqual([...kept, ...done]);
        await book.append(runDraft(30));
        if (!faulty.struck()) break;
      }
      await expectSound(files, kept, `killed at ${at}`);
    }
  });
});

describe("single failures of an append", () => {
  async function failing(fault: Fault) {
    const { files } = await bookOf(2);
    const before = files.text(BOOK_PATH);
    const faulty = faultyFiles(files, fault);
    const book = Book.open(FOLDER, memoryPorts(faulty));
    const error: unknown = await book.append(runDraft(2)).then(
      () => null,
      (reason: unknown) => reason,
    );
    return { files, before, book, error, faulty };
  }
  /** Which of the writes (or syncs) of an append is the book's: asked of a run without failure. */
  async function nth(name: string, which: (trace: readonly string[]) => number): Promise<number> {
    const { faulty } = await failing({ at: 1e9, how: "EIO" });
    const trace = faulty.trace();
    return trace.slice(0, which(trace) + 1).filter((one) => one === name).length;
  }
  const bookWrite = (trace: readonly string[]): number => trace.indexOf("write", trace.indexOf("openAppend"));
  const bookSync = (trace: readonly string[]): number => trace.indexOf("sync", trace.indexOf("openAppend"));

  it("a full disk is told with the space needed, and the book is as before", async () => {
    const at = await nth("write", bookWrite);
    const { error, files, before, book } = await failing({ at, how: "ENOSPC", only: ["write"] });
    expect(error).toMatchObject({ code: "disk-full" });
    expect((error as Refusal).problems[0].hint).toMatch(/\d+ bytes are needed/);
    expect((error as Refusal).message).toContain("nothing was recorded");
    expect(files.text(BOOK_PATH)).toBe(before);
    expect((await book.append(runDraft(3))).seq).toBe(2);
  });

  it("a write that comes back short is carried on to the end", async () => {
    const { files } = await bookOf(2);
    const faulty = faultyFiles(files, { at: 1, how: "short", from: "from then on", only: ["write"] });
    const book = Book.open(FOLDER, memoryPorts(faulty));
    await book.append(runDraft(2));
    expect(faulty.calls()).toBeGreaterThan(20);
    expect(runNumbers(Book.open(FOLDER, memoryPorts(files)))).toEqual([0, 1, 2]);
  });

  it("a disk that fills up in the middle of the line leaves the book as before", async () => {
    const { files } = await bookOf(2);
    const before = files.text(BOOK_PATH);
    const full = { ...faultyFiles(files, null) };
    let left = 300;
    full.write = (handle, bytes, offset, length, position) => {
      if (length < 200) return files.write(handle, bytes, offset, length, position);
      if (left === 0) throw Object.assign(new Error("full"), { code: "ENOSPC" });
      const part = Math.min(left, length);
      left -= part;
      return files.write(handle, bytes, offset, part, position);
    };
    const book = Book.open(FOLDER, memoryPorts(full));
    await expect(book.append(runDraft(2))).rejects.toMatchObject({ code: "disk-full" });
    expect(files.text(BOOK_PATH)).toBe(before);
  });

  it("a failed sync is never tried again and called good: the book must be opened anew", async () => {
    const at = await nth("sync", bookSync);
    const { error, book, files } = await failing({ at, how: "EIO", only: ["sync"] });
    expect(error).toMatchObject({ code: "unsafe-after-fsync" });
    await expect(book.append(runDraft(3))).rejects.toMatchObject({ code: "unsafe-after-fsync" });
    const again = Book.open(FOLDER, memoryPorts(files));
    expect(runNumbers(again)).toEqual([0, 1]);
    expect((await again.append(runDraft(3))).seq).toBe(2);
  });

  it("when the folder of a new book cannot be synced, nothing is acknowledged: also not after a killed first append", async () => {
    for (const killedFirst of [false, true]) {
      const files = new MemoryFiles();
      if (killedFirst) {
        // killed between syncing the book and putting book.head in place: the entry is whole, its file's name is not safe
        const dying = faultyFiles(files, { at: 2, how: "killed", only: ["rename"] });
        await expect(Book.open(FOLDER, memoryPorts(dying)).append(runDraft(0))).rejects.toBeInstanceOf(Killed);
        expect(runNumbers(Book.open(FOLDER, memoryPorts(files)))).toEqual([0]);
      }
      files.put("/line/.gitattributes", "book.jsonl -text\n");
      const faulty = faultyFiles(files, { at: 1, how: "EIO", from: "from then on", only: ["syncFolder"] });
      const ports = memoryPorts(faulty, { pid: 9, processAlive: (pid) => pid === 9 });
      await expect(Book.open(FOLDER, ports).append(runDraft(1))).rejects.toMatchObject({ code: "unsafe-after-fsync" });
    }
  });

  it("on a read-only medium reading works and writing fails before any work", async () => {
    const { files } = await bookOf(2);
    const writing = ["createExclusive", "openAppend", "openReadWrite", "rename", "link", "remove", "write", "truncate"];
    const faulty = faultyFiles(files, { at: 1, how: "EROFS", from: "from then on", only: writing });
    const book = Book.open(FOLDER, memoryPorts(faulty));
    expect(runNumbers(book)).toEqual([0, 1]);
    let built = false;
    const refused = book.write(() => {
      built = true;
      return [runDraft(2)];
    });
    await expect(refused).rejects.toMatchObject({ code: "read-only" });
    expect(built).toBe(false);
    expect(lockHolder(FOLDER, memoryPorts(files))).toBe(null);
  });
});

describe("power loss", () => {
  it("at the Nth call, whatever the disk kept of what was not synced, loses nothing acknowledged", async () => {
    let images = 0;
    for (const start of STARTS) {
      const calls = await callsNeeded(start);
      for (let at = 1; at <= calls + 1; at++) {
        const files = await start.files();
        const { acknowledged } = await appendTwo(files, { at, how: "killed" });
        for (let seed = 0; seed < 3; seed++) {
          const found = files.afterPowerLoss(seededRandom(at * 1000 + seed * 7919));
          const told = `${start.name}, power lost at call ${at}, image ${seed}`;
          await expectSound(found, [...start.acknowledged, ...acknowledged], told);
          images++;
        }
      }
    }
    expect(images).toBeGreaterThan(400);
  });

  it("after an error at the Nth call that was lived through, loses nothing acknowledged either", async () => {
    for (const start of STARTS) {
      const calls = await callsNeeded(start);
      for (let at = 1; at <= calls; at++) {
        for (const from of ["once", "from then on"] as const) {
          const files = await start.files();
          const { acknowledged } = await appendTwo(files, { at, how: "EIO", from });
          for (let seed = 0; seed < 3; seed++) {
            const found = files.afterPowerLoss(seededRandom(at * 1000 + seed * 7919));
            await expectSound(found, [...start.acknowledged, ...acknowledged], `${start.name}, EIO ${from} at ${at}`);
          }
        }
      }
    }
  });

  it("while a torn tail is set aside leaves its bytes in the book or in the torn file", async () => {
    const [, , torn] = STARTS;
    const calls = await callsNeeded(torn);
    const before = await torn.files();
    const tail = before.text(BOOK_PATH).split("\n").at(-1) ?? "";
    expect(tail.length).toBeGreaterThan(10);
    for (let at = 1; at <= calls; at++) {
      for (let seed = 0; seed < 8; seed++) {
        const files = await torn.files();
        await appendTwo(files, { at, how: "killed" });
        const found = files.afterPowerLoss(seededRandom(at * 1000 + seed * 31));
        const kept = found.list(FOLDER).filter((name) => name === "book.jsonl" || name.startsWith("book.torn-"));
        const holding = kept.filter((name) => found.text(`${FOLDER}/${name}`).includes(tail));
        expect(holding.length, `power lost at call ${at}, seed ${seed}`).toBeGreaterThan(0);
      }
    }
  });
});
