/** Proposals, predictions and chamber models as text for people: the words come from below, this file lays them out. */
import type { Chamber, ChamberView, Predicted, Proposed, Workspace } from "../../recipes/index.ts";
import { goalText, lightText, safeText, shown } from "../../recipes/index.ts";
import { wrap } from "./width.ts";

const advices: Record<string, string> = {
  change: "CHANGE the recipe",
  keep: "KEEP the recipe as it is",
  measure: "MEASURE once more before changing anything",
  fault: "LOOK FOR A FAULT; do not tune",
  out_of_reach: "OUT OF REACH inside the window; the nearest point is shown",
};

/** Past the anchor nothing need be broken: it is a person who is asked for. */
const headline = ({ advice, alarms }: Proposed["answer"]) =>
  advice === "fault" && alarms.some((a) => a.name === "past_anchor")
    ? "A PERSON MUST LOOK before more is corrected"
    : advices[advice];

const list = (title: string, items: readonly string[]) =>
  items.length ? [title, ...items.map((i) => `  - ${safeText(i)}`)] : [];

/** The same for a terminal of 80 columns: the chamber's sentences are long and many. */
const wrapped = (title: string, items: readonly string[]) =>
  items.length
    ? [title, ...items.flatMap((i) => wrap(safeText(i), 76).map((line, at) => `${at === 0 ? "  - " : "    "}${line}`))]
    : [];

export function percentText(chance: number | null): string {
  if (chance === null) return "not judged";
  if (chance < 0.005) return "under 1 %";
  return `${(100 * chance).toFixed(chance > 0.1 && chance < 0.99 ? 0 : 1)} %`;
}

function settingsRows(
  chamber: Chamber,
  before: ReadonlyMap<string, number>,
  after: ReadonlyMap<string, number>,
): string[] {
  const rows = [...chamber.settings.values()]
    .filter((s) => before.has(s.name))
    .map((s) => {
      const a = before.get(s.name) as number;
      const b = after.get(s.name) ?? a;
      return { name: s.name, before: shown(s, a), after: shown(s, b), mark: a === b ? "" : "<-" };
    });
  const w = (key: "name" | "before" | "after") => Math.max(key.length, ...rows.map((r) => r[key].length));
  const line = (n: string, b: string, a: string, m: string) =>
    `  ${n.padEnd(w("name"))}  ${b.padStart(w("before"))}  ${a.padStart(w("after"))}  ${m}`.trimEnd();
  return [line("setting", "before", "after", ""), ...rows.map((r) => line(r.name, r.before, r.after, r.mark))];
}

const features = [
  ["index", "index", 3, ""],
  ["thickness_nm", "thickness", 1, " nm"],
  ["weighted_reflectance_percent", "weighted reflectance", 2, " %"],
  ["reflectance_minimum_nm", "reflectance minimum", 0, " nm"],
] as const;

function expectedRows(columns: readonly { title: string; predicted: Predicted; chance: number | null }[]): string[] {
  const cell = (p: Predicted, key: keyof Predicted, digits: number, unit: string) => {
    const v = p[key];
    return v ? `${v.mean.toFixed(digits)}${unit} (${v.low.toFixed(digits)} to ${v.high.toFixed(digits)})` : "not given";
  };
  const rows = [
    ["next run would read", ...columns.map((c) => c.title)],
    ...features.map(([key, words, digits, unit]) => [
      words,
      ...columns.map((c) => cell(c.predicted, key, digits, unit)),
    ]),
    ["chance in goal", ...columns.map((c) => percentText(c.chance))],
  ];
  const widths = rows[0].map((_, i) => Math.max(...rows.map((r) => r[i].length)));
  return rows.map((r) => `  ${r.map((c, i) => c.padEnd(widths[i])).join("  ")}`.trimEnd());
}

export function proposalText(ws: Workspace, done: Proposed): string {
  const { answer, document } = done;
  const chamber = ws.chamber(String(document["chamber"]));
  const recipe = String(document["recipe"]);
  const moved = answer.before !== answer.after;
  const columns = [{ title: "as it is", predicted: answer.now.predicted, chance: answer.now.chanceInGoal ?? null }];
  if (moved)
    columns.push({ title: "after", predicted: answer.ahead.predicted, chance: answer.ahead.chanceInGoal ?? null });
  const next =
    done.proposal === null
      ? "dry run: nothing was written"
      : answer.advice === "change" || answer.advice === "out_of_reach"
        ? `to adopt: coatwright adopt ${done.proposal} --reason TEXT`
        : `kept as ${done.proposal}`;
  return [
    `${chamber.name}, recipe ${recipe}, ${answer.mode}: ${headline(answer)}${answer.done ? " (tuning is done)" : ""}`,
    `goal: ${goalText(ws.goal(recipe))}`,
    "",
    ...(moved ? [...settingsRows(chamber, answer.before, answer.after), ""] : []),
    ...expectedRows(columns),
    `  (middle 95 %; light weighted by ${lightText(ws.line)})`,
    "",
    ...list("because", answer.because),
    ...list("cannot tell", answer.cannotTell),
    ...list(
      "alarms",
      answer.alarms.map((a) => a.sentence),
    ),
    ...(moved ? list("cautions", answer.cautions) : []),
    "",
    next,
  ].join("\n");
}

export function predictedText(
  ws: Workspace,
  chamber: Chamber,
  settings: ReadonlyMap<string, number>,
  expected: { predicted: Predicted; chanceInGoal: number | null; cannotTell: readonly string[] },
): string {
  const values = [...chamber.settings.values()].flatMap((s) =>
    settings.has(s.name) ? [`${s.name} ${shown(s, settings.get(s.name) as number)}`] : [],
  );
  return [
    `${chamber.name} at ${values.join(", ")}`,
    ...expectedRows([{ title: "expected", predicted: expected.predicted, chance: expected.chanceInGoal }]),
    `  (middle 95 %; light weighted by ${lightText(ws.line)})`,
    ...list("cannot tell", expected.cannotTell),
  ].join("\n");
}

export function chamberText(view: ChamberView, measured: number, sinceClean: number): string {
  return [
    `${view.chamber}, recipe ${view.recipe}: ${measured} measured runs, ${sinceClean} depositions since the clean`,
    ...wrap(`goal: ${view.goalText}`, 80),
    "",
    ...expectedRows([
      { title: "at the recipe in force", predicted: view.now.predicted, chance: view.now.chanceInGoal },
    ]),
    "",
    ...wrapped("learned", view.learned),
    ...wrapped("cannot tell", view.cannotTell),
    ...wrapped("alarms", view.alarms),
  ].join("\n");
}
