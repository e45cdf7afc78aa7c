/**
 * The one way bytes enter the book. Under the lock, with the end healed, in this order: `book.head` is prepared under a
 * temporary name; the lines are written in one go, looped until all are out; the book is synced (on its first creation
 * the folder too); `book.head` is put in place. Only then is anything acknowledged. Any error on the way takes the file
 * back to its old length and checks that it is.
 */
import { Refusal, refuse } from "../../engine/index.ts";
import type { Ports } from "../ports.ts";
import { commit, replaceFile, type Staged, stage } from "./atomic-replace.ts";
import { sha256 } from "./canonical.ts";
import { errorCode, fileRefusal, inFolder, quietly, readRange, writeAll } from "./file-trouble.ts";
import { encodeHead } from "./format.ts";
import { BOOK, HEAD, type Place } from "./read-book.ts";

/** Thrown with the refusal when the state on disk is no longer known: the book must be read anew before writing. */
export class Unsafe extends Refusal {}

const ATTRIBUTES = ".gitattributes";
const ATTRIBUTE_LINE = "book.jsonl -text\n";

export interface LastEntry {
  seq: number;
  hash: string;
}

/**
 * Appends `lines` at `place` and names `last` in book.head. Returns notices. Throws `disk-full`, `read-only`, `io-error`,
 * `changed-meanwhile` with the book as it was, or Unsafe (`unsafe-after-fsync`) when that cannot be promised.
 */
export function appendLines(folder: string, ports: Ports, place: Place, lines: Uint8Array, last: LastEntry): string[] {
  const { files } = ports;
  const path = inFolder(folder, BOOK);
  const missing = !files.exists(path);
  // without a head no append has ever got as far as syncing the folder
  const first = missing || place.offset === 0 || !files.exists(inFolder(folder, HEAD));
  if (missing) declareBytesExact(folder, ports);
  const head = stage(ports, inFolder(folder, HEAD), encodeHead(last.seq, last.hash));
  let handle: number;
  try {
    handle = missing ? files.createExclusive(path) : files.openAppend(path);
  } catch (error) {
    quietly(() => files.remove(head.temporary));
    throw fileRefusal(error, "open the book for writing", BOOK, lines.length);
  }
  try {
    return writeAndSync(folder, ports, handle, place.offset, lines, head, first);
  } finally {
    quietly(() => files.close(handle));
  }
}

function writeAndSync(
  folder: string,
  ports: Ports,
  handle: number,
  length: number,
  lines: Uint8Array,
  head: Staged,
  first: boolean,
): string[] {
  const { files } = ports;
  let stepName: "write" | "sync" | "head" = "write";
  try {
    if (files.sizeOf(handle) !== length) {
      refuse("changed-meanwhile", "the book grew while it was locked: somebody writes without the lock", {
        file: BOOK,
        hint: "run `check`, then repeat",
      });
    }
    writeAll(files, handle, lines, null);
    stepName = "sync";
    files.sync(handle);
    if (first) files.syncFolder(folder);
    stepName = "head";
    commit(ports, head);
  } catch (error) {
    if (!(error instanceof Refusal) && errorCode(error) === "") throw error;
    quietly(() => files.remove(head.temporary));
    if (error instanceof Refusal && error.code === "changed-meanwhile") throw error;
    const restored = takeBack(folder, ports, handle, length);
    throw refusalFor(error, stepName, restored, lines.length);
  }
  // the entry is safe already; if only this fails, book.head may be behind after a power loss, which is harmless
  const synced = quietly(() => files.syncFolder(folder));
  return synced
    ? []
    : [`${HEAD} could not be made safe; entries lost at the end might go unnoticed until the next entry`];
}

function refusalFor(error: unknown, step: "write" | "sync" | "head", restored: boolean, bytes: number): Refusal {
  const refusal = error instanceof Refusal ? error : fileRefusal(error, "write the entry", BOOK, bytes);
  const problem = refusal.problems[0];
  if (step !== "sync" && restored) {
    return new Refusal([{ ...problem, message: `${problem.message}; nothing was recorded and the book is as before` }]);
  }
  const after = restored ? "it was taken back" : "taking it back failed too, so it may or may not be in the book";
  return new Unsafe([
    {
      code: "unsafe-after-fsync",
      message: `the entry is NOT safely recorded (${problem.message}); ${after}`,
      file: BOOK,
      hint: "look after the disk first; then run `check` and enter it again if it is missing",
    },
  ]);
}

/** Back to the old length, and looked at through a new handle. True when the file is known to be as before. */
function takeBack(folder: string, ports: Ports, handle: number, length: number): boolean {
  const { files } = ports;
  const done = quietly(() => {
    files.truncate(handle, length);
    files.sync(handle);
  });
  let same = false;
  const looked = quietly(() => {
    const again = files.openRead(inFolder(folder, BOOK));
    try {
      same = files.sizeOf(again) === length;
    } finally {
      quietly(() => files.close(again));
    }
  });
  return done && looked && same;
}

/** Does the book end at `place` with the entry that place says? A cheap look before trusting what was read earlier. */
export function stillEndsAt(folder: string, ports: Ports, place: Place): { same: boolean; size: number } {
  const { files } = ports;
  const path = inFolder(folder, BOOK);
  try {
    if (!files.exists(path)) return { same: place.offset === 0, size: 0 };
    const handle = files.openRead(path);
    try {
      const size = files.sizeOf(handle);
      if (size < place.offset) return { same: false, size };
      if (place.offset === 0) return { same: true, size };
      const end = `,"hash":"${place.prev}"}\n`;
      const found = Buffer.from(readRange(files, handle, place.offset - end.length, place.offset)).toString("latin1");
      return { same: found === end, size };
    } finally {
      quietly(() => files.close(handle));
    }
  } catch (error) {
    throw fileRefusal(error, "read the book", BOOK);
  }
}

/** Tells git to leave the bytes of the book alone; keeps what a person has in the file already. */
function declareBytesExact(folder: string, ports: Ports): void {
  const path = inFolder(folder, ATTRIBUTES);
  let old = "";
  let hash: string | null = null;
  try {
    if (ports.files.exists(path)) {
      const bytes = ports.files.read(path);
      hash = sha256(bytes);
      old = Buffer.from(bytes).toString("utf8");
    }
  } catch (error) {
    throw fileRefusal(error, `read ${ATTRIBUTES}`, ATTRIBUTES);
  }
  if (/^book\.jsonl[ \t].*-text/m.test(old)) return;
  const text = old === "" || old.endsWith("\n") ? old : `${old}\n`;
  replaceFile(ports, path, Buffer.from(text + ATTRIBUTE_LINE, "utf8"), hash);
}
