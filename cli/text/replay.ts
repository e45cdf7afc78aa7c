/** A replay as text for people: the verdict, the figures, the latest runs beside what was expected of them. */
import type { Replay, ReplaySummary } from "../../recipes/index.ts";
import { chanceText, fixed, indexText, thicknessText } from "./numbers.ts";
import { wrap } from "./width.ts";

const width = 80;
/** Runs shown; older ones are in the figures. */
const mostRuns = 12;

const film = (f: { index: number | null; thicknessNm: number | null } | null) =>
  f ? `${indexText(f.index).padStart(6)} ${thicknessText(f.thicknessNm).padStart(6)}` : "     -      -";

export function replayText(replay: Replay, summary: ReplaySummary): string {
  const { misses, coverage, chances, advice, rivalMoves, says } = summary;
  const given = Object.entries(advice).map(([name, times]) => `${name.replaceAll("_", " ")} ${times}`);
  const shown = replay.runs.slice(-mostRuns);
  const mark = (inside: boolean | null) => (inside === false ? "out" : "");
  return [
    ...wrap(says, width),
    "",
    `  measured runs replayed   ${replay.runs.length} of ${replay.measured}`,
    ...(misses.ours
      ? [`  median miss, this tool   index ${fixed(misses.ours.index, 4)}, ${fixed(misses.ours.thicknessNm, 2)} nm`]
      : []),
    ...(misses.rival
      ? [`  median miss, tuned EWMA  index ${fixed(misses.rival.index, 4)}, ${fixed(misses.rival.thicknessNm, 2)} nm`]
      : []),
    `  inside the 95 % interval ${coverage.inside} of ${coverage.readings} readings`,
    ...(chances
      ? [
          `  readings in goal         said ${fixed(100 * chances.stated, 0)} %, came ${fixed(100 * chances.came, 0)} % (${chances.runs} runs)`,
        ]
      : []),
    ...(given.length > 0 ? [`  it would have advised    ${given.join(", ")}`] : []),
    ...(rivalMoves ? [`  the EWMA would have      moved ${rivalMoves.moves} of ${rivalMoves.runs} times`] : []),
    "",
    "  entry  read          this tool     tuned EWMA    chance  came  advice",
    ...shown.map((run) =>
      [
        `  ${String(run.entry).padStart(5)}`,
        film(run.read),
        film(run.ours),
        film(run.rival),
        chanceText(run.ours.chance).padStart(6),
        (run.ours.inGoal === null ? "-" : run.ours.inGoal ? "in" : "out").padEnd(4),
        `${run.ours.advice?.replaceAll("_", " ") ?? "-"}${mark(run.ours.insideIndex) || mark(run.ours.insideThickness) ? ", a surprise" : ""}`,
      ].join("  "),
    ),
    ...(shown.some((run) => mark(run.ours.insideIndex) || mark(run.ours.insideThickness))
      ? ["  a surprise: the reading fell outside its 95 % interval"]
      : []),
    ...(replay.runs.length > shown.length ? [`  and ${replay.runs.length - shown.length} runs before them`] : []),
  ].join("\n");
}
