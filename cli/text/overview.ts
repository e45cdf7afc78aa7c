/**
 * The line as plain text, for pipes and for terminals that cannot hold the screens: the same words as the line screen,
 * the one that needs attention first, each trend as a sentence.
 */
import type { ChamberRow, LineOverview, RunSeen } from "../../recipes/index.ts";
import type { Look } from "../palette.ts";
import { laneSummary } from "../plot/lanes.ts";
import { changeInWords, counted, due, goalInBrief } from "./line-words.ts";
import { chanceText, chanceWord } from "./numbers.ts";
import { painted, type Row, words } from "./rows.ts";
import { wrap } from "./width.ts";

/** Lines joined by newlines, ending in one. `width` only decides where sentences wrap. */
export function overviewText(
  overview: LineOverview,
  options: { colour: boolean; ascii: boolean; width: number },
): string {
  const look: Look = { colour: options.colour ? "16" : "none", ascii: options.ascii };
  const rows: Row[] = [
    [
      { ...words(overview.line, look), tone: "strong" },
      words(`  ${overview.demo ? "demo line, " : ""}${counted(overview.entries, "entry", "entries")}`, look),
    ],
    ...wrapped(`goal: ${overview.goalText} (${overview.lightText})`, 0, options.width, look),
  ];
  for (const warning of overview.warnings) rows.push(...wrapped(`! ${warning}`, 0, options.width, look));
  for (const row of overview.chambers) rows.push([], ...chamberRows(row, overview, options.width, look));
  if (overview.chambers.length === 0) rows.push([], [{ text: "the line declares no chamber yet" }]);
  return rows.map((row) => painted(row, look)).join("\n") + "\n";
}

function chamberRows(row: ChamberRow, overview: LineOverview, width: number, look: Look): Row[] {
  const { goal } = row;
  const next = due(row);
  const facts = [
    `in goal ${chanceText(row.chanceInGoal)} (${chanceWord(row.chanceInGoal)})`,
    counted(row.runs, "run"),
    ...(row.cleaned ? [`${counted(row.depositionsSinceClean, "deposition")} since clean`] : []),
    ...(row.awaitingReadings > 0 ? [`${row.awaitingReadings} awaiting readings`] : []),
    ...(row.openChange === null ? [] : [changeInWords(row.openChange)]),
  ].join(", ");
  const rows: Row[] = [
    [
      { ...words(`${row.chamber} ${row.recipe}`, look), tone: "strong" },
      { text: "  " },
      { ...words(next.text, look), tone: next.tone },
    ],
    ...(goalInBrief(goal) === goalInBrief(overview.goal)
      ? []
      : wrapped(`goal of ${row.recipe}: ${goalInBrief(goal)}`, 2, width, look)),
    ...wrapped(row.sentence, 2, width, look),
    ...wrapped(facts, 2, width, look),
  ];
  if (goal.index !== undefined)
    rows.push(
      ...wrapped(
        trend("index", "", 3, goal.index, row, (run) => run.index, look),
        2,
        width,
        look,
      ),
    );
  if (goal.thicknessNm !== undefined)
    rows.push(
      ...wrapped(
        trend("thickness", "nm", 1, goal.thicknessNm, row, (run) => run.thicknessNm, look),
        2,
        width,
        look,
      ),
    );
  return rows;
}

function trend(
  name: string,
  unit: string,
  decimals: number,
  goal: { value: number; within: number },
  row: ChamberRow,
  of: (run: RunSeen) => number | null,
  look: Look,
): string {
  const points = row.lastRuns.map((run) => ({
    value: of(run),
    sinceClean: run.sinceClean,
    suspect: run.suspect > 0.5,
  }));
  return laneSummary(name, unit, decimals, { width: 0, look, goal, points });
}

function wrapped(text: string, indent: number, width: number, look: Look): Row[] {
  const lines = wrap(words(text, look).text, Math.max(20, width - indent));
  return lines.map((line): Row => [{ text: " ".repeat(indent) + line }]);
}
