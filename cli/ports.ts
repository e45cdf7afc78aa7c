/**
 * The real world behind the ports of the recipes room: Node's file system, the clock, the person and the host. The only
 * file besides main.ts that may touch `node:fs`; nothing is decided here.
 */
import { randomUUID } from "node:crypto";
import fs from "node:fs";
import os from "node:os";
import { dirname } from "node:path";
import type { FileSystem, Ports } from "../recipes/index.ts";

const WINDOWS = process.platform === "win32";
/** How long a rename is tried again on Windows, where a virus scanner may hold the file for a moment. */
const RENAME_PATIENCE_MS = 1000;

function codeOf(error: unknown): string {
  return error instanceof Error && "code" in error && typeof error.code === "string" ? error.code : "";
}

function napSync(ms: number): void {
  Atomics.wait(new Int32Array(new SharedArrayBuffer(4)), 0, 0, ms);
}

function rename(from: string, to: string): void {
  for (let waited = 0; ; waited += 25) {
    try {
      fs.renameSync(from, to);
      return;
    } catch (error) {
      const passing = WINDOWS && ["EPERM", "EBUSY", "EACCES"].includes(codeOf(error));
      if (!passing || waited >= RENAME_PATIENCE_MS) throw error;
      napSync(25);
    }
  }
}

function syncFolder(path: string): void {
  // Windows keeps folders safe by itself and refuses a handle on one
  if (WINDOWS) return;
  const handle = fs.openSync(path, "r");
  try {
    fs.fsyncSync(handle);
  } finally {
    fs.closeSync(handle);
  }
}

/**
 * Parents first, one by one: Node's own recursive way never ends in places like /proc, where nothing can be made. Where
 * one fails, those made for it are taken away again.
 */
function makeFolder(path: string): void {
  const missing: string[] = [];
  for (let at = path; !isFolder(at); at = dirname(at)) {
    missing.unshift(at);
    if (dirname(at) === at) break;
  }
  const made: string[] = [];
  try {
    for (const folder of missing) {
      if (make(folder)) made.unshift(folder);
    }
  } catch (error) {
    for (const folder of made) takeAway(folder);
    throw error;
  }
}

/** A file on the way to it makes it no folder either; making it then says so. */
function isFolder(path: string): boolean {
  try {
    return fs.statSync(path, { throwIfNoEntry: false })?.isDirectory() ?? false;
  } catch (error) {
    if (["ENOTDIR", "ENAMETOOLONG"].includes(codeOf(error))) return false;
    throw error;
  }
}

/** False when another process was quicker. */
function make(folder: string): boolean {
  try {
    fs.mkdirSync(folder);
    return true;
  } catch (error) {
    if (codeOf(error) !== "EEXIST" || !isFolder(folder)) throw error;
    return false;
  }
}

/** Only if it is empty, and quietly: the error that led here is the one to be told. */
function takeAway(folder: string): void {
  try {
    fs.rmdirSync(folder);
  } catch (error) {
    if (codeOf(error) === "") throw error;
  }
}

/** The local file system, synchronous throughout: appends are short and their order is the point. */
export function nodeFiles(): FileSystem {
  return {
    read: (path) => fs.readFileSync(path),
    size: (path) => fs.statSync(path).size,
    exists: (path) => fs.existsSync(path),
    isFolder,
    list: (folder) => fs.readdirSync(folder),
    makeFolder,
    createExclusive: (path) => fs.openSync(path, "wx"),
    openAppend: (path) => fs.openSync(path, "a"),
    openRead: (path) => fs.openSync(path, "r"),
    openReadWrite: (path) => fs.openSync(path, "r+"),
    write: (handle, bytes, offset, length, position) => fs.writeSync(handle, bytes, offset, length, position),
    readAt: (handle, bytes, offset, length, position) => fs.readSync(handle, bytes, offset, length, position),
    sizeOf: (handle) => fs.fstatSync(handle).size,
    truncate: (handle, length) => fs.ftruncateSync(handle, length),
    sync: (handle) => fs.fsyncSync(handle),
    close: (handle) => fs.closeSync(handle),
    rename,
    link: (from, to) => fs.linkSync(from, to),
    copyMode: (from, to) => fs.chmodSync(to, fs.statSync(from).mode & 0o7777),
    remove: (path) => fs.unlinkSync(path),
    syncFolder,
    realPath: (path) => fs.realpathSync(path),
  };
}

/** Alive, as far as can be told: a process of another user answers EPERM and lives. */
function processAlive(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return codeOf(error) !== "ESRCH";
  }
}

/** Linux keeps the start of a process as field 22 of /proc/PID/stat, in ticks since boot; elsewhere it is unknown. */
function processStart(pid: number): string | null {
  try {
    const stat = fs.readFileSync(`/proc/${pid}/stat`, "utf8");
    // the name in field 2 may hold spaces and brackets: count from the last one
    return stat.slice(stat.lastIndexOf(")") + 2).split(" ")[19] ?? null;
  } catch (error) {
    if (codeOf(error) === "") throw error;
    return null;
  }
}

/** The name of the person: COATWRIGHT_BY where set, else the account; printable, and not longer than --by takes. */
function person(): string {
  const { COATWRIGHT_BY, USER, USERNAME } = process.env;
  const name = (COATWRIGHT_BY?.trim() || USER || USERNAME || "").replace(/\p{C}/gu, "");
  return name.trim().slice(0, 100).trim() || "unknown";
}

/** The ports of the running program. */
export function realPorts(): Ports {
  return {
    files: nodeFiles(),
    now: () => Date.now(),
    person: person(),
    host: os.hostname(),
    pid: process.pid,
    processAlive,
    processStart,
    sleep: (ms) => new Promise((resolve) => setTimeout(resolve, ms)),
    randomToken: () => randomUUID(),
  };
}
