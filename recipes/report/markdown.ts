/** Markdown that says what it is given: cells and text are escaped, so that a note cannot change the page. */
import { safeText } from "../record/safe-text.ts";

/** Text for a paragraph or a cell: control characters made visible, Markdown and HTML signs escaped. */
export function plain(text: string): string {
  return safeText(text).replace(/[\\`*_[\]<>|#]/g, (sign) => `\\${sign}`);
}

export function table(head: readonly string[], rows: readonly (readonly string[])[]): string {
  const line = (cells: readonly string[]) => `| ${cells.map(plain).join(" | ")} |`;
  return [line(head), `| ${head.map(() => "---").join(" | ")} |`, ...rows.map(line)].join("\n");
}
