/** `check`: every file of the line folder validated, the book replayed and its chain verified; each problem with its place. */
import { type Problem, Refusal } from "../../engine/index.ts";
import { waferLight } from "../line/line-wafer.ts";
import { readLine } from "../line/read-line.ts";
import { BOOK } from "../record/read-book.ts";
import { safeText } from "../record/safe-text.ts";
import { namesWithoutView } from "../record/views.ts";
import { gaugeSentences } from "./gauge-readings.ts";
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

/** Once runs have pinned the facet factor, what the declared one alone would span is no news. */
function withPinnedFacet(ws: Workspace, said: string[]): string[] {
  const facet = ws.book.damage.length === 0 ? ws.model?.facet : undefined;
  if (!facet || facet.runs === 0) return said;
  const pinned = `The facet factor is pinned at ${facet.mean.toFixed(3)} sd ${facet.sd.toFixed(3)} by ${facet.runs} reflectance minima on textured cells.`;
  return [...said.filter((sentence) => !sentence.startsWith("The facet factor alone spans")), pinned];
}

/** Views edited by hand, and what keeps views from being written or read. */
function tellViews(ws: Workspace, problems: Problem[], warnings: string[]): void {
  for (const { what, name, entry } of namesWithoutView(ws.ledger))
    problems.push({
      code: "bad-name",
      message: `entry ${entry} names a ${what} "${safeText(name)}", which cannot be part of a file name: it has no view`,
      file: BOOK,
      row: entry + 1,
      hint: "correct its runs (coatwright correct), and go on under a proper name",
    });
  try {
    warnings.push(...editedViews(ws));
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    problems.push(...error.problems);
  }
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
  if (book.tail)
    warnings.push(
      `an append was interrupted: ${book.tail.bytes} bytes at the end of the book were never acknowledged; the next writer sets them aside`,
    );
  for (const problem of ledger.problems) warnings.push(`${problem.file}:${problem.row}: ${problem.message}`);
  warnings.push(...book.notices);
  if (lineRead) {
    for (const chamber of ledger.chambers.keys())
      if (!ws.line.chambers.has(chamber))
        warnings.push(
          `the book has entries of chamber ${chamber}, which line.yaml does not declare: they are left aside`,
        );
    if (book.damage.length === 0) tellViews(ws, problems, warnings);
    said = withPinnedFacet(ws, said);
    if (book.damage.length === 0) said.push(...gaugeSentences(ws.line, ledger, ws.gaugeBiases, ws.ports.now()));
    for (const gauge of new Set(ledger.gaugeReadings.map((reading) => reading.gauge)))
      if (!ws.line.gauges.has(gauge))
        warnings.push(
          `the book has reference readings of gauge ${safeText(gauge)}, which line.yaml does not declare: they are left aside`,
        );
  }
  if (ledger.lineFile !== null && ledger.lineFile !== new TextDecoder().decode(ws.readBeside(LINE_FILE)))
    warnings.push("line.yaml has changed since the last entry; the next entry records the difference");
  return { problems, warnings, said, entries: ledger.entries.length, head: book.hash };
}
