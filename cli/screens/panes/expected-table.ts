/**
 * What to expect: film, light and chance at the settings in force and at those tried, side by side.
 */
import type { Interval, Outlook } from "../../../recipes/index.ts";
import type { Look, Tone } from "../../palette.ts";
import { signs } from "../../palette.ts";
import { chanceText, fixed, withHalf } from "../../text/numbers.ts";
import { type Paper, type Row, rowCells, type Segment, toWidth, words } from "../../text/rows.ts";
import { left } from "../../text/width.ts";
import type { ChamberState } from "../state.ts";
import { draftName } from "./settings-table.ts";

const labels = {
  wide: ["index", "thickness nm", "weighted R %", "R minimum nm", "all in goal", "lost mA/cm2", "colour"],
  narrow: ["index", "thick nm", "R %", "min nm", "in goal", "lost mA", "colour"],
};

/**
 * The expectation in at most the paper's height: what is judged always, then whether it is outside the window, then losses and
 * colour as far as there is room.
 */
export function expectedRows(chamber: ChamberState, paper: Paper): Row[] {
  const { look, width } = paper;
  const { now, goal } = chamber.view;
  const { after } = chamber;
  const withGoal = width >= 54;
  // Two columns of "2.049 ±0.015" (longer in ASCII) with a blank between them.
  const narrow = width < 13 + 2 * 14;
  const labelWidth = narrow ? 9 : 13;
  const names = narrow ? labels.narrow : labels.wide;
  const column = Math.floor((width - labelWidth - (withGoal ? 14 : 0)) / 2);
  const sign = signs(look);
  const name = draftName(chamber);
  const row = (label: string, a: Segment[], b: Segment[], goalText = ""): Row => [
    { text: left(label, labelWidth) },
    ...toWidth(a, column),
    ...toWidth(b, column),
    ...(withGoal ? [words(goalText, look)] : []),
  ];
  const value = (
    of: (outlook: Outlook) => Interval | null,
    decimals: number,
    inGoal: (mean: number) => boolean | null,
  ) =>
    [now, after].map((outlook): Segment[] => {
      const interval = outlook === null ? null : of(outlook);
      if (interval === null) return [{ text: outlook === null ? "" : "-" }];
      const within = inGoal(interval.mean);
      const text = withHalf(interval, decimals);
      return [
        {
          text: look.ascii ? text.replace(" ±", narrow ? "~" : "+/-") : text,
          tone: within === null ? "plain" : within ? "good" : "watch",
        },
      ];
    });
  const line = (label: string, cellsOf: Segment[][], goalText = "") => row(label, cellsOf[0], cellsOf[1], goalText);
  const header: Row = row(
    "expected",
    [{ text: `${sign.now} now`, tone: "now" }],
    [{ text: after === null ? "" : `${sign.after} ${name}`, tone: "after" }],
    "goal",
  );
  const { index, thicknessNm, weightedReflectancePercent, reflectanceMinimumNm } = goal;
  const near = (goalOf: { value: number; within: number } | undefined) => (mean: number) =>
    goalOf === undefined ? null : Math.abs(mean - goalOf.value) <= goalOf.within + 1e-9;
  const rows: Row[] = [
    header,
    line(
      names[0],
      value((o) => o.predicted.index, 3, near(index)),
      toleranceText(index, 2),
    ),
    line(
      names[1],
      value((o) => o.predicted.thickness_nm, 1, near(thicknessNm)),
      toleranceText(thicknessNm, 0),
    ),
    line(
      names[2],
      value(
        (o) => o.predicted.weighted_reflectance_percent,
        2,
        (mean) => (weightedReflectancePercent === undefined ? null : mean <= weightedReflectancePercent.atMost),
      ),
      weightedReflectancePercent === undefined ? "" : `at most ${weightedReflectancePercent.atMost}`,
    ),
    line(
      names[3],
      value((o) => o.predicted.reflectance_minimum_nm, 0, near(reflectanceMinimumNm)),
      toleranceText(reflectanceMinimumNm, 0),
    ),
    line(
      names[4],
      [now, after].map((o) => chanceCell(o)),
    ),
  ];
  // Which limit, the line under the screen says in full.
  if ((after ?? now).outsideWindow.length > 0) rows.push([{ text: "OUTSIDE the qualified window", tone: "alarm" }]);
  const losses = line(
    names[5],
    [now, after].map((o): Segment[] => [{ text: lossText(o) }]),
  );
  const colours = colourRows(now, after, labelWidth, column, look);
  for (const more of [[losses], colours]) if (rows.length + more.length <= paper.height) rows.push(...more);
  return rows;
}

function chanceCell(outlook: Outlook | null): Segment[] {
  if (outlook === null) return [{ text: "" }];
  const chance = outlook.chanceInGoal;
  const tone: Tone = chance === null ? "plain" : chance >= 0.7 ? "good" : "watch";
  return [{ text: chanceText(chance), tone }];
}

/** Light that does not reach the silicon: reflected, and absorbed in the film. */
function lossText(outlook: Outlook | null): string {
  if (outlook === null) return "";
  if (outlook.current === null) return "-";
  return fixed(outlook.current.reflected + outlook.current.absorbedInFilm, 2);
}

/** Side by side where the words fit their columns, else one under the other, each with its sign. */
function colourRows(now: Outlook, after: Outlook | null, labelWidth: number, column: number, look: Look): Row[] {
  const sign = signs(look);
  const patch = (outlook: Outlook): Segment[] =>
    outlook.colour !== null && (look.colour === "true" || look.colour === "256")
      ? [{ text: "  ", ground: outlook.colour.hex }, { text: " " }]
      : [];
  const said = (outlook: Outlook): Segment[] => [...patch(outlook), words(outlook.colour?.words ?? "-", look)];
  const label = left("colour", labelWidth);
  if (after === null) return [[{ text: label }, ...said(now)]];
  if (rowCells(said(now)) < column && rowCells(said(after)) < column) {
    return [[{ text: label }, ...toWidth(said(now), column), ...toWidth(said(after), column)]];
  }
  return [
    [{ text: label }, { text: `${sign.now} `, tone: "now" }, ...said(now)],
    [{ text: " ".repeat(labelWidth) }, { text: `${sign.after} `, tone: "after" }, ...said(after)],
  ];
}

function toleranceText(goal: { value: number; within: number } | undefined, decimals: number): string {
  return goal === undefined ? "" : `${fixed(goal.value, decimals)} ±${goal.within}`;
}
