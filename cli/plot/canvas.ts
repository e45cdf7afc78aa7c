/**
 * A grid of single characters with a tone each, turned into rows of few segments (neighbours of one tone are joined:
 * what a frame costs follows the number of tone changes).
 */
import type { Tone } from "../palette.ts";
import type { Row, Segment } from "../text/rows.ts";

export class Canvas {
  readonly width: number;
  readonly height: number;
  private readonly marks: string[];
  private readonly tones: Tone[];
  constructor(width: number, height: number) {
    this.width = Math.max(0, Math.floor(width));
    this.height = Math.max(0, Math.floor(height));
    this.marks = new Array<string>(this.width * this.height).fill(" ");
    this.tones = new Array<Tone>(this.width * this.height).fill("plain");
  }

  /** Puts one-cell characters from (column, row) on, row from the top; what falls outside is left out. */
  put(column: number, row: number, text: string, tone: Tone = "plain"): void {
    if (row < 0 || row >= this.height) return;
    let at = column;
    for (const mark of text) {
      if (at >= 0 && at < this.width) {
        this.marks[row * this.width + at] = mark;
        this.tones[row * this.width + at] = tone;
      }
      at++;
    }
  }

  at(column: number, row: number): string {
    return this.marks[row * this.width + column] ?? "";
  }

  rows(): Row[] {
    const out: Row[] = [];
    for (let row = 0; row < this.height; row++) {
      const segments: Segment[] = [];
      let text = "";
      let tone: Tone = "plain";
      for (let column = 0; column < this.width; column++) {
        const mark = this.marks[row * this.width + column]!;
        // A blank has no tone of its own: it joins what stands left of it (nothing here is underlined or inverse).
        const next: Tone = mark === " " ? tone : this.tones[row * this.width + column]!;
        if (next !== tone && text !== "") {
          segments.push({ text, tone });
          text = "";
        }
        tone = next;
        text += mark;
      }
      if (text !== "") segments.push({ text, tone });
      out.push(segments);
    }
    return out;
  }
}
