/**
 * Spares the layout library what it does worst. It takes every styled character apart and puts it together again, which
 * was four fifths of the time from a key to the paint. So it lays out one stand-in character a row of a pane, and the
 * writer puts the finished row in its place. Panes tile the screen, so a line is its rows one after the other.
 */

/** Private-use characters stand for rows; what people type never gets here, it is only inside finished rows. */
const firstSlot = 0xe000;
const lastSlot = 0xf8ff;

export class RowSlots {
  private rows: string[] = [];

  /** Keeps a finished row; returns the one character that stands for it in this frame. */
  hold(row: string): string {
    if (this.rows.length > lastSlot - firstSlot) return " ";
    this.rows.push(row);
    return String.fromCharCode(firstSlot + this.rows.length - 1);
  }

  /** The frame with its rows in place. Forgets them: the next frame holds its own. */
  expand(frame: string): string {
    const { rows } = this;
    this.rows = [];
    return frame
      .split("\n")
      .map((line) => {
        let out = "";
        for (let i = 0; i < line.length; i++) {
          const code = line.charCodeAt(i);
          if (code >= firstSlot && code <= lastSlot) out += rows[code - firstSlot] ?? "";
        }
        return out.trimEnd();
      })
      .join("\n");
  }
}
