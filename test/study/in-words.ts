/** A study as a printed table in plain words: each figure with its standard error over worlds and how much it rests on. */
import { isShare, type Result } from "./figures.ts";
import type { Played } from "./scenario.ts";

/**
 * A figure as text. A share that was 0 (or 1) in all worlds has no spread to take an error from; what can be said at 95 % is that it
 * lies below 3 / N (or as much above 1 - 3 / N), N the worlds.
 */
export function figureInWords({ figure, value, error, worlds }: Result): string {
  if (worlds === 0) return "none to tell";
  const unit = figure.unit ? ` ${figure.unit}` : "";
  const number = (x: number) => x.toFixed(figure.digits);
  if (isShare(figure) && (value === 0 || value === 1)) {
    const bound = Math.min(3 / worlds, 1);
    return value === 0 ? `0 (under ${number(bound)})` : `1 (over ${number(1 - bound)})`;
  }
  return `${number(value)} ± ${Number.isFinite(error) ? number(error) : "?"}${unit}`;
}

/** The table of one scenario. */
export function inWords(played: Played): string {
  const { seeds, results, waysApart } = played;
  const rows = results.map((r) => [
    r.figure.words,
    figureInWords(r),
    r.figure.wanted ? `(${r.figure.wanted.includes("prototype") ? "" : "wanted "}${r.figure.wanted})` : "",
    `${r.values} in ${r.worlds} worlds`,
  ]);
  const widths = [0, 1, 2].map((column) => Math.max(...rows.map((row) => row[column].length)));
  const lines = rows.map((row) =>
    row
      .map((cell, i) => (i < 3 ? cell.padEnd(widths[i]) : cell))
      .join("  ")
      .trimEnd(),
  );
  const notes = [
    `seeds ${seeds.first} to ${seeds.last} (${seeds.worlds} worlds)`,
    `${played.msPerWorld.toFixed(0)} ms a world`,
    ...(waysApart === null ? [] : [`one pass and one model a run apart by at most ${waysApart.toExponential(1)}`]),
  ];
  return [`${played.title}  [${played.name}]`, ...lines.map((l) => `  ${l}`), `  ${notes.join("; ")}`].join("\n");
}
