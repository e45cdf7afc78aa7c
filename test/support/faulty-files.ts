/**
 * A file system that fails on purpose: counts the calls that reach it and fails the Nth, once or from then on, with a
 * code of the system; or "crashes" there, after which nothing gets through, as when the process is killed.
 */
import type { FileSystem } from "../../recipes/ports.ts";

/** The process is dead: has no code, so that nothing may take it for file trouble and carry on. */
export class Killed extends Error {}

export interface Fault {
  /** The call that fails, from 1. */
  at: number;
  /** A code of the system, "killed", or "short": the write takes half of the bytes and says so. */
  how: string;
  /** Fails only once, or this call and all after it. */
  from?: "once" | "from then on";
  /** Only calls of these names are counted; all of them when left out. */
  only?: readonly string[];
}

export interface FaultyFiles extends FileSystem {
  /** Calls counted so far. */
  calls(): number;
  /** The names of the calls counted, in order. */
  trace(): readonly string[];
  /** Has the fault been met? */
  struck(): boolean;
}

/** Wraps `files`. Looking (exists, isFolder, realPath) never fails, as it does not on a system that answers at all. */
export function faultyFiles(files: FileSystem, fault: Fault | null): FaultyFiles {
  const trace: string[] = [];
  let struck = false;
  let dead = false;

  const meet = (name: string): "short" | null => {
    if (dead) throw new Killed("killed");
    if (fault?.only && !fault.only.includes(name)) return null;
    trace.push(name);
    if (!fault) return null;
    const due = fault.from === "from then on" ? trace.length >= fault.at : trace.length === fault.at;
    if (!due) return null;
    struck = true;
    if (fault.how === "short") return "short";
    if (fault.how === "killed") {
      dead = true;
      throw new Killed("killed");
    }
    throw Object.assign(new Error(`${fault.how} on purpose in ${name}`), { code: fault.how });
  };
  const through = <T>(name: string, work: () => T): T => {
    meet(name);
    return work();
  };
  const looking = <T>(work: () => T): T => {
    if (dead) throw new Killed("killed");
    return work();
  };

  return {
    calls: () => trace.length,
    trace: () => trace,
    struck: () => struck,
    exists: (path) => looking(() => files.exists(path)),
    isFolder: (path) => looking(() => files.isFolder(path)),
    realPath: (path) => looking(() => files.realPath(path)),
    write(handle, bytes, offset, length, position) {
      const how = meet("write");
      // a killed or failing write may have taken some bytes; a short one says so
      return files.write(handle, bytes, offset, how === "short" ? Math.ceil(length / 2) : length, position);
    },
    read: (path) => through("read", () => files.read(path)),
    size: (path) => through("size", () => files.size(path)),
    list: (folder) => through("list", () => files.list(folder)),
    makeFolder: (path) => through("makeFolder", () => files.makeFolder(path)),
    createExclusive: (path) => through("createExclusive", () => files.createExclusive(path)),
    openAppend: (path) => through("openAppend", () => files.openAppend(path)),
    openRead: (path) => through("openRead", () => files.openRead(path)),
    openReadWrite: (path) => through("openReadWrite", () => files.openReadWrite(path)),
    readAt: (handle, bytes, offset, length, position) =>
      through("readAt", () => files.readAt(handle, bytes, offset, length, position)),
    sizeOf: (handle) => through("sizeOf", () => files.sizeOf(handle)),
    truncate: (handle, length) => through("truncate", () => files.truncate(handle, length)),
    sync: (handle) => through("sync", () => files.sync(handle)),
    close: (handle) => through("close", () => files.close(handle)),
    rename: (from, to) => through("rename", () => files.rename(from, to)),
    link: (from, to) => through("link", () => files.link(from, to)),
    copyMode: (from, to) => through("copyMode", () => files.copyMode(from, to)),
    remove: (path) => through("remove", () => files.remove(path)),
    syncFolder: (path) => through("syncFolder", () => files.syncFolder(path)),
  };
}
