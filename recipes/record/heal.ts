/**
 * Sets an interrupted append aside: the bytes go to `book.torn-<time>` first and are synced there, file and folder,
 * before the book is cut, so that a crash in the middle leaves them in one place or in both. Runs under the lock.
 */
import type { Ports } from "../ports.ts";
import type { AnyEntry } from "./entries.ts";
import { errorCode, fileRefusal, inFolder, quietly, readRange, writeAll } from "./file-trouble.ts";
import { BOOK, type Tail } from "./read-book.ts";

const TORN = /^book\.torn-[0-9TZ.-]+$/;

/** Moves the tail out of the book. Throws `disk-full`, `read-only`, `io-error`; the book is then as it was. */
export function setAside(folder: string, ports: Ports, tail: Tail): void {
  const { files } = ports;
  try {
    const book = files.openReadWrite(inFolder(folder, BOOK));
    try {
      copyOut(folder, ports, readRange(files, book, tail.offset, tail.offset + tail.bytes));
      files.truncate(book, tail.offset);
      files.sync(book);
    } finally {
      quietly(() => files.close(book));
    }
  } catch (error) {
    throw fileRefusal(error, "set aside what an interrupted append left", BOOK, tail.bytes);
  }
}

function copyOut(folder: string, ports: Ports, bytes: Uint8Array): void {
  const { files } = ports;
  const time = new Date(ports.now()).toISOString().replace(/[-:]/g, "").replace(/\.\d+/, "");
  for (let n = 1; ; n++) {
    const path = inFolder(folder, `book.torn-${time}${n === 1 ? "" : `-${n}`}`);
    let handle: number;
    try {
      handle = files.createExclusive(path);
    } catch (error) {
      if (errorCode(error) === "EEXIST" && n < 1000) continue;
      throw error;
    }
    try {
      writeAll(files, handle, bytes, 0);
      files.sync(handle);
    } catch (error) {
      // half a copy is worse than none: the bytes are still in the book
      quietly(() => files.close(handle));
      quietly(() => files.remove(path));
      throw error;
    }
    files.close(handle);
    files.syncFolder(folder);
    return;
  }
}

/** Puts back the one byte that an acknowledged last entry lacks. */
export function putLineEndBack(folder: string, ports: Ports, length: number): void {
  const { files } = ports;
  try {
    const book = files.openReadWrite(inFolder(folder, BOOK));
    try {
      writeAll(files, book, Uint8Array.of(0x0a), length);
      files.sync(book);
    } finally {
      quietly(() => files.close(book));
    }
  } catch (error) {
    throw fileRefusal(error, "complete the last line", BOOK, 1);
  }
}

/** Set-aside files that no entry tells of yet, oldest first, with their sizes. */
export function untoldTornFiles(
  folder: string,
  ports: Ports,
  names: readonly string[],
  entries: readonly AnyEntry[],
): { file: string; bytes: number }[] {
  const torn = names.filter((name) => TORN.test(name));
  if (torn.length === 0) return [];
  const told = new Set(entries.flatMap((entry) => (entry.kind === "torn" ? [entry.data.file] : [])));
  return torn
    .filter((name) => !told.has(name))
    .sort()
    .map((file) => ({ file, bytes: ports.files.size(inFolder(folder, file)) }));
}
