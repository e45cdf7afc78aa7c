/**
 * Runs as a table, newest first: what was measured, how far from what was expected, what looks bad.
 */
import type { RunSeen } from "../../../recipes/index.ts";
import { fixed, signed } from "../../text/numbers.ts";
import { type Paper, type Row, words } from "../../text/rows.ts";
import { left, right } from "../../text/width.ts";

export function runsTableRows(runs: readonly RunSeen[], title: string, paper: Paper): Row[] {
  const { width, height, look } = paper;
  const wide = width >= 72;
  const head =
    `${right("run", 5)} ${right("since", 5)} ${right("index", 6)} ${right("off", 6)} ${right("nm", 5)} ${right("off", 4)}` +
    (wide ? ` ${right("min nm", 7)} ${right("R %", 6)}  ${left("at", 16)}` : "");
  const rows: Row[] = [[{ ...words(title, look), tone: "strong" }], [{ text: head }]];
  if (runs.length === 0) rows.push([{ text: "no runs yet: l logs one" }]);
  for (const run of [...runs].reverse()) {
    if (rows.length >= height) break;
    const { expected } = run;
    const offIndex = run.index !== null && expected !== null ? run.index - expected.index : null;
    const offNm = run.thicknessNm !== null && expected !== null ? run.thicknessNm - expected.thicknessNm : null;
    const far =
      expected !== null &&
      (Math.abs(offIndex ?? 0) > expected.indexHalf || Math.abs(offNm ?? 0) > expected.thicknessHalf);
    const text =
      `${right(String(run.entry), 5)} ${right(String(run.sinceClean), 5)} ${right(fixed(run.index, 3), 6)}` +
      ` ${right(offIndex === null ? "-" : signed(offIndex, 3), 6)} ${right(fixed(run.thicknessNm, 1), 5)}` +
      ` ${right(offNm === null ? "-" : signed(offNm, 1), 4)}` +
      (wide
        ? ` ${right(fixed(run.reflectanceMinimumNm, 0), 7)} ${right(fixed(run.weightedReflectancePercent, 2), 6)}  ${left(run.at.slice(0, 16), 16)}`
        : "");
    const remark = run.suspect > 0.5 ? " bad reading?" : run.step > 0.5 ? " a step?" : far ? " surprise" : "";
    rows.push([{ text }, { text: remark, tone: "watch" }]);
  }
  return rows;
}
