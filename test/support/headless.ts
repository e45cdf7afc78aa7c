/**
 * A terminal in memory: what a person would see, for tests of what is written to it.
 */
import xterm from "@xterm/headless";

export class SeenTerminal {
  readonly terminal: InstanceType<typeof xterm.Terminal>;
  constructor(columns: number, rows: number) {
    this.terminal = new xterm.Terminal({ cols: columns, rows, allowProposedApi: true });
  }

  /** Resolves when the text is on screen. */
  write(text: string): Promise<void> {
    return new Promise((resolve) => this.terminal.write(text, resolve));
  }

  /** The lines on screen, ends trimmed. */
  lines(): string[] {
    const buffer = this.terminal.buffer.active;
    return Array.from(
      { length: this.terminal.rows },
      (_, row) => buffer.getLine(buffer.baseY + row)?.translateToString(true) ?? "",
    );
  }

  get alternate(): boolean {
    return this.terminal.buffer.active.type === "alternate";
  }
}
