/**
 * A file system in memory that knows what a disk would keep: each file has what was written and what was synced, each
 * name is durable only once its folder was synced. `afterPowerLoss` draws one of the states a disk may be found in.
 */
import type { FileSystem, Ports } from "../../recipes/ports.ts";

interface Inode {
  data: Uint8Array;
  synced: Uint8Array;
  mode: number;
}

type NameChange = { set: string; inode: Inode } | { drop: string };

function systemError(code: string, path: string): Error {
  return Object.assign(new Error(`${code}: ${path}`), { code });
}

const folderOf = (path: string): string => path.slice(0, path.lastIndexOf("/")) || "/";

export class MemoryFiles implements FileSystem {
  private names = new Map<string, Inode>();
  private durable = new Map<string, Inode>();
  /** Changes of names since their folder was last synced, in order. */
  private pending: NameChange[] = [];
  private folders = new Set<string>(["/"]);
  private handles = new Map<number, { inode: Inode; append: boolean; write: boolean }>();
  private next = 3;

  constructor(folders: readonly string[] = ["/line"]) {
    for (const folder of folders) this.folders.add(folder);
  }

  private find(path: string): Inode {
    const inode = this.names.get(path);
    if (!inode) throw systemError("ENOENT", path);
    return inode;
  }
  private open(path: string, mode: { append: boolean; write: boolean }): number {
    const handle = this.next++;
    this.handles.set(handle, { inode: this.find(path), ...mode });
    return handle;
  }
  private of(handle: number): { inode: Inode; append: boolean; write: boolean } {
    const open = this.handles.get(handle);
    if (!open) throw systemError("EBADF", String(handle));
    return open;
  }
  private change(change: NameChange): void {
    this.pending.push(change);
    if ("set" in change) this.names.set(change.set, change.inode);
    else this.names.delete(change.drop);
  }

  read(path: string): Uint8Array {
    return Uint8Array.from(this.find(path).data);
  }
  size(path: string): number {
    return this.find(path).data.length;
  }
  exists(path: string): boolean {
    return this.names.has(path) || this.folders.has(path);
  }
  isFolder(path: string): boolean {
    return this.folders.has(path);
  }
  list(folder: string): string[] {
    if (!this.folders.has(folder)) throw systemError("ENOENT", folder);
    const paths = [...this.names.keys(), ...this.folders].filter((path) => path !== "/" && folderOf(path) === folder);
    return paths.map((path) => path.slice(path.lastIndexOf("/") + 1)).sort();
  }
  makeFolder(path: string): void {
    this.folders.add(path);
  }
  createExclusive(path: string): number {
    if (this.exists(path)) throw systemError("EEXIST", path);
    if (!this.folders.has(folderOf(path))) throw systemError("ENOENT", path);
    this.change({ set: path, inode: { data: new Uint8Array(), synced: new Uint8Array(), mode: 0o644 } });
    return this.open(path, { append: false, write: true });
  }
  openAppend(path: string): number {
    if (!this.exists(path)) this.close(this.createExclusive(path));
    return this.open(path, { append: true, write: true });
  }
  openRead(path: string): number {
    return this.open(path, { append: false, write: false });
  }
  openReadWrite(path: string): number {
    return this.open(path, { append: false, write: true });
  }
  write(handle: number, bytes: Uint8Array, offset: number, length: number, position: number | null): number {
    const { inode, append, write } = this.of(handle);
    if (!write) throw systemError("EBADF", String(handle));
    const at = append || position === null ? inode.data.length : position;
    const data = new Uint8Array(Math.max(inode.data.length, at + length));
    data.set(inode.data);
    data.set(bytes.subarray(offset, offset + length), at);
    inode.data = data;
    return length;
  }
  readAt(handle: number, bytes: Uint8Array, offset: number, length: number, position: number): number {
    const part = this.of(handle).inode.data.subarray(position, position + length);
    bytes.set(part, offset);
    return part.length;
  }
  sizeOf(handle: number): number {
    return this.of(handle).inode.data.length;
  }
  truncate(handle: number, length: number): void {
    const { inode } = this.of(handle);
    inode.data = inode.data.slice(0, length);
  }
  sync(handle: number): void {
    const { inode } = this.of(handle);
    inode.synced = inode.data.slice();
  }
  close(handle: number): void {
    this.of(handle);
    this.handles.delete(handle);
  }
  rename(from: string, to: string): void {
    const inode = this.find(from);
    this.change({ set: to, inode });
    this.change({ drop: from });
  }
  link(from: string, to: string): void {
    const inode = this.find(from);
    if (this.exists(to)) throw systemError("EEXIST", to);
    this.change({ set: to, inode });
  }
  copyMode(from: string, to: string): void {
    this.find(to).mode = this.find(from).mode;
  }
  remove(path: string): void {
    this.find(path);
    this.change({ drop: path });
  }
  syncFolder(path: string): void {
    const rest: NameChange[] = [];
    for (const change of this.pending) {
      if (folderOf("set" in change ? change.set : change.drop) !== path) rest.push(change);
      else apply(this.durable, change);
    }
    this.pending = rest;
  }
  realPath(path: string): string {
    return path;
  }

  /** For tests: puts a file there as if it had always been, synced. */
  put(path: string, content: Uint8Array | string): void {
    const data = typeof content === "string" ? new TextEncoder().encode(content) : content.slice();
    const inode = { data, synced: data.slice(), mode: 0o644 };
    this.names.set(path, inode);
    this.durable.set(path, inode);
  }
  text(path: string): string {
    return new TextDecoder().decode(this.read(path));
  }
  openHandles(): number {
    return this.handles.size;
  }

  /**
   * What a disk may hold after the power went at this moment: of the changes of names not synced a prefix (a journal
   * keeps their order); of the bytes not synced all, none, some (torn), or as many zeros (a file that grew before its
   * data arrived). `random` gives numbers in [0, 1).
   */
  afterPowerLoss(random: () => number): MemoryFiles {
    const found = new MemoryFiles([...this.folders]);
    const names = new Map(this.durable);
    const kept = Math.floor(random() * (this.pending.length + 1));
    for (const change of this.pending.slice(0, kept)) apply(names, change);
    const copies = new Map<Inode, Uint8Array>();
    for (const [path, inode] of names) {
      const data = copies.get(inode) ?? contentAfterLoss(inode, random);
      copies.set(inode, data);
      found.put(path, data);
    }
    return found;
  }
}

function apply(names: Map<string, Inode>, change: NameChange): void {
  if ("set" in change) names.set(change.set, change.inode);
  else names.delete(change.drop);
}

function contentAfterLoss({ data, synced }: Inode, random: () => number): Uint8Array {
  const choice = random();
  if (choice < 0.25) return data;
  if (choice < 0.5) return synced;
  // only growth tears in parts; a file cut short is found long or short
  if (data.length <= synced.length) return choice < 0.75 ? data : synced;
  const cut = synced.length + Math.floor(random() * (data.length - synced.length + 1));
  if (choice < 0.75) return data.slice(0, cut);
  const zeros = data.slice();
  zeros.fill(0, cut);
  return zeros;
}

/** Tokens must differ between all the processes that a test plays. */
let tokens = 0;

/** Ports over a file system in memory; the clock stands unless slept or set. */
export function memoryPorts(files: FileSystem, more: Partial<Ports> = {}): Ports & { clock: { ms: number } } {
  const clock = { ms: Date.UTC(2026, 2, 1, 12) };
  const pid = more.pid ?? 100;
  return {
    clock,
    files,
    now: () => clock.ms,
    person: "Ana",
    host: "bench",
    pid,
    processAlive: () => true,
    processStart: () => null,
    sleep: async (ms) => {
      clock.ms += ms;
      await Promise.resolve();
    },
    randomToken: () => `${pid}-${(tokens++).toString(16).padStart(12, "0")}`,
    ...more,
  };
}

/** Numbers in [0, 1) from a seed (Park and Miller's generator), so that a failing image can be drawn again. */
export function seededRandom(seed: number): () => number {
  let state = (Math.abs(seed) % 2147483646) + 1;
  return () => {
    state = (state * 48271) % 2147483647;
    return state / 2147483647;
  };
}
