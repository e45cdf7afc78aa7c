/**
 * Starting states of a book, two appends through a file system that fails or kills, and the question asked after every
 * failure: are all acknowledged entries there, and can the book be written again?
 */
import { expect } from "vitest";
import { Refusal } from "../../engine/index.ts";
import { Book } from "../../recipes/record/book.ts";
import { BOOK_PATH, bookOf, copyOf, FOLDER, runDraft, runNumbers } from "./book-bench.ts";
import { type Fault, faultyFiles, Killed } from "./faulty-files.ts";
import { MemoryFiles, memoryPorts } from "./memory-files.ts";

export interface Start {
  name: string;
  files: () => Promise<MemoryFiles>;
  /** Runs acknowledged in it. */
  acknowledged: number[];
}

export const STARTS: Start[] = [
  { name: "an empty folder", files: async () => new MemoryFiles(), acknowledged: [] },
  { name: "a book of two", files: async () => copyOf((await bookOf(2)).files), acknowledged: [0, 1] },
  {
    name: "a book with a torn tail",
    files: async () => {
      const files = copyOf((await bookOf(2)).files);
      files.put(BOOK_PATH, files.text(BOOK_PATH) + '{"v":1,"seq":2,"at":"20');
      return files;
    },
    acknowledged: [0, 1],
  },
];

/** Appends runs 10 and 11 through a file system with this fault; returns the runs acknowledged and the refusals. */
export async function appendTwo(files: MemoryFiles, fault: Fault | null) {
  const faulty = faultyFiles(files, fault);
  const acknowledged: number[] = [];
  const refusals: Refusal[] = [];
  let killed = false;
  for (const n of [10, 11]) {
    try {
      await Book.open(FOLDER, memoryPorts(faulty, { pid: 55 })).append(runDraft(n));
      acknowledged.push(n);
    } catch (error) {
      if (error instanceof Killed) killed = true;
      else if (error instanceof Refusal) refusals.push(error);
      else throw error;
      if (killed) break;
    }
  }
  return { acknowledged, refusals, killed, faulty };
}

/** Runs of the book as found by another process after this one is gone, and that it can be written again. */
export async function expectSound(files: MemoryFiles, acknowledged: readonly number[], told: string): Promise<void> {
  const ports = memoryPorts(files, { pid: 66, processAlive: (pid) => pid === 66 });
  const book = Book.open(FOLDER, ports);
  expect(book.damage, told).toEqual([]);
  const found = runNumbers(book);
  expect(
    found.filter((n) => acknowledged.includes(n)),
    told,
  ).toEqual(acknowledged);
  // what was not acknowledged may be there (the answer got lost), but never twice and never anything else
  expect(new Set(found).size, told).toBe(found.length);
  await book.append(runDraft(99));
  const again = Book.open(FOLDER, ports);
  expect(again.damage, told).toEqual([]);
  expect(runNumbers(again), told).toEqual([...found, 99]);
  expect(
    files.list(FOLDER).filter((name) => name === "book.lock"),
    told,
  ).toEqual([]);
}

export async function callsNeeded(start: Start): Promise<number> {
  const { faulty, acknowledged } = await appendTwo(await start.files(), null);
  expect(acknowledged).toEqual([10, 11]);
  return faulty.calls();
}
