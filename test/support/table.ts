/** Reads the comma-separated tables of test/fixtures: one head line, no quotes. */
import { readFileSync } from "node:fs";

export interface Table {
  readonly rows: number;
  /** A column as numbers; throws when the column is missing or holds anything else. */
  numbers(column: string): number[];
}

export function readTable(path: string): Table {
  const [head, ...lines] = readFileSync(new URL(`../fixtures/${path}`, import.meta.url), "utf8")
    .trim()
    .split(/\r?\n/);
  const columns = head.split(",");
  return {
    rows: lines.length,
    numbers(column) {
      const at = columns.indexOf(column);
      if (at < 0) throw new Error(`${path} has no column ${column}`);
      return lines.map((line, i) => {
        const word = line.split(",")[at];
        const value = Number(word);
        if (!word || !Number.isFinite(value)) throw new Error(`${path}: ${column} of row ${i + 1} is "${word}"`);
        return value;
      });
    },
  };
}
