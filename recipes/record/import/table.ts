/**
 * From the bytes of a CSV file to headings and rows of text, each row with its line in the file. Byte-order marks, CR LF
 * and lone CR, commas, semicolons and tabs, quotes; what the cells mean is not asked here.
 */
import { CsvError, parse } from "csv-parse/sync";
import { Refusal, refuse } from "../../../engine/index.ts";
import type { ImportMap } from "./map-file.ts";

export interface Row {
  /** Line in the file, from 1. */
  row: number;
  cells: string[];
}

export interface Table {
  headings: string[];
  headingRow: number;
  rows: Row[];
  separator: string;
}

/** A file larger than this is not a table of runs. */
const LIMIT_BYTES = 50_000_000;

function decode(bytes: Uint8Array, map: ImportMap, file: string): string {
  if (bytes.length > LIMIT_BYTES) {
    refuse("file-too-large", `the file has ${bytes.length} bytes, at most ${LIMIT_BYTES} are read`, { file });
  }
  const utf16 = bytes[0] === 0xff && bytes[1] === 0xfe;
  if (utf16 && map.encoding === "utf-8") return new TextDecoder("utf-16le").decode(bytes);
  try {
    return new TextDecoder(map.encoding, { fatal: true }).decode(bytes);
  } catch (error) {
    if (!(error instanceof TypeError)) throw error;
    const before = new TextDecoder().decode(bytes).split("\ufffd")[0];
    return refuse("not-utf8", `the file is not ${map.encoding} text`, {
      file,
      row: before.split("\n").length,
      hint: "save it as UTF-8, or say `encoding: windows-1252` in the map file",
    });
  }
}

/** The one of , ; and tab that the heading line has most of, outside quotes. */
function separatorOf(heading: string): "," | ";" | "\t" {
  const bare = heading.replace(/"[^"]*"/g, "");
  const counts = ([",", ";", "\t"] as const).map((sign) => ({ sign, count: bare.split(sign).length }));
  return counts.reduce((best, one) => (one.count > best.count ? one : best)).sign;
}

/** Reads the table. Throws `not-utf8`, `file-too-large`, `empty-file`, `not-a-table` with the row. */
export function readTable(bytes: Uint8Array, file: string, map: ImportMap): Table {
  const all = decode(bytes, map, file)
    .replace(/^\ufeff/, "")
    .replace(/\r\n?/g, "\n");
  const lines = all.split("\n");
  const text = lines.slice(map.skipLines).join("\n");
  if (text.trim() === "") refuse("empty-file", "the file holds no table", { file });
  const first = lines.slice(map.skipLines).find((line) => line.trim() !== "") ?? "";
  const separator = map.separator ?? separatorOf(first);
  if (text.includes("\u0000")) {
    const row = all.slice(0, all.indexOf("\u0000")).split("\n").length;
    refuse("not-a-table", "the file holds NUL bytes: it is not text", { file, row });
  }
  const records = parseText(text, separator, file, map.skipLines);
  if (records.length === 0) refuse("empty-file", "the file holds no table", { file });
  const [heading, ...rows] = records;
  return { headings: heading.cells.map((cell) => cell.trim()), headingRow: heading.row, rows, separator };
}

function parseText(text: string, separator: string, file: string, skipped: number): Row[] {
  try {
    const records: unknown = parse(text, {
      delimiter: separator,
      record_delimiter: "\n",
      relax_column_count: true,
      skip_empty_lines: true,
      info: true,
    });
    return (records as { record: string[]; info: { lines: number } }[])
      .map(({ record, info }) => {
        // the count is that of the record's last line; a quoted cell may hold line ends
        const inside = record.reduce((sum, cell) => sum + (cell.includes("\n") ? cell.split("\n").length - 1 : 0), 0);
        return { row: info.lines - inside + skipped, cells: record };
      })
      .filter(({ cells }) => cells.some((cell) => cell.trim() !== ""));
  } catch (error) {
    if (!(error instanceof CsvError)) throw error;
    const line: unknown = Reflect.get(error, "lines");
    const row = typeof line === "number" ? line + skipped : undefined;
    throw new Refusal([
      {
        code: "not-a-table",
        message: `a quote is out of place: ${error.message}`,
        file,
        ...(row === undefined ? {} : { row }),
        hint: 'quotes stand around a whole cell, and a quote inside is doubled: "a ""b"" c"',
      },
    ]);
  }
}
