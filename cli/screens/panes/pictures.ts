/**
 * The chamber's pictures: film plane, reflectance, runs, and what the model learned in sentences.
 */
import type { ChamberView } from "../../../recipes/index.ts";
import { signs, type Tone } from "../../palette.ts";
import { type PlanePlot, planeRows } from "../../plot/film-plane.ts";
import { planeRange } from "../../plot/plane-range.ts";
import { spectrumRows } from "../../plot/spectrum.ts";
import { type Paper, type Row, words } from "../../text/rows.ts";
import { wrap } from "../../text/width.ts";
import type { ChamberState, Picture } from "../state.ts";
import { runsTableRows } from "./runs-table.ts";
import { draftName } from "./settings-table.ts";

/** Runs shown as letters on the film plane; more would cover it. */
const lettered = 6;

export function pictureRows(picture: Picture, chamber: ChamberState, paper: Paper): Row[] {
  switch (picture) {
    case "plane":
      return planePane(chamber, paper);
    case "spectrum":
      return spectrumPane(chamber, paper);
    case "runs":
      return runsTableRows(chamber.view.runs, "runs, newest first; off: from expected", paper);
    case "learned":
      return learnedRows(chamber.view, paper);
  }
}

/** The film plane of a chamber as a plot: range from the record, what-if on it. */
export function planePlotOf(chamber: ChamberState, paper: Paper): PlanePlot {
  const { view } = chamber;
  const runs = view.runs
    .filter((run) => run.index !== null && run.thicknessNm !== null && run.suspect <= 0.5)
    .slice(-lettered)
    .map((run) => ({ index: run.index as number, thicknessNm: run.thicknessNm as number }));
  const films = [view.now.film, view.proposal?.after.film ?? null];
  return {
    ...planeRange({ goal: view.goal, films, runs }),
    width: paper.width,
    height: paper.height - 1,
    look: paper.look,
    goal: view.goal,
    grid: view.plane,
    runs,
    now: view.now.film,
    after: chamber.after?.film ?? null,
  };
}

function planePane(chamber: ChamberState, paper: Paper): Row[] {
  const plot = planePlotOf(chamber, paper);
  const sign = signs(paper.look);
  const last = String.fromCharCode(96 + plot.runs.length);
  const tight = paper.width < 34;
  const letters = plot.runs.length === 0 ? "no runs" : `${tight ? "" : "runs "}a-${last}`;
  const title: Row = [
    { text: tight ? "" : "film  ", tone: "strong" },
    { text: `${sign.now} now`, tone: "now" },
    { text: tight ? " " : "  " },
    ...(chamber.after === null
      ? []
      : [{ text: `${sign.after} ${draftName(chamber)}`, tone: "after" as Tone }, { text: tight ? " " : "  " }]),
    { text: letters },
  ];
  return [title, ...planeRows(plot)];
}

function spectrumPane(chamber: ChamberState, paper: Paper): Row[] {
  const { view, after } = chamber;
  const sign = signs(paper.look);
  const minimum = view.goal.reflectanceMinimumNm;
  const title: Row = [
    { text: paper.width < 36 ? "" : "reflectance ", tone: "strong" },
    { text: `${sign.now} now `, tone: "now" },
    ...(after === null ? [] : [{ text: `${sign.after} ${draftName(chamber)} `, tone: "after" as Tone }]),
    { text: minimum === undefined ? "" : `${paper.look.ascii ? "=" : "━"}${paper.width < 36 ? "" : " "}goal` },
  ];
  const plot = {
    width: paper.width,
    height: paper.height - 1,
    look: paper.look,
    now: view.now.spectrum,
    after: after?.spectrum ?? null,
    goal: view.goal,
  };
  return [title, ...spectrumRows(plot)];
}

/** Sentences under headings, wrapped; what is alarming first. */
export function sentences(
  parts: readonly { title: string; lines: readonly string[]; tone?: Tone }[],
  paper: Paper,
): Row[] {
  const rows: Row[] = [];
  for (const { title, lines, tone } of parts) {
    if (lines.length === 0) continue;
    rows.push([{ text: title, tone: tone ?? "strong" }]);
    for (const line of lines) {
      wrap(words(line, paper.look).text, paper.width - 2).forEach((text, i) => {
        rows.push([{ text: i === 0 ? "- " : "  " }, { text }]);
      });
    }
  }
  return rows;
}

function learnedRows(view: ChamberView, paper: Paper): Row[] {
  const parts = [
    { title: "ALARMS", lines: view.alarms, tone: "alarm" as Tone },
    { title: "learned", lines: view.learned },
    { title: "cannot tell", lines: view.cannotTell },
  ];
  const rows = sentences(parts, paper);
  if (rows.length === 0) return [[{ text: "nothing is learned yet: log runs" }]];
  if (rows.length <= paper.height) return rows;
  const room = Math.max(1, paper.height - 1);
  const more = `${signs(paper.look).low} ${rows.length - room} more lines: i`;
  return [...rows.slice(0, room), [{ text: more, tone: "strong" }]];
}
