/**
 * The doors of the recipes room to the world: files, clock, environment. Only `cli/main.ts` builds the real ones; tests
 * build their own, some that fail on purpose.
 */

export interface FileSystem {
  /** Throws an Error with `code` ENOENT and so on, as Node does. */
  read(path: string): Uint8Array;
  size(path: string): number;
  exists(path: string): boolean;
  isFolder(path: string): boolean;
  list(folder: string): string[];
  makeFolder(path: string): void;
  /** Creates a new file and fails with EEXIST when there is one ("wx"); returns a handle. */
  createExclusive(path: string): number;
  openAppend(path: string): number;
  openRead(path: string): number;
  openReadWrite(path: string): number;
  /** May write fewer bytes than asked; returns how many. Position null appends. */
  write(handle: number, bytes: Uint8Array, offset: number, length: number, position: number | null): number;
  readAt(handle: number, bytes: Uint8Array, offset: number, length: number, position: number): number;
  sizeOf(handle: number): number;
  truncate(handle: number, length: number): void;
  sync(handle: number): void;
  close(handle: number): void;
  rename(from: string, to: string): void;
  /** A second name for a file; fails with EEXIST when the name is taken, with EPERM and the like where unsupported. */
  link(from: string, to: string): void;
  /** Gives `to` the permission bits of `from`. */
  copyMode(from: string, to: string): void;
  remove(path: string): void;
  syncFolder(path: string): void;
  realPath(path: string): string;
}

export interface Ports {
  files: FileSystem;
  /** Milliseconds since 1970. */
  now(): number;
  /** Name of the person at the keyboard. */
  person: string;
  host: string;
  pid: number;
  /** Is a process of this pid alive on this host? */
  processAlive(pid: number): boolean;
  /** Something that tells two processes of the same pid apart (their start time); null where the system does not say. */
  processStart(pid: number): string | null;
  sleep(ms: number): Promise<void>;
  randomToken(): string;
}
