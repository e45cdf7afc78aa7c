/** A small book in memory for tests of the record: drafts of runs, and a book of n entries. */

import type { Ports } from "../../recipes/ports.ts";
import { Book } from "../../recipes/record/book.ts";
import type { AnyDraft, EntryData } from "../../recipes/record/entries.ts";
import { MemoryFiles, memoryPorts } from "./memory-files.ts";

export const FOLDER = "/line";
export const BOOK_PATH = "/line/book.jsonl";
export const HEAD_PATH = "/line/book.head";

export function runData(n: number, more: Partial<EntryData["run"]> = {}): EntryData["run"] {
  return {
    chamber: "A2",
    recipe: "blue",
    settings_from: "given",
    steps: [{ settings: { silane: { value: 800 + n, unit: "sccm" }, time: { value: 560, unit: "s" } } }],
    count: 1,
    readings: [{ gauge: "ellipsometer", on: "polished", index: 2.04, thickness_nm: 84 + n }],
    ...more,
  };
}

export function runDraft(n: number, more: Partial<EntryData["run"]> = {}): AnyDraft & { kind: "run" } {
  return { kind: "run", data: runData(n, more) };
}

/** A book of `n` runs in a new file system. */
export async function bookOf(n: number, person = "Ana"): Promise<{ files: MemoryFiles; ports: Ports; book: Book }> {
  const files = new MemoryFiles();
  const ports = memoryPorts(files, { person });
  const book = Book.open(FOLDER, ports);
  for (let i = 0; i < n; i++) await book.append(runDraft(i));
  return { files, ports, book };
}

/** A copy of the line folder's files, as if found on a disk. */
export function copyOf(files: MemoryFiles): MemoryFiles {
  const copy = new MemoryFiles();
  for (const name of files.list(FOLDER)) copy.put(`${FOLDER}/${name}`, files.read(`${FOLDER}/${name}`));
  return copy;
}

/** The values that tell the runs of `runDraft` apart. */
export function runNumbers(book: Book): number[] {
  return book.entries.flatMap((entry) =>
    entry.kind === "run" ? [entry.data.steps[0].settings["silane"].value - 800] : [],
  );
}
