/**
 * Replaces a small file so that at every moment, power loss included, the old or the new one is there as a whole: write
 * a temporary file in the same folder, sync it, rename it over the old one, sync the folder. A rename without the first
 * sync is a known way to end with an empty file (Pillai et al., OSDI 2014); without the second it may be undone.
 */
import { refuse } from "../../engine/index.ts";
import type { Ports } from "../ports.ts";
import { sha256 } from "./canonical.ts";
import { errorCode, fileRefusal, folderOf, inFolder, quietly, writeAll } from "./file-trouble.ts";

/** Hash of a file's bytes, or null when there is none. For asking later whether it changed in between. */
export function hashOfFile(ports: Pick<Ports, "files">, path: string): string | null {
  try {
    return sha256(ports.files.read(path));
  } catch (error) {
    if (errorCode(error) === "ENOENT") return null;
    throw fileRefusal(error, `read ${path}`, path);
  }
}

/** A new content, on disk under a temporary name. */
export interface Staged {
  temporary: string;
  /** The file it is for, symbolic links followed. */
  target: string;
}

/** First half: writes and syncs the temporary file. Throws `disk-full`, `read-only`, `io-error`; leaves nothing then. */
export function stage(ports: Pick<Ports, "files" | "pid" | "randomToken">, path: string, bytes: Uint8Array): Staged {
  const { files } = ports;
  try {
    const target = files.exists(path) ? files.realPath(path) : path;
    const base = target.slice(Math.max(target.lastIndexOf("/"), target.lastIndexOf("\\")) + 1);
    const temporary = inFolder(folderOf(target), `.${base}.tmp-${ports.pid}-${ports.randomToken().slice(0, 12)}`);
    const handle = files.createExclusive(temporary);
    let open = true;
    try {
      writeAll(files, handle, bytes, 0);
      files.sync(handle);
      open = false;
      files.close(handle);
      if (files.exists(target)) files.copyMode(target, temporary);
    } catch (error) {
      if (open) quietly(() => files.close(handle));
      quietly(() => files.remove(temporary));
      throw error;
    }
    return { temporary, target };
  } catch (error) {
    throw fileRefusal(error, `write ${path}`, path, bytes.length);
  }
}

/** Second half: puts the staged content in place. On an error the old file is still there and the temporary is gone. */
export function commit(ports: Pick<Ports, "files">, staged: Staged): void {
  try {
    ports.files.rename(staged.temporary, staged.target);
  } catch (error) {
    quietly(() => ports.files.remove(staged.temporary));
    throw fileRefusal(error, `replace ${staged.target}`, staged.target);
  }
}

/**
 * Replaces the file at `path` (or makes it). `expected` is the hash it had when it was read (null: there was none);
 * when it has another one now, throws `changed-meanwhile` and touches nothing. Leave it out to overwrite whatever is
 * there. Also throws `disk-full`, `read-only`, `io-error`. Keeps permission bits; follows a symbolic link.
 */
export function replaceFile(
  ports: Pick<Ports, "files" | "pid" | "randomToken">,
  path: string,
  bytes: Uint8Array,
  expected?: string | null,
): void {
  const staged = stage(ports, path, bytes);
  if (expected !== undefined) {
    let now: string | null;
    try {
      now = hashOfFile(ports, path);
    } catch (error) {
      quietly(() => ports.files.remove(staged.temporary));
      throw error;
    }
    if (now !== expected) {
      quietly(() => ports.files.remove(staged.temporary));
      refuse("changed-meanwhile", `${path} was changed by somebody else since it was read; nothing was written`, {
        file: path,
        hint: "look at the file again, then repeat",
      });
    }
  }
  commit(ports, staged);
  try {
    ports.files.syncFolder(folderOf(staged.target));
  } catch (error) {
    throw fileRefusal(error, `make the change of ${path} safe`, path);
  }
}
