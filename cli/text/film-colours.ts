/** The colour of a stack by the thickness of one layer, as a table for a person beside the tool. */
import type { FilmColours } from "../../engine/index.ts";
import { fixed } from "./numbers.ts";

export function coloursText(layer: number, material: string, { rows }: FilmColours): string {
  const words = Math.max("colour".length, ...rows.map((row) => row.words.length));
  const line = (cells: readonly string[]): string =>
    [
      cells[0].padStart(7),
      cells[1].padEnd(words),
      cells[2].padEnd(8),
      ...cells.slice(3).map((c) => c.padStart(6)),
    ].join("  ");
  return [
    `colour in daylight (D65) as layer ${layer + 1}, ${material}, grows`,
    line(["nm", "colour", "screen", "L", "a", "b", "per nm"]),
    ...rows.map(({ thicknessNm, words: seen, hex, clipped, lab, changePerNm }) =>
      line([
        fixed(thicknessNm, 1),
        seen,
        `${hex}${clipped ? "*" : ""}`,
        ...lab.map((value) => fixed(value, 1)),
        fixed(changePerNm, 2),
      ]),
    ),
    "per nm: how fast it changes, CIEDE2000; about 1 is just noticeable side by side",
    ...(rows.some((row) => row.clipped) ? ["* beyond what a screen can show; the nearest it can"] : []),
  ].join("\n");
}
