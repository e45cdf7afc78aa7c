/** A plan of runs as text for people, 80 columns: what to type in, what each run is for, how well the goal is known after it. */
import type { Planned } from "../../recipes/index.ts";
import { goalText, safeText, sharpenedWords } from "../../recipes/index.ts";
import { counted } from "./line-words.ts";
import { fixed, indexText, thicknessText } from "./numbers.ts";
import { wrap } from "./width.ts";

const width = 80;

const indented = (text: string, by: number) =>
  wrap(safeText(text), width - by).map((line) => `${" ".repeat(by)}${line}`);
const list = (title: string, items: readonly string[]) =>
  items.length
    ? ["", title, ...items.flatMap((i) => indented(i, 4).map((line, at) => (at === 0 ? `  - ${line.slice(4)}` : line)))]
    : [];

/** The middle and half the 95 % interval: "index 2.060 ±0.012, 88.0 ±2.1 nm". */
function known({ index, thicknessNm }: Planned["plan"]["before"]): string {
  const half = (v: { low: number; high: number }) => (v.high - v.low) / 2;
  return `index ${indexText(index.mean)} ±${indexText(half(index))}, ${thicknessText(thicknessNm.mean)} ±${thicknessText(half(thicknessNm))} nm`;
}

/** Root of the mean variance, over both properties: what it is on average, in tolerances. */
const tolerances = (meanVariance: number) => fixed(Math.sqrt(meanVariance / 2), 2);

export function planText({ chamber, recipe, goal, plan, alarms }: Planned): string {
  const { runs } = plan;
  const last = runs[runs.length - 1];
  return [
    ...wrap(
      `${chamber.name}, recipe ${recipe}: ${runs.length === 1 ? "the run that teaches" : `the ${runs.length} runs that teach`} most, of ${counted(plan.candidates, "that moves", "that move")} ${plan.levers.map((l) => l.name).join(", ")} or nothing`,
      width,
    ),
    ...wrap(`goal: ${goalText(goal)}`, width),
    ...list("alarms: runs done now would teach the fault too", alarms),
    ...plan.notices.flatMap((n) => wrap(safeText(n), width)),
    "",
    ...indented(`now, one run at the goal: ${known(plan.before)}`, 2),
    ...runs.flatMap((run, i) => [
      "",
      ...indented(run.moves.length ? run.moves.join(", ") : "as it is", 5).map((line, at) =>
        at === 0 ? `${String(i + 1).padStart(3)}  ${line.slice(5)}` : line,
      ),
      ...indented(run.purpose, 5),
      ...(run.sharpens ? indented(sharpenedWords(run.sharpens), 5) : []),
      ...run.touches.flatMap((t) => indented(t, 5)),
      ...run.pastAnchor.flatMap((t) => indented(t, 5)),
      ...indented(`then, one run at the goal: ${known(run.atGoal)}`, 5),
    ]),
    "",
    ...wrap(
      `Over the goal box the film of a run is foreseen to ${tolerances(plan.meanVarianceBefore)} tolerances now (sd, scatter left out), to ${tolerances(last.meanVariance)} after ${runs.length === 1 ? "this run" : "these runs"}. Intervals are the middle 95 %, scatter of single runs included.`,
      width,
    ),
    ...list("cannot tell yet", plan.cannotTell),
    ...list("cautions", plan.cautions),
  ].join("\n");
}
