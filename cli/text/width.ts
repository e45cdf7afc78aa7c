/**
 * How many terminal cells a text takes, and cutting and wrapping by cells. Everything drawn is cut here, by us: layout
 * libraries cache what they cut, without limit.
 */
import stringWidth from "string-width";

/** ASCII, Latin-1, dashes, arrows, box drawing, blocks, geometric signs, braille: one cell each. Spares the slow route. */
const narrow = /^[\u0020-\u007e\u00a1-\u00ac\u00ae-\u02ff\u2010-\u2027\u2190-\u21ff\u2500-\u25fc\u2800-\u28ff]*$/;

/** Cells taken by text without control characters; ambiguous-width signs count as one. */
export function cells(text: string): number {
  return narrow.test(text) ? text.length : stringWidth(text);
}

const segmenter = new Intl.Segmenter();

/** The longest beginning that fits `width` cells, without splitting a character as seen. */
export function take(text: string, width: number): string {
  if (width <= 0) return "";
  if (narrow.test(text)) return text.slice(0, width);
  let out = "";
  let used = 0;
  for (const { segment } of segmenter.segment(text)) {
    const wide = cells(segment);
    if (used + wide > width) break;
    out += segment;
    used += wide;
  }
  return out;
}

/** Cut to `width` cells, the last one showing `mark` where something is missing; never longer than `width`. */
export function cut(text: string, width: number, mark = "…"): string {
  if (cells(text) <= width) return text;
  return width <= 0 ? "" : take(text, width - 1) + mark;
}

/** Cut or padded to exactly `width` cells, text at the left. */
export function left(text: string, width: number, mark = "…"): string {
  const fitted = cut(text, width, mark);
  return fitted + " ".repeat(Math.max(0, width - cells(fitted)));
}

/** Cut or padded to exactly `width` cells, text at the right. */
export function right(text: string, width: number, mark = "…"): string {
  const fitted = cut(text, width, mark);
  return " ".repeat(Math.max(0, width - cells(fitted))) + fitted;
}

/** Lines of at most `width` cells, broken at spaces; a word longer than a line is broken where it must. */
export function wrap(text: string, width: number): string[] {
  if (width <= 0) return [];
  // What fits stays as it is, columns lined up with blanks included.
  if (cells(text) <= width) return [text];
  const lines: string[] = [];
  let line = "";
  for (let word of text.split(/ +/)) {
    if (word === "") continue;
    if (line !== "" && cells(line) + 1 + cells(word) <= width) {
      line += " " + word;
      continue;
    }
    if (line !== "") lines.push(line);
    while (cells(word) > width) {
      const head = take(word, width);
      if (head === "") return lines;
      lines.push(head);
      word = word.slice(head.length);
    }
    line = word;
  }
  if (line !== "") lines.push(line);
  return lines.length === 0 ? [""] : lines;
}
