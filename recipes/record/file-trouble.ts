/**
 * From what the system says about a file ("ENOSPC") to what a person can do about it, as refusals with stable codes:
 * "disk-full", "read-only", "io-error". And the loop every write goes through: on a full disk a write comes back short
 * without an error, and only the next one fails (seen on Linux tmpfs).
 */
import { Refusal, refuse } from "../../engine/index.ts";
import type { FileSystem } from "../ports.ts";

/** The system's code of an error ("ENOENT"), or "" when it has none. */
export function errorCode(error: unknown): string {
  if (!(error instanceof Error) || !("code" in error)) return "";
  return typeof error.code === "string" ? error.code : "";
}

const FULL = new Set(["ENOSPC", "EDQUOT", "EFBIG"]);
const FORBIDDEN = new Set(["EROFS", "EACCES", "EPERM"]);
/** Trouble with what stands on the path: what is the matter, and what would do. */
const IN_THE_WAY: Readonly<Record<string, readonly [message: string, hint: string]>> = {
  EEXIST: ["a file of that name is in the way", "name another, or move the file away"],
  EISDIR: ["it is a folder, where a file is needed", "move the folder away"],
  ENOTDIR: ["a part of the path is a file, where a folder is needed", "name another path, or move the file away"],
  ENOENT: ["the path does not exist, or nothing can be made there", "check how the path is written"],
  ENAMETOOLONG: ["the name is too long", "choose a shorter one"],
  ELOOP: ["its links lead round in a circle", "check the links on the path"],
};

/**
 * The refusal for a failed file operation; `doing` completes "could not ...", `bytes` is the space it needed. Errors
 * without a system code are no file trouble and are thrown as they are.
 */
export function fileRefusal(error: unknown, doing: string, file: string, bytes = 0): Refusal {
  const code = errorCode(error);
  if (code === "") throw error;
  const problem = (name: string, message: string, hint: string) =>
    new Refusal([{ code: name, message: `could not ${doing}: ${message}`, file, hint }]);
  if (FULL.has(code)) {
    const needed = bytes > 0 ? `${bytes} bytes are needed` : "more space is needed";
    return problem("disk-full", `the disk is full or the quota is used up (${code})`, `free some space; ${needed}`);
  }
  if (FORBIDDEN.has(code)) {
    return problem("read-only", `it may not be written here (${code})`, "check the folder's permissions and its mount");
  }
  const way = IN_THE_WAY[code];
  if (way) return problem("io-error", `${way[0]} (${code})`, way[1]);
  return problem("io-error", `the file system answered ${code}`, "check the disk or the network share, then `check`");
}

/** Writes all bytes, however short the single writes come back. `position` null appends. Throws what the port throws. */
export function writeAll(files: FileSystem, handle: number, bytes: Uint8Array, position: number | null = null): void {
  let done = 0;
  while (done < bytes.length) {
    const at = position === null ? null : position + done;
    const wrote = files.write(handle, bytes, done, bytes.length - done, at);
    // a write that makes no progress and no error would loop for ever
    if (!(wrote > 0)) refuse("io-error", `the file system took none of ${bytes.length - done} bytes`);
    done += wrote;
  }
}

/** Bytes `from` (inclusive) to `to` (exclusive) of an open file, or fewer when it ends before. */
export function readRange(files: FileSystem, handle: number, from: number, to: number): Uint8Array {
  const bytes = new Uint8Array(Math.max(0, to - from));
  let done = 0;
  while (done < bytes.length) {
    const got = files.readAt(handle, bytes, done, bytes.length - done, from + done);
    if (got <= 0) break;
    done += got;
  }
  return bytes.subarray(0, done);
}

/** Runs `step` and swallows file trouble only: for cleaning up after a failure that is already being reported. */
export function quietly(step: () => void): boolean {
  try {
    step();
    return true;
  } catch (error) {
    if (errorCode(error) === "" && !(error instanceof Refusal)) throw error;
    return false;
  }
}

/** `folder/name` with the separator the ports use everywhere. */
export function inFolder(folder: string, name: string): string {
  return folder.endsWith("/") ? folder + name : `${folder}/${name}`;
}

/** The folder a path lies in; "." when it has none. */
export function folderOf(path: string): string {
  const cut = Math.max(path.lastIndexOf("/"), path.lastIndexOf("\\"));
  return cut > 0 ? path.slice(0, cut) : cut === 0 ? "/" : ".";
}
