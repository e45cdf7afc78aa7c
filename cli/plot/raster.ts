/**
 * A grid of dots, two across and four up in each terminal cell (the braille block, Unicode chapter 21.1: U+2800 plus
 * one bit a dot), with an ASCII twin of one mark a cell. Drawing is clipped, never wrapped.
 */

/** Bits of a cell's dots, [row from the top][column]. */
const bits = [
  [0x01, 0x08],
  [0x02, 0x10],
  [0x04, 0x20],
  [0x40, 0x80],
] as const;

export class Raster {
  readonly dotsAcross: number;
  readonly dotsUp: number;
  private readonly masks: Uint8Array;
  readonly columns: number;
  readonly rows: number;
  constructor(columns: number, rows: number) {
    this.columns = columns;
    this.rows = rows;
    this.dotsAcross = columns * 2;
    this.dotsUp = rows * 4;
    this.masks = new Uint8Array(columns * rows);
  }

  /** Sets the dot at x from the left, y from the bottom. Outside: nothing happens. */
  dot(x: number, y: number): void {
    if (!(x >= 0 && y >= 0 && x < this.dotsAcross && y < this.dotsUp)) return;
    const column = Math.floor(x);
    const fromTop = this.dotsUp - 1 - Math.floor(y);
    const cell = (fromTop >> 2) * this.columns + (column >> 1);
    this.masks[cell] = this.masks[cell]! | bits[fromTop & 3]![column & 1]!;
  }

  /** A straight line between two dots; `on` and `off` dots in turn make it dashed. Returns where in the turn it ended. */
  line(x0: number, y0: number, x1: number, y1: number, on = 1, off = 0, phase = 0): number {
    const steps = Math.max(1, Math.ceil(Math.max(Math.abs(x1 - x0), Math.abs(y1 - y0))));
    // A line to a far-off point would take for ever and show nothing more.
    if (!Number.isFinite(steps) || steps > 20_000) return phase;
    for (let i = 0; i <= steps; i++) {
      if ((phase + i) % (on + off) < on) this.dot(x0 + ((x1 - x0) * i) / steps, y0 + ((y1 - y0) * i) / steps);
    }
    return (phase + steps) % (on + off);
  }

  /** The dots of a cell, row from the top; 0 when empty. */
  mask(column: number, row: number): number {
    return this.masks[row * this.columns + column] ?? 0;
  }

  /** The character of a cell, or "" when empty. `mark` is used in its place without braille. */
  glyph(column: number, row: number, ascii: boolean, mark: string): string {
    const mask = this.mask(column, row);
    if (mask === 0) return "";
    return ascii ? mark : String.fromCharCode(0x2800 + mask);
  }
}
