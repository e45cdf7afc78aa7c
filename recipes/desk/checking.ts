/** `check`: every file of the line folder validated, the book replayed and its chain verified; each problem with its place. */
import { type Problem, Refusal } from "../../engine/index.ts";
import { waferLight } from "../line/line-wafer.ts";
import { readLine } from "../line/read-line.ts";
import { editedViews } from "./views.ts";
import { LINE_FILE, type Workspace } from "./workspace.ts";

export interface Checked {
  problems: Problem[];
  /** True but worth knowing: views edited by hand, entries without effect. */
  warnings: string[];
  /** What the declared numbers imply. */
  said: string[];
  entries: number;
  head: string;
}

export function checkLine(ws: Workspace): Checked {
  const problems: Problem[] = [];
  const warnings: string[] = [];
  let said: string[] = [];
  let lineRead = true;
  try {
    const line = readLine(ws.readBeside(LINE_FILE), LINE_FILE, {
      readFile: (name) => ws.readBeside(name),
      light: waferLight,
    });
    said = [...line.implications];
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    problems.push(...error.problems);
    lineRead = false;
  }
  const { book, ledger } = ws;
  problems.push(...book.problems());
  for (const problem of ledger.problems) warnings.push(`${problem.file}:${problem.row}: ${problem.message}`);
  warnings.push(...book.notices);
  if (lineRead) {
    for (const chamber of ledger.chambers.keys())
      if (!ws.line.chambers.has(chamber))
        warnings.push(
          `the book has entries of chamber ${chamber}, which line.yaml does not declare: they are left aside`,
        );
    warnings.push(...editedViews(ws));
  }
  if (ledger.lineFile !== null && ledger.lineFile !== new TextDecoder().decode(ws.readBeside(LINE_FILE)))
    warnings.push("line.yaml has changed since the last entry; the next entry records the difference");
  return { problems, warnings, said, entries: ledger.entries.length, head: book.hash };
}
