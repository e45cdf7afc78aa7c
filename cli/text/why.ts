/** Why a chamber misses, as text for people: the runs beside what was expected, the causes, what would tell. 80 columns. */
import type { Why } from "../../recipes/index.ts";
import { safeText } from "../../recipes/index.ts";
import { counted } from "./line-words.ts";
import { chanceText, fixed, indexText, signed, thicknessText } from "./numbers.ts";
import { wrap } from "./width.ts";

const width = 80;
/** Runs shown; older ones are counted. */
const mostRuns = 8;

const item = (text: string) => {
  const [first, ...rest] = wrap(safeText(text), width - 4);
  return [`  - ${first}`, ...rest.map((line) => `    ${line}`)];
};
const list = (title: string, items: readonly string[]) => (items.length ? ["", title, ...items.flatMap(item)] : []);

export function whyText(chamber: string, { explanation, sentence, inQuestion, refused, wouldTell }: Why): string {
  const { onset, runs, miss } = explanation;
  const how = onset.stated
    ? "as stated"
    : onset.kind === "run"
      ? "the likeliest onset among the latest runs"
      : `the ${onset.kind === "change" ? "entered change" : `last ${onset.kind}`}`;
  const shown = runs.slice(-mostRuns);
  const cell = (value: string, expected: string, columns: number) =>
    `${value.padStart(columns)}  ${expected.padEnd(14)}`;
  const half = ({ mean, sd }: { mean: number; sd: number }, text: (v: number) => string) =>
    `${text(mean)} ±${text(1.96 * sd)}`;
  return [
    ...wrap(
      `${chamber}: ${counted(runs.length, "measured run")} since entry ${onset.entry} (${how}), beside what the chamber as known before was expected to lay`,
      width,
    ),
    "",
    `  entry  ${cell("index", "expected", 6)}  ${cell("nm", "expected", 6)}`.trimEnd(),
    ...shown.map((run) =>
      [
        `  ${String(run.entry).padStart(5)}`,
        cell(indexText(run.index), half(run.expectedIndex, indexText), 6),
        cell(thicknessText(run.thicknessNm), half(run.expectedThickness, thicknessText), 6),
        run.suspect > 0.5 ? "doubted" : "",
      ]
        .join("  ")
        .trimEnd(),
    ),
    ...(runs.length > shown.length ? [`  and ${counted(runs.length - shown.length, "run")} before them`] : []),
    ...wrap(`  mean miss: ${missWords(miss)}`, width),
    "",
    ...wrap(safeText(sentence), width),
    ...inQuestion.flatMap(({ probability, words }) => {
      const [first, ...rest] = wrap(safeText(words), width - 9);
      return [`  ${chanceText(probability).padStart(5)}  ${first}`, ...rest.map((line) => `         ${line}`)];
    }),
    ...(refused.length ? ["", ...wrap(`${safeText(refused.join("; "))}.`, width)] : []),
    ...list("what would tell", wouldTell),
  ].join("\n");
}

function missWords({ index, lnThickness }: Why["explanation"]["miss"]): string {
  return [
    ...(index ? [`index ${signed(index.mean, 4)} (sd ${fixed(index.sd, 4)})`] : []),
    ...(lnThickness
      ? [`thickness ${signed(100 * Math.expm1(lnThickness.mean), 1)} % (sd ${fixed(100 * lnThickness.sd, 1)})`]
      : []),
  ].join(", ");
}
