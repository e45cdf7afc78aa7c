/** Sealed predictions as text for people. */
import type { SealCount, SealDocument } from "../../recipes/index.ts";
import { fixed, indexText, thicknessText } from "./numbers.ts";
import { wrap } from "./width.ts";

const width = 80;

export function sealedText(hash: string, { chamber, recipe, predicted }: SealDocument): string {
  const range = (r: { low: number; high: number } | null, text: (v: number) => string) =>
    r ? `${text(r.low)} to ${text(r.high)}` : "not told";
  return [
    ...wrap(
      `${chamber}, ${recipe}: sealed for the next measured run at the recipe in force: index ${range(predicted.index, indexText)}, thickness ${range(predicted.thickness_nm, thicknessText)} nm (95 %).`,
      width,
    ),
    `shadow/${hash}.json`,
  ].join("\n");
}

export function sealText({ says, misses }: SealCount): string {
  const line = (name: string, m: SealCount["misses"]["index"], digits: number, unit: string) =>
    m
      ? [
          `  mean miss, ${name}: this tool ${fixed(m.ours, digits)}${unit}, tuned EWMA ${fixed(m.rival, digits)}${unit} (${m.runs} runs)`,
        ]
      : [];
  return [
    ...wrap(says, width),
    ...line("index", misses.index, 4, ""),
    ...line("thickness", misses.thicknessNm, 2, " nm"),
  ].join("\n");
}
