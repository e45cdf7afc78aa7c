/** The sites file of a run: position,site,index,thickness_nm, any subset of the last two. */
import { parse } from "csv-parse/sync";
import { refuse } from "../../engine/index.ts";

interface Site {
  position?: string;
  site?: string;
  index?: number;
  thickness_nm?: number;
}

/** Reads it, refusing unknown columns, missing values and what is not a number, with row and column. */
export function readSites(bytes: Uint8Array, file: string): Site[] {
  let rows: string[][];
  try {
    rows = parse(Buffer.from(bytes), {
      bom: true,
      trim: true,
      skip_empty_lines: true,
      relax_column_count: false,
    }) as string[][];
  } catch (error) {
    return refuse("bad-csv", `${file} cannot be read as CSV: ${(error as Error).message}`, { file });
  }
  const [head, ...body] = rows;
  if (!head || body.length === 0)
    refuse("empty-file", `${file} holds no sites`, { file, hint: "position,site,index,thickness_nm and a row a site" });
  const names = head.map((h) => h.toLowerCase());
  const allowed = ["position", "site", "index", "thickness_nm"];
  names.forEach((name, i) => {
    if (!allowed.includes(name))
      refuse("unknown-column", `"${head[i]}" is not a column of a sites file`, {
        file,
        row: 1,
        column: i + 1,
        hint: allowed.join(","),
      });
  });
  if (!names.includes("index") && !names.includes("thickness_nm"))
    refuse("missing-column", `${file} has neither index nor thickness_nm`, { file, row: 1 });
  return body.map((cells, r) => {
    const site: Site = {};
    names.forEach((name, c) => {
      const cell = cells[c];
      if (name === "position" || name === "site") {
        if (cell !== "") site[name] = cell;
        return;
      }
      const value = Number(cell);
      const [low, high] = name === "index" ? [1.3, 4] : [0.1, 2000];
      if (cell === "" || !Number.isFinite(value) || value < low || value > high)
        refuse("bad-value", `${name} "${cell}" is not a number from ${low} to ${high}`, {
          file,
          row: r + 2,
          column: c + 1,
          hint: cell.includes(",") ? "write 84.1, not 84,1" : undefined,
        });
      site[name as "index" | "thickness_nm"] = value;
    });
    return site;
  });
}
