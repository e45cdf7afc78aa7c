/**
 * One writer at a time: the file `book.lock` in the line folder, for the few milliseconds of a write.
 *
 * Taking it: the particulars of the holder are written to a file of our own, which is then linked to the name
 * `book.lock`. The link fails when the name is taken, so there is one winner, and a lock is never seen half written. On
 * file systems without links the name is made exclusively and then filled.
 *
 * Left behind: a lock is stale only when its host is ours and its process is gone, or another process has its number
 * since (start times differ). Of several who find it stale only one may break it: the one that makes the file
 * `book.lock.broken-<token>` exclusively, and it looks again before acting. A lock of another host, or one that cannot
 * be read, is never broken without being asked to; the refusal names the holder and the way out.
 */
import { refuse } from "../../engine/index.ts";
import type { Ports } from "../ports.ts";
import { errorCode, fileRefusal, inFolder, quietly, writeAll } from "./file-trouble.ts";

export interface Holder {
  pid: number;
  host: string;
  person: string;
  /** What tells the process from a later one of the same pid; null where unknown. */
  started: string | null;
  /** When the lock was taken, ms since 1970. */
  since: number;
  token: string;
}

export interface Lock {
  readonly token: string;
  release(): void;
}

const LOCK = "book.lock";
/** What file systems without links answer. */
const NO_LINKS = new Set(["EPERM", "ENOTSUP", "ENOSYS", "EOPNOTSUPP", "EMLINK"]);
/** Locks of ours whose removal failed: this process lives on, so nobody else could tell that they are void. */
const unreleased = new Set<string>();
/** How long a writer waits for another: longer than any append, shorter than a person's patience. */
export const WAIT_MS = 10_000;
const FIRST_NAP_MS = 10;
const LONGEST_NAP_MS = 100;
/** Times in a row that a lock may vanish between finding it and reading it before a nap is due. */
const MISSES = 5;

/**
 * Takes the lock of a line folder, waiting up to `waitMs` for another holder. Throws `locked` (with holder, host and
 * age), `read-only`, `disk-full`, `io-error`.
 */
export async function takeLock(folder: string, ports: Ports, waitMs = WAIT_MS): Promise<Lock> {
  const path = inFolder(folder, LOCK);
  const token = ports.randomToken();
  let waited = 0;
  let nap = FIRST_NAP_MS;
  let missed = 0;
  for (;;) {
    if (tryTake(path, token, ports)) {
      return { token, release: () => release(path, token, ports) };
    }
    const holder = readHolder(path, ports);
    if (holder === "gone" && missed++ < MISSES) continue;
    if (holder !== "gone" && holder !== "unreadable" && isStale(holder, ports) && breakStale(path, holder, ports))
      continue;
    if (waited >= waitMs) refuseLocked(holder, ports);
    // spread the waiters, or they all come back at the same moment
    const spread = Number.parseInt(token.slice(0, 2), 16) || 0;
    const pause = Math.min(nap + (spread % 16), Math.max(1, waitMs - waited));
    await ports.sleep(pause);
    waited += pause;
    nap = Math.min(nap * 2, LONGEST_NAP_MS);
  }
}

/** Runs `work` under the lock and releases it, however `work` ends. */
export async function withLock<T>(
  folder: string,
  ports: Ports,
  work: () => T | Promise<T>,
  waitMs = WAIT_MS,
): Promise<T> {
  const lock = await takeLock(folder, ports, waitMs);
  try {
    return await work();
  } finally {
    lock.release();
  }
}

/** Who holds the lock now; null when nobody. "unreadable" when the file is not a lock of ours. */
export function lockHolder(folder: string, ports: Ports): Holder | "unreadable" | null {
  const holder = readHolder(inFolder(folder, LOCK), ports);
  return holder === "gone" ? null : holder;
}

/** Removes the lock whoever holds it: only when a person has made sure that nobody is writing. */
export function breakLockByHand(folder: string, ports: Ports): boolean {
  const path = inFolder(folder, LOCK);
  try {
    ports.files.remove(path);
    return true;
  } catch (error) {
    if (errorCode(error) === "ENOENT") return false;
    throw fileRefusal(error, "remove the lock", path);
  }
}

function tryTake(path: string, token: string, ports: Ports): boolean {
  const { files } = ports;
  const holder: Holder = {
    pid: ports.pid,
    host: ports.host,
    person: ports.person,
    started: ports.processStart(ports.pid),
    since: ports.now(),
    token,
  };
  const bytes = Buffer.from(JSON.stringify(holder) + "\n", "utf8");
  try {
    // asking first spares a waiter the file it would make and remove at every look
    return !files.exists(path) && claim(path, bytes, token, ports);
  } catch (error) {
    throw fileRefusal(error, "take the lock of the line", path, bytes.length);
  }
}

/** A token as part of a file name; the token may come from a file that anybody wrote. */
const plain = (token: string): string => token.replace(/[^0-9A-Za-z-]/g, "").slice(0, 64);

/** Gives `path` this content if the name is free; whoever sees the name sees the whole content. */
function claim(path: string, bytes: Uint8Array, token: string, ports: Ports): boolean {
  const { files } = ports;
  const own = `${path}.${plain(token)}`;
  if (!fill(own, bytes, ports)) refuse("io-error", `${own} is there already`, { file: own, hint: "remove it" });
  try {
    files.link(own, path);
    return true;
  } catch (error) {
    const code = errorCode(error);
    if (code === "EEXIST") return false;
    if (!NO_LINKS.has(code)) throw error;
    return fill(path, bytes, ports);
  } finally {
    quietly(() => files.remove(own));
  }
}

/** Makes a file with this content exclusively; false when the name is taken. Leaves nothing behind on an error. */
function fill(path: string, bytes: Uint8Array, ports: Ports): boolean {
  const { files } = ports;
  let handle: number;
  try {
    handle = files.createExclusive(path);
  } catch (error) {
    if (errorCode(error) === "EEXIST") return false;
    throw error;
  }
  let open = true;
  try {
    writeAll(files, handle, bytes, 0);
    // else a power loss may keep the name and not the content, and nobody could tell whose lock it was
    files.sync(handle);
    open = false;
    files.close(handle);
    return true;
  } catch (error) {
    if (open) quietly(() => files.close(handle));
    quietly(() => files.remove(path));
    throw error;
  }
}

function readHolder(path: string, ports: Ports): Holder | "unreadable" | "gone" {
  let text: string;
  try {
    text = Buffer.from(ports.files.read(path)).toString("utf8");
  } catch (error) {
    if (errorCode(error) === "ENOENT") return "gone";
    if (errorCode(error) === "EISDIR")
      refuse("not-a-lock", "book.lock is a folder, where writers put their lock", {
        file: LOCK,
        hint: "nobody writes while it is there; remove or rename it",
      });
    throw fileRefusal(error, "read the lock of the line", path);
  }
  try {
    const value = JSON.parse(text) as Partial<Holder> | null;
    if (typeof value?.pid === "number" && typeof value.host === "string" && typeof value.token === "string") {
      return {
        pid: value.pid,
        host: value.host,
        token: value.token,
        person: typeof value.person === "string" ? value.person : "",
        started: typeof value.started === "string" ? value.started : null,
        since: typeof value.since === "number" ? value.since : Number.NaN,
      };
    }
  } catch (error) {
    if (!(error instanceof SyntaxError)) throw error;
  }
  return "unreadable";
}

function isStale(holder: Holder, ports: Ports): boolean {
  if (unreleased.has(holder.token)) return true;
  if (holder.host !== ports.host) return false;
  if (!ports.processAlive(holder.pid)) return true;
  const started = ports.processStart(holder.pid);
  return holder.started !== null && started !== null && started !== holder.started;
}

/** Makes the one file that gives the right to break this lock; null when another living process has it. */
function rightToBreak(path: string, token: string, ports: Ports): { right: string; older: string[] } | null {
  const mine = Buffer.from(JSON.stringify({ pid: ports.pid, host: ports.host, token: "breaker" }) + "\n");
  const older: string[] = [];
  for (let generation = 1; generation < 10; generation++) {
    const right = `${path}.broken-${plain(token)}-${generation}`;
    if (claim(right, mine, ports.randomToken(), ports)) return { right, older };
    const other = readHolder(right, ports);
    // a breaker that died on the way leaves its right unused for ever; the next generation is open to one of us
    if (other === "gone" || other === "unreadable" || !isStale(other, ports)) return null;
    older.push(right);
  }
  return null;
}

/** True when the stale lock is out of the way and another try makes sense. */
function breakStale(path: string, holder: Holder, ports: Ports): boolean {
  const { files } = ports;
  let right: string | null = null;
  try {
    const won = rightToBreak(path, holder.token, ports);
    if (won === null) return false;
    right = won.right;
    const now = readHolder(path, ports);
    if (now !== "gone" && now !== "unreadable" && now.token === holder.token) files.rename(path, right);
    files.remove(right);
    for (const file of won.older) quietly(() => files.remove(file));
    unreleased.delete(holder.token);
    return true;
  } catch (error) {
    const made = right;
    if (made !== null) quietly(() => files.remove(made));
    throw fileRefusal(error, "remove the lock of a process that is gone", path);
  }
}

function release(path: string, token: string, ports: Ports): void {
  // a failed release must not turn a recorded entry into an error
  const released = quietly(() => {
    const holder = readHolder(path, ports);
    if (holder !== "gone" && holder !== "unreadable" && holder.token === token) ports.files.remove(path);
  });
  if (!released) unreleased.add(token);
}

function refuseLocked(holder: Holder | "unreadable" | "gone", ports: Ports): never {
  if (holder === "gone") {
    return refuse("locked", "others took the lock of the line each time it became free", { hint: "try again" });
  }
  if (holder === "unreadable") {
    return refuse("locked", "the line is locked, but book.lock does not say by whom", {
      file: LOCK,
      hint: "when you are sure that nobody is writing, remove book.lock",
    });
  }
  const seconds = Math.max(0, Math.round((ports.now() - holder.since) / 1000));
  const age = Number.isFinite(seconds) ? `, for ${seconds} s` : "";
  const who = holder.person ? `${holder.person} (process ${holder.pid})` : `process ${holder.pid}`;
  const elsewhere = holder.host === ports.host ? "" : "; whether that process lives cannot be told from here";
  return refuse("locked", `the line is locked by ${who} on ${holder.host}${age}${elsewhere}`, {
    file: LOCK,
    hint: "try again; when you are sure that nobody is writing there, remove book.lock",
  });
}
