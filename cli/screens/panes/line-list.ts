/**
 * The line screen's list: each chamber with what it needs, in words, and its last runs against the goal. The one that
 * needs attention first stands first; the chosen one is always in view, drawn in full even when room is short.
 */
import type { ChamberRow } from "../../../recipes/index.ts";
import { keyText } from "../../keys.ts";
import { type Look, signs } from "../../palette.ts";
import { type LanePlot, laneRows, offGoal } from "../../plot/lanes.ts";
import { changeInWords, counted, due, sentenceInBrief } from "../../text/line-words.ts";
import { chanceText, chanceWord, fixed } from "../../text/numbers.ts";
import { beside, type Paper, type Row, words } from "../../text/rows.ts";
import { cells, cut } from "../../text/width.ts";
import { spread } from "./frame.ts";

/** Rows of a chamber drawn in full, with the blank after it; and in brief. */
const fullHeight = 6;
const briefHeight = 2;

export function lineListRows(chambers: readonly ChamberRow[], chosen: string | null, paper: Paper): Row[] {
  if (chambers.length === 0) return [[{ text: "no chamber matches" }]];
  const allFull = chambers.length * fullHeight - 1 <= paper.height;
  const blocks = chambers.map((row) => {
    const isChosen = row.chamber === chosen;
    return allFull || isChosen ? fullBlock(row, isChosen, paper) : briefBlock(row, isChosen, paper);
  });
  return windowOf(
    blocks,
    chambers.findIndex((row) => row.chamber === chosen),
    paper.height,
  );
}

/** As many whole blocks as fit, moved down only so far that the chosen one is whole. */
function windowOf(blocks: readonly Row[][], chosen: number, height: number): Row[] {
  let first = 0;
  const heightOf = (from: number, to: number) =>
    blocks.slice(from, to + 1).reduce((sum, block) => sum + block.length, 0) - 1;
  while (first < chosen && heightOf(first, Math.max(0, chosen)) > height) first++;
  return blocks.slice(first).flat().slice(0, height);
}

function firstRow(row: ChamberRow, isChosen: boolean, paper: Paper): Row {
  const { look, width } = paper;
  const next = due(row);
  const key = next.key === "" ? "" : ` (${keyText(next.key)})`;
  const chance = `in goal ${chanceText(row.chanceInGoal)}`;
  const name = words(`${row.chamber} ${row.recipe}`.padEnd(14), look).text;
  const head = next.text.slice(0, next.text.indexOf(":"));
  // Short of room, the word for the chance goes first, then what stands behind the colon.
  const forms = [
    [`${next.text}${key}`, `${chance}, ${chanceWord(row.chanceInGoal)}`],
    [`${next.text}${key}`, chance],
    [`${head}${key}`, chance],
  ];
  const room = width - cells(name) - 5;
  const [call, side] = forms.find(([a, b]) => cells(a) + cells(b) <= room) ?? forms[2];
  return spread(
    [
      { text: isChosen ? `${signs(look).pointer} ` : "  ", tone: "strong" },
      { text: name, tone: isChosen ? "chosen" : "strong" },
      { text: " " },
      { ...words(call, look), tone: next.tone },
    ],
    [words(side, look)],
    width,
  );
}

function briefBlock(row: ChamberRow, isChosen: boolean, paper: Paper): Row[] {
  return [
    firstRow(row, isChosen, paper),
    [{ text: "    " }, words(sentenceInBrief(row.sentence, paper.width - 4), paper.look)],
  ].slice(0, briefHeight);
}

function fullBlock(row: ChamberRow, isChosen: boolean, paper: Paper): Row[] {
  const { look, width } = paper;
  const extra = [
    counted(row.runs, "run"),
    ...(row.cleaned ? [`${counted(row.depositionsSinceClean, "deposition")} since clean`] : []),
    ...(row.awaitingReadings > 0 ? [`${row.awaitingReadings} awaiting readings`] : []),
    ...(row.openChange === null ? [] : [changeInWords(row.openChange)]),
  ].join(", ");
  const mark = look.ascii ? "~" : "…";
  const sentence = words(sentenceInBrief(row.sentence, width - 4), look).text;
  const room = width - 4 - sentence.length - 3;
  const second =
    room > extra.length
      ? spread([{ text: `    ${sentence}` }], [words(extra, look)], width)
      : [{ text: cut(`    ${sentence}`, width, mark) }];
  const half = Math.floor((width - 4) / 2);
  const index = lanes("index", "", 3, row.goal.index, row, (run) => run.index, half - 2, look);
  const thickness = lanes("thickness", "nm", 1, row.goal.thicknessNm, row, (run) => run.thicknessNm, half, look);
  const trend = beside(index, half, thickness).map((one): Row => [{ text: "    " }, ...one]);
  return [firstRow(row, isChosen, paper), second, ...trend, []];
}

const labelWidth = 12;
const laneNames = ["above", " goal", "below"];

/** Name, last value and how it stands; beside them the three lanes. */
function lanes(
  name: string,
  unit: string,
  decimals: number,
  goal: { value: number; within: number } | undefined,
  row: ChamberRow,
  of: (run: ChamberRow["lastRuns"][number]) => number | null,
  width: number,
  look: Look,
): Row[] {
  const runs = row.lastRuns.filter((run) => of(run) !== null);
  const last = runs.length === 0 ? null : of(runs[runs.length - 1]);
  const value = last === null ? "not measured" : `${fixed(last, decimals)} ${unit}`.trim();
  if (goal === undefined) return [[{ text: name }], [{ text: value }], [{ text: "no goal for it" }]];
  const stand = last === null ? "" : offGoal(last, goal, unit, decimals);
  const plot: LanePlot = {
    width: Math.max(4, width - labelWidth - 7),
    look,
    goal,
    points: row.lastRuns.map((run) => ({ value: of(run), sinceClean: run.sinceClean, suspect: run.suspect > 0.5 })),
  };
  const drawn = laneRows(plot);
  const wall = signs(look).wall;
  return [name, value, stand].map(
    (text, lane): Row => [
      { text: text.padEnd(labelWidth), tone: lane === 2 && stand !== "in goal" && stand !== "" ? "watch" : "plain" },
      { text: `${laneNames[lane]}${wall}` },
      ...drawn[lane],
    ],
  );
}
