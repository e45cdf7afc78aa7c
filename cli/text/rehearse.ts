/** The scoreboard of a rehearsal as text for people: a table a scenario, bars of later production, chances kept or not. */
import type { Figure, ScenarioScore, Score } from "../../recipes/index.ts";
import { fixed } from "./numbers.ts";
import { wrap } from "./width.ts";

const width = 80;
const barCells = 30;

const has = (f: Figure) => Number.isFinite(f.value);
/** "2.12±.05"; the error without its leading zero, to save room. */
function plusMinus(f: Figure, decimals: number): string {
  if (!has(f)) return "-";
  const error = Number.isFinite(f.error) ? fixed(f.error, decimals).replace(/^0\./, ".") : "?";
  return `${fixed(f.value, decimals).replace(/^0\./, ".")}±${error}`;
}

interface Column {
  head: string;
  cell(score: Score): string;
}

const tuningColumns: readonly Column[] = [
  { head: "median", cell: ({ runs }) => (runs ? fixed(runs.median, 1).replace(/\.0$/, "") : "-") },
  { head: "mean", cell: ({ runs }) => (runs ? plusMinus(runs.mean, 2) : "-") },
  { head: "p90", cell: ({ runs }) => (runs ? fixed(runs.p90, 1).replace(/\.0$/, "") : "-") },
  { head: "<=1", cell: ({ runs }) => (runs ? plusMinus(runs.within[0], 2) : "-") },
  { head: "<=2", cell: ({ runs }) => (runs ? plusMinus(runs.within[1], 2) : "-") },
  { head: "<=3", cell: ({ runs }) => (runs ? plusMinus(runs.within[2], 2) : "-") },
  { head: "untrue", cell: ({ falseDone }) => plusMinus(falseDone, 2) },
];
const laterColumns: readonly Column[] = [
  { head: "later", cell: ({ later }) => plusMinus(later, 3) },
  { head: "worst", cell: ({ worstDecile }) => plusMinus(worstDecile, 2) },
  { head: "changes", cell: ({ changesPer100 }) => plusMinus(changesPer100, 1) },
  { head: "idle", cell: ({ idlePer100 }) => plusMinus(idlePer100, 1) },
];
const measuredColumn: Column = { head: "measured", cell: ({ measured }) => plusMinus(measured, 1) };
const leakColumns: readonly Column[] = [0, 1, 2].map((at) => ({
  head: `named<=${at + 1}`,
  cell: ({ leakNamed }) => (leakNamed ? plusMinus(leakNamed[at], 2) : "-"),
}));

/** What the heads of the columns mean. */
const LEGEND =
  "median, mean, p90: runs until a reading lay in goal (20 at most). <=1, <=2, <=3: share of worlds that needed no more. untrue: of those, film not in goal. later: true film in goal in production; worst: a tenth of the worlds do worse. changes: per 100 runs of production; idle: per 100 runs before which nothing was wrong. measured: runs measured in a world, tuning included. ±: standard error over worlds.";

/** Tuning and production apart, so that each fits 80 columns. */
function scoreTable({ scores, everyRunMeasured }: ScenarioScore): string[] {
  const all = scores.map(({ score }) => score);
  const production = [
    ...(all.some((s) => has(s.later)) ? laterColumns : []),
    ...(everyRunMeasured ? [] : [measuredColumn]),
  ];
  return [
    ...(all.some((s) => s.runs) ? [...table(scores, tuningColumns), ""] : []),
    ...(production.length > 0 ? table(scores, production) : []),
  ];
}

/** Who named the leak, and within how many measured runs; those that say nothing are left out. */
function leakTable(scores: ScenarioScore["scores"]): string[] {
  const saying = scores.filter(({ score }) => score.leakNamed?.some((f) => f.value > 0));
  if (!scores.some(({ score }) => score.leakNamed)) return [];
  if (saying.length === 0) return ["", "nobody named the leak"];
  return ["", "the leak, named within so many measured runs", ...table(saying, leakColumns)];
}

function table(scores: ScenarioScore["scores"], columns: readonly Column[]): string[] {
  const rows = [
    ["", ...columns.map((c) => c.head)],
    ...scores.map(({ title, score }) => [title, ...columns.map((c) => c.cell(score))]),
  ];
  const widths = rows[0].map((_, at) => Math.max(...rows.map((row) => row[at].length)));
  return rows.map((row) =>
    row
      .map((cell, at) => (at === 0 ? cell.padEnd(widths[at]) : cell.padStart(widths[at])))
      .join(" ")
      .trimEnd(),
  );
}

/** Out-of-goal production as bars: what is left to win, where nearly everybody is good. */
function bars(scores: ScenarioScore["scores"], ascii: boolean): string[] {
  const out = scores.map(({ title, score }) => ({ title, share: 1 - score.later.value }));
  const most = Math.max(...out.map((o) => o.share));
  if (!(most > 0)) return [];
  const name = Math.max(...out.map((o) => o.title.length));
  return [
    "",
    "out of goal in production",
    ...out.map(({ title, share }) => {
      const cells = Math.round((barCells * share) / most);
      return `  ${title.padEnd(name)} ${(ascii ? "#" : "▇").repeat(cells)}${cells > 0 ? " " : ""}${fixed(100 * share, 1)} %`;
    }),
  ];
}

/** Chances as stated beside what came of them. */
function chances(scores: ScenarioScore["scores"]): string[] {
  return scores.flatMap(({ title, score }) =>
    score.calibration.length === 0
      ? []
      : [
          "",
          `${title}: chances stated for the next film, and what came`,
          ...score.calibration.map(
            ({ from, to, stated, came, count }) =>
              `  ${fixed(from, 1)} to ${fixed(to, 1)}   said ${fixed(stated, 3)}   came ${plusMinus(came, 3).padEnd(10)} (${count})`,
          ),
        ],
  );
}

function advice(scores: ScenarioScore["scores"]): string[] {
  return scores.flatMap(({ title, score }) => {
    const given = Object.entries(score.advice);
    if (given.length === 0) return [];
    const words = given.map(([name, share]) => `${name.replaceAll("_", " ")} ${fixed(100 * share, 1)} %`).join(", ");
    const stops = has(score.falseStopsPer100)
      ? `; stopped with nothing broken ${plusMinus(score.falseStopsPer100, 2)} times per 100 runs of production`
      : "";
    const done = score.saidDone
      ? ` It said that tuning is done after ${fixed(score.saidDone.median, 1)} runs (median).`
      : "";
    const untold = score.toldUntold
      ? ` Its first answer said what the history cannot tell in ${plusMinus(score.toldUntold, 2)} of the worlds.`
      : "";
    return ["", ...wrap(`${title} advised ${words}${stops}.${done}${untold}`, width)];
  });
}

function scenarioText(scenario: ScenarioScore, ascii: boolean): string[] {
  const { name, title, worlds, seeds, scores, gapClosed } = scenario;
  const later = scores.some(({ score }) => has(score.later));
  return [
    ...wrap(
      `${name}: ${title}. ${worlds} ${worlds === 1 ? "world" : "worlds"}, seeds ${seeds.first} to ${seeds.last}`,
      width,
    ),
    "",
    ...scoreTable(scenario),
    ...leakTable(scores),
    ...(later ? bars(scores, ascii) : []),
    ...(gapClosed && has(gapClosed)
      ? ["", `share of the way from the tuned EWMA to the oracle: ${plusMinus(gapClosed, 2)}`]
      : []),
    ...chances(scores),
    ...advice(scores),
  ];
}

/** The whole scoreboard. */
export function rehearsalText(board: readonly ScenarioScore[], { ascii }: { ascii: boolean }): string {
  return [
    ...wrap(
      "Invented chambers, not plant data: what each practice would have done with the same chambers, the same weather and the same readings.",
      width,
    ),
    "",
    ...board.flatMap((scenario) => [...scenarioText(scenario, ascii), ""]),
    ...wrap(LEGEND, width),
  ].join("\n");
}
