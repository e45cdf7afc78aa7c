/**
 * The record book of a line folder: opened, read, caught up with what others wrote, appended to. The bytes are
 * format.ts's business, reading them read-book.ts's, writing them append.ts's; this file is the order of things.
 *
 * Promise: when `write` or `append` has returned, the entries survive the death of any process, and power loss if the
 * disk honours fsync. When it throws, nothing of the draft is acknowledged.
 */
import { type Problem, Refusal, refuse } from "../../engine/index.ts";
import type { Ports } from "../ports.ts";
import { appendLines, stillEndsAt, Unsafe } from "./append.ts";
import type { Damage } from "./damage.ts";
import type { AnyDraft, AnyEntry } from "./entries.ts";
import { errorCode, fileRefusal, inFolder, quietly, readRange } from "./file-trouble.ts";
import { bookProblem, bookTime, encodeEntry } from "./format.ts";
import { putLineEndBack, setAside, untoldTornFiles } from "./heal.ts";
import { WAIT_MS, withLock } from "./lock.ts";
import { BOOK, HEAD, type Place, type Reading, readEntries, readHead, START, type Tail } from "./read-book.ts";

/** What the writer of an entry gets, once it is safe. */
export interface Receipt {
  seq: number;
  hash: string;
  entry: AnyEntry;
  /** Things to tell the person, e.g. that an interrupted append was set aside, or the clock went back. */
  notices: readonly string[];
}

/** Makes the drafts from the entries as they are under the lock; the first draft will be entry `next`. */
export type Build = (entries: readonly AnyEntry[], next: number) => readonly AnyDraft[] | Promise<readonly AnyDraft[]>;

export class Book {
  readonly folder: string;
  private readonly ports: Ports;
  private list: AnyEntry[] = [];
  private place: Place = START;
  private reading: Reading = readEntries(new Uint8Array(), START, "missing", () => undefined);
  private unsafe: Unsafe | null = null;
  /** Goes up when what was read before no longer holds and a ledger must be built anew. */
  generation = 0;

  private constructor(folder: string, ports: Ports) {
    this.folder = folder;
    this.ports = ports;
  }

  /** Reads the book of a line folder; a folder without one has an empty book. Throws `newer-format`, `io-error`. */
  static open(folder: string, ports: Ports): Book {
    const book = new Book(folder, ports);
    book.readAll();
    return book;
  }

  /** Entries that stand, by number. With damage: those before it. */
  get entries(): readonly AnyEntry[] {
    return this.list;
  }
  /** Hash of the last entry that stands; 64 zeros for an empty book. */
  get hash(): string {
    return this.place.prev;
  }
  get damage(): readonly Damage[] {
    return this.reading.damage;
  }
  /** An interrupted (or just now running) append at the end. */
  get tail(): Tail | null {
    return this.reading.tail;
  }
  get notices(): readonly string[] {
    return this.reading.notices;
  }

  /** Damage as problems to be shown by `check`. */
  problems(): Problem[] {
    const wayOut = "put the file back from a copy, or have a person look; nothing is written to it until then";
    return this.damage.map((one, i) =>
      bookProblem(
        "damaged-book",
        `${one.message} (${one.kind}, byte ${one.offset})`,
        one.row,
        i === 0 ? wayOut : undefined,
      ),
    );
  }

  /** Reads what others have appended since. Returns the new entries (all of them when `generation` went up). */
  refresh(): readonly AnyEntry[] {
    const known = this.list.length;
    const generation = this.generation;
    const head = readHead(this.folder, this.ports);
    const { same, size } = stillEndsAt(this.folder, this.ports, this.place);
    if (!same || this.damage.length > 0) this.readAll();
    else
      this.absorb(
        readEntries(this.bytesFrom(this.place.offset, size), this.place, head, (seq) => this.list[seq]?.hash),
      );
    return this.generation === generation ? this.list.slice(known) : this.list;
  }

  /** One entry. See `write`. */
  async append(draft: AnyDraft): Promise<Receipt> {
    const receipts = await this.write(() => [draft]);
    return receipts[0];
  }

  /**
   * The whole act of writing: takes the lock, reads what others wrote, asks `build` for the drafts (on the book as it is
   * now, so that checks made there hold), writes them in one go, syncs, releases, and returns a receipt for each draft.
   * Drafts that must be there together or not at all are opened by an `import` draft that counts the rest.
   * Throws `locked`, `damaged-book`, `disk-full`, `read-only`, `io-error`, `unsafe-after-fsync`, what `encodeEntry`
   * throws, and whatever `build` throws; nothing is acknowledged then.
   */
  async write(build: Build, waitMs = WAIT_MS): Promise<Receipt[]> {
    if (this.unsafe) throw this.unsafe;
    this.refuseDamaged();
    return withLock(this.folder, this.ports, () => this.writeLocked(build), waitMs);
  }

  private async writeLocked(build: Build): Promise<Receipt[]> {
    this.refresh();
    this.refuseDamaged();
    const notices = this.heal();
    const torn = this.tornDrafts();
    const drafts = await build(this.list, this.place.seq + torn.length);
    if (drafts.length === 0) return [];
    checkBatch(drafts);
    const entered = bookTime(this.ports.now());
    const last = this.list.at(-1);
    if (last && last.entered > entered) {
      notices.push(`the clock went back: entry ${last.seq} was entered at ${last.entered}, this one at ${entered}`);
    }
    const encoded = this.encode([...torn, ...drafts], entered);
    const tip = encoded[encoded.length - 1].entry;
    try {
      notices.push(
        ...appendLines(this.folder, this.ports, this.place, Buffer.concat(encoded.map(({ line }) => line)), tip),
      );
    } catch (error) {
      if (error instanceof Unsafe) this.unsafe = error;
      throw error;
    }
    const length = encoded.reduce((sum, { line }) => sum + line.length, 0);
    this.list.push(...encoded.map(({ entry }) => entry));
    this.place = { offset: this.place.offset + length, seq: tip.seq + 1, prev: tip.hash };
    this.reading = { ...this.reading, tail: null, lacksLineEnd: false, notices: [] };
    return encoded.slice(torn.length).map(({ entry }) => ({ seq: entry.seq, hash: entry.hash, entry, notices }));
  }

  private encode(drafts: readonly AnyDraft[], entered: string): { line: Buffer; entry: AnyEntry }[] {
    let { seq, prev } = this.place;
    return drafts.map((draft) => {
      const one = encodeEntry(draft, { seq, entered, by: this.ports.person, prev });
      seq++;
      prev = one.entry.hash;
      return one;
    });
  }

  /** Makes the end of the book clean. Returns what a person should know. */
  private heal(): string[] {
    const { tail, lacksLineEnd } = this.reading;
    if (lacksLineEnd) {
      putLineEndBack(this.folder, this.ports, this.place.offset);
      this.place = { ...this.place, offset: this.place.offset + 1 };
      this.reading.lacksLineEnd = false;
      return ["the last line of the book had lost its end; it was whole otherwise and is complete again"];
    }
    if (!tail) return [];
    setAside(this.folder, this.ports, tail);
    this.reading.tail = null;
    return [`an interrupted append left ${tail.what} (${tail.bytes} bytes); moved to a file book.torn-...`];
  }

  private tornDrafts(): AnyDraft[] {
    const { files } = this.ports;
    try {
      const names = files.list(this.folder);
      // heads are only written under the lock, which we hold: what is left of one is from a writer that died
      for (const name of names.filter((one) => one.startsWith(`.${HEAD}.tmp-`))) {
        quietly(() => files.remove(inFolder(this.folder, name)));
      }
      return untoldTornFiles(this.folder, this.ports, names, this.list).map((data) => ({
        kind: "torn",
        data,
        by: "coatwright",
      }));
    } catch (error) {
      throw fileRefusal(error, "list the line folder", this.folder);
    }
  }

  private readAll(): void {
    const head = readHead(this.folder, this.ports);
    const old = this.list;
    this.list = [];
    this.place = START;
    this.absorb(readEntries(this.bytesFrom(0, null), START, head, () => undefined));
    const kept = old.length <= this.list.length && old.at(-1)?.hash === this.list[old.length - 1]?.hash;
    if (!kept) this.generation++;
  }

  private absorb(reading: Reading): void {
    for (const entry of reading.entries) this.list.push(entry);
    this.place = reading.place;
    this.reading = reading;
  }

  private bytesFrom(offset: number, size: number | null): Uint8Array {
    const { files } = this.ports;
    const path = inFolder(this.folder, BOOK);
    if (size !== null && size <= offset) return new Uint8Array();
    try {
      if (offset === 0) return files.read(path);
      const handle = files.openRead(path);
      try {
        return readRange(files, handle, offset, files.sizeOf(handle));
      } finally {
        quietly(() => files.close(handle));
      }
    } catch (error) {
      if (errorCode(error) === "ENOENT") return new Uint8Array();
      throw fileRefusal(error, "read the book", BOOK);
    }
  }

  private refuseDamaged(): void {
    const [first] = this.damage;
    if (!first) return;
    throw new Refusal([
      bookProblem(
        "damaged-book",
        `the book is damaged, so nothing is written to it: ${first.message} (${first.kind}, byte ${first.offset})`,
        first.row,
        "run `check` for all of it; put the file back from a copy, or have a person look",
      ),
    ]);
  }
}

function checkBatch(drafts: readonly AnyDraft[]): void {
  for (const [i, draft] of drafts.entries()) {
    if (draft.kind !== "import") continue;
    if (draft.data.entries === drafts.length - 1 - i && !drafts.slice(0, i).some((one) => one.kind === "import"))
      continue;
    refuse("bad-entry", `an import of ${draft.data.entries} entries cannot be recorded with ${drafts.length - 1 - i}`);
  }
}
