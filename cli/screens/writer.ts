/**
 * What stands between the layout library and the terminal: it receives whole frames, compares them line by line with the
 * one on screen, and writes only lines that changed, each at its own address, inside one synchronised update. It never
 * clears to repaint, never scrolls, and forgets what it knew when the terminal changed under it.
 */
import { EventEmitter } from "node:events";
import { cells } from "../text/width.ts";

/** The part of a terminal stream that is used. */
export interface TerminalOut {
  columns?: number;
  rows?: number;
  write(text: string): boolean;
}

const styles = /\u001b\[[0-9;:]*m/g;
const syncStart = "\u001b[?2026h";
const syncEnd = "\u001b[?2026l";

export class FrameWriter extends EventEmitter {
  readonly isTTY = true;
  readonly writable = true;
  private shown: string[] = [];
  private last = "";
  private clearFirst = true;
  private open = true;
  /** Frames written and bytes sent, for measuring. */
  readonly tally = { frames: 0, bytes: 0 };
  private readonly out: TerminalOut;
  private readonly expand: (frame: string) => string;

  /** `expand` turns what the layout library hands over into what is to be seen (`row-slots.ts`). */
  constructor(out: TerminalOut, expand: (frame: string) => string = (frame) => frame) {
    super();
    this.out = out;
    this.expand = expand;
  }

  get columns(): number {
    return this.out.columns || 80;
  }

  get rows(): number {
    return this.out.rows || 24;
  }

  /** A whole frame, lines joined by newlines. Cursor commands of the layout library are not frames and are ignored. */
  write(frame: string): boolean {
    if (frame === "" || frame === "\n" || /^(?:\u001b\[\?\d+[hl])+$/.test(frame)) return true;
    this.last = this.expand(frame);
    this.paint();
    return true;
  }

  /** Forgets what is on screen and draws the last frame afresh. */
  repaint(): void {
    this.shown = [];
    this.clearFirst = true;
    if (this.last !== "") this.paint();
  }

  /** The terminal has a new size: what is on screen is not known any more; the next frame draws everything. */
  resized(): void {
    this.shown = [];
    this.clearFirst = true;
    this.emit("resize");
  }

  /** After this nothing is written. */
  shut(): void {
    this.open = false;
  }

  private paint(): void {
    if (!this.open) return;
    const lines = this.last.split("\n").slice(0, this.rows);
    let body = this.clearFirst ? "\u001b[0m\u001b[2J" : "";
    for (let row = 0; row < Math.max(lines.length, this.shown.length); row++) {
      const line = lines[row] ?? "";
      if (!this.clearFirst && line === (this.shown[row] ?? "")) continue;
      if (this.clearFirst && line === "") continue;
      // Erasing to the end of the line would eat the last character of a full one: the cursor still stands on it.
      const full = cells(line.replace(styles, "")) >= this.columns;
      body += `\u001b[${row + 1};1H${line}\u001b[0m${full ? "" : "\u001b[K"}`;
    }
    this.shown = lines;
    this.clearFirst = false;
    if (body === "") return;
    const text = syncStart + body + syncEnd;
    this.tally.frames++;
    this.tally.bytes += Buffer.byteLength(text);
    this.out.write(text);
  }
}
