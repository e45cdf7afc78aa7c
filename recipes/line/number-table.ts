/**
 * Reads small tables of numbers kept beside a YAML file: a heading row, then numbers separated by commas
 * (`wavelength_nm,n,k` or `wavelength_nm,efficiency`). Cells hold nothing but numbers, so no quoting is needed and a CSV
 * library would only cost start-up time; the importer of runs, which meets real spreadsheets, uses one.
 */
import { nearestWord, type Problem, Refusal, refuse } from "../../engine/index.ts";

/** How files named inside a YAML file are read: the name as written, relative to that file. Throws when it cannot. */
export type FileReader = (name: string) => Uint8Array | string;

const MOST_ROWS = 20_000;

/**
 * Columns by heading, in file order; headings are matched without regard to case, other columns are refused.
 * `columns` gives each name the lowest and highest value it may hold; all are needed, and the first must increase.
 * Throws a Refusal with every bad cell (the first 20) by row and column, or `missing-column`, `unknown-column`,
 * `duplicate-column`, `too-few-rows`, `file-too-large`, `empty-file`.
 */
export function readNumberTable<Name extends string>(
  source: Uint8Array | string,
  file: string,
  columns: Readonly<Record<Name, readonly [low: number, high: number]>>,
): Record<Name, number[]> {
  const names = Object.keys(columns) as Name[];
  const text = (typeof source === "string" ? source : new TextDecoder().decode(source)).replace(/^\ufeff/, "");
  const rows = text.split(/\r\n|\n|\r/);
  while (rows.length > 0 && rows[rows.length - 1].trim() === "") rows.pop();
  if (rows.length > MOST_ROWS) {
    refuse("file-too-large", `the table has ${rows.length} rows, at most ${MOST_ROWS} are read`, { file });
  }
  if (rows.length === 0) refuse("empty-file", "the table is empty", { file, row: 1, column: 1 });
  const heading = cellsOf(rows[0]).map(({ text: cell, column }) => ({ cell: cell.toLowerCase(), column }));
  const problems: Problem[] = [];
  const report = (code: string, message: string, row: number, column: number, hint?: string) => {
    if (problems.length < 20) problems.push({ code, message, file, row, column, ...(hint ? { hint } : {}) });
  };
  const positions = new Map<Name, number>();
  for (const [i, { cell, column }] of heading.entries()) {
    const name = names.find((known) => known === cell);
    if (name === undefined) {
      const near = nearestWord(cell, names);
      const hint = near ? `did you mean ${near}?` : `columns are ${names.join(", ")}`;
      report("unknown-column", `"${cell}" is not a column known here`, 1, column, hint);
    } else if (positions.has(name)) report("duplicate-column", `the column ${name} stands twice`, 1, column);
    else positions.set(name, i);
  }
  for (const name of names) {
    if (positions.has(name)) continue;
    report("missing-column", `the column ${name} is missing`, 1, 1, `the heading row is ${names.join(",")}`);
  }
  if (problems.length > 0) throw new Refusal(problems);

  const table = Object.fromEntries(names.map((name) => [name, [] as number[]])) as Record<Name, number[]>;
  for (let r = 1; r < rows.length; r++) {
    if (rows[r].trim() === "") continue;
    const cells = cellsOf(rows[r]);
    if (cells.length !== heading.length) {
      const hint = "a comma separates columns; a decimal point is written in numbers";
      report("wrong-columns", `the row has ${cells.length} cells, the heading ${heading.length}`, r + 1, 1, hint);
      continue;
    }
    for (const [name, i] of positions) {
      const { text: cell, column } = cells[i];
      const value = /^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/.test(cell) ? Number(cell) : Number.NaN;
      if (!Number.isFinite(value)) {
        report("not-a-number", `${name} is "${cell.slice(0, 40)}", a finite number is needed`, r + 1, column);
      } else if (value < columns[name][0] || value > columns[name][1]) {
        const [low, high] = columns[name];
        report("out-of-bounds", `${name} ${cell} lies outside ${low} to ${high}`, r + 1, column);
      }
      const before = table[name].at(-1);
      if (name === names[0] && before !== undefined && value <= before) {
        report("not-increasing", `${name} ${cell} does not lie above ${before} in the row before`, r + 1, column);
      }
      table[name].push(value);
    }
  }
  if (problems.length === 0 && table[names[0]].length < 2) {
    report("too-few-rows", "at least two rows of numbers are needed", rows.length, 1);
  }
  if (problems.length > 0) throw new Refusal(problems);
  return table;
}

function cellsOf(row: string): { text: string; column: number }[] {
  let column = 1;
  return row.split(",").map((raw) => {
    const cell = { text: raw.trim().replace(/^"(.*)"$/, "$1"), column: column + (raw.length - raw.trimStart().length) };
    column += raw.length + 1;
    return cell;
  });
}

/** Reads a file named in a YAML file. Throws `bad-file-name` for a path that leaves the folder, `no-file` when absent. */
export function openBeside(name: string, read: FileReader | undefined): Uint8Array | string {
  const parts = name.split(/[\\/]/);
  if (name.startsWith("/") || /^[A-Za-z]:/.test(name) || parts.includes("..") || /[\p{Cc}]/u.test(name)) {
    refuse("bad-file-name", `"${name}" leaves the folder`, { hint: "name a file in this folder or below it" });
  }
  if (!read) refuse("no-file", `"${name}" cannot be read here`);
  try {
    return read(name);
  } catch (error) {
    const reason = error instanceof Error && "code" in error ? ` (${String(error.code)})` : "";
    return refuse("no-file", `"${name}" cannot be read${reason}`, { hint: "the name is relative to this file" });
  }
}
