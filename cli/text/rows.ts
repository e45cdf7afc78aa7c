/**
 * Rows of toned text, the one form in which panes, plots and plain-text renderers hand over what they drew. A row is
 * data: it can be cut, joined, compared in a test, and painted last.
 */
import { type Look, paint, swatch, type Tone } from "../palette.ts";
import { asciiText, safeText } from "./safe-text.ts";
import { cells, cut } from "./width.ts";

export interface Segment {
  text: string;
  tone?: Tone;
  /** Background colour, for the wafer swatch only. */
  ground?: string;
}

export type Row = readonly Segment[];

/** Size and manner of what is drawn on. */
export interface Paper {
  width: number;
  height: number;
  look: Look;
}

/** A segment of text from anywhere, made safe, and ASCII where asked for. */
export function words(text: string, look: Look, tone?: Tone): Segment {
  const safe = look.ascii ? asciiText(text) : safeText(text);
  return tone === undefined ? { text: safe } : { text: safe, tone };
}

export function rowText(row: Row): string {
  return row.map((segment) => segment.text).join("");
}

export function rowCells(row: Row): number {
  return row.reduce((sum, segment) => sum + cells(segment.text), 0);
}

/** The row cut or padded to exactly `width` cells. */
export function toWidth(row: Row, width: number, mark = "…"): Row {
  const out: Segment[] = [];
  let used = 0;
  for (const segment of row) {
    const room = width - used;
    if (room <= 0) break;
    const wide = cells(segment.text);
    if (wide <= room) {
      out.push(segment);
      used += wide;
      continue;
    }
    const text = cut(segment.text, room, mark);
    out.push({ ...segment, text });
    used += cells(text);
    break;
  }
  if (used < width) out.push({ text: " ".repeat(width - used) });
  return out;
}

/** Rows cut or padded to the paper: exactly `height` rows of exactly `width` cells. */
export function fill(rows: readonly Row[], paper: Paper): Row[] {
  const mark = paper.look.ascii ? "~" : "…";
  const out: Row[] = [];
  for (let i = 0; i < paper.height; i++) out.push(toWidth(rows[i] ?? [], paper.width, mark));
  return out;
}

/** Two blocks of rows side by side; the left one padded to `leftWidth`. */
export function beside(leftRows: readonly Row[], leftWidth: number, rightRows: readonly Row[]): Row[] {
  const out: Row[] = [];
  for (let i = 0; i < Math.max(leftRows.length, rightRows.length); i++) {
    out.push([...toWidth(leftRows[i] ?? [], leftWidth), ...(rightRows[i] ?? [])]);
  }
  return out;
}

const control = /[\u0000-\u001f\u007f-\u009f]/g;

/**
 * The row as a string for the terminal. The last gate: no control character passes whatever slipped through before, and
 * with `ascii` nothing above 0x7e.
 */
export function painted(row: Row, look: Look): string {
  let out = "";
  for (const segment of row) {
    let text = segment.text.replace(control, "?");
    if (look.ascii) text = text.replaceAll("…", "~").replace(/[^\u0020-\u007e]/g, "?");
    out +=
      segment.ground === undefined ? paint(text, segment.tone ?? "plain", look) : swatch(text, segment.ground, look);
  }
  return out;
}
