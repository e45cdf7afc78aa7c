/**
 * Runs as a table, newest first: what was measured, how far from what was expected, what looks bad.
 */
import type { RunSeen } from "../../../recipes/index.ts";
import { fixed, signed } from "../../text/numbers.ts";
import { type Paper, type Row, words } from "../../text/rows.ts";
import { cells, cut, right } from "../../text/width.ts";

export function runsTableRows(runs: readonly RunSeen[], title: string, paper: Paper): Row[] {
  const { width, height, look } = paper;
  const form = formOf(width);
  const number = Math.max(3, ...runs.map((run) => String(run.entry).length));
  const head = formRow(form, ["run", "since", "index", "off", "nm", "off", "min nm", "R %", "at"], number);
  const legend = `runs ${remarks.map(({ sign, short }) => `${sign}${short.replace("?", "")}`).join(" ")}`;
  const rows: Row[] = [
    [{ ...words(form === "narrow" ? legend : title, look), tone: "strong" }],
    [{ text: cut(head, width) }],
  ];
  if (runs.length === 0) rows.push([{ text: "no runs yet: l logs one" }]);
  const newestFirst = [...runs].reverse();
  newestFirst.forEach((run, i) => {
    const { expected } = run;
    const offIndex = run.index !== null && expected !== null ? run.index - expected.index : null;
    const offNm = run.thicknessNm !== null && expected !== null ? run.thicknessNm - expected.thicknessNm : null;
    const text = formRow(
      form,
      [
        String(run.entry),
        String(run.sinceClean),
        fixed(run.index, 3),
        offIndex === null ? "-" : signed(offIndex, 3),
        fixed(run.thicknessNm, 1),
        offNm === null ? "-" : signed(offNm, 1),
        fixed(run.reflectanceMinimumNm, 0),
        fixed(run.weightedReflectancePercent, 2),
        run.at.slice(0, 16),
      ],
      number,
    );
    rows.push([{ text }, { text: remarkOn(run, offIndex, offNm, width - cells(text)), tone: "watch" }]);
    const before = newestFirst[i + 1];
    // Without the column of depositions since the clean, the clean itself is shown.
    if ((form === "narrow" || form === "short") && before !== undefined && before.sinceClean >= run.sinceClean)
      rows.push([{ text: `${" ".repeat(number + 1)}-- clean --` }]);
  });
  return rows.slice(0, height);
}

type Form = "wide" | "medium" | "short" | "narrow";

function formOf(width: number): Form {
  if (width >= 72) return "wide";
  if (width >= 48) return "medium";
  return width >= 36 ? "short" : "narrow";
}

/** Which columns a form has, of: run, since, index, off, nm, off, minimum, R, at. */
const columns: Readonly<Record<Form, readonly number[]>> = {
  wide: [0, 1, 2, 3, 4, 5, 6, 7, 8],
  medium: [0, 1, 2, 3, 4, 5],
  short: [0, 2, 3, 4, 5],
  narrow: [0, 2, 4, 5],
};
const widths = [0, 5, 6, 6, 5, 5, 7, 6, 17];

function formRow(form: Form, values: readonly string[], number: number): string {
  return columns[form].map((at) => right(values[at], at === 0 ? number : widths[at])).join(" ");
}

/** What may be said of a run, the gravest first: in full, in short, as a sign where there is no room for a word. */
const remarks = [
  { full: "bad reading?", short: "bad?", sign: "?" },
  { full: "a step?", short: "step?", sign: "!" },
  { full: "surprise", short: "far", sign: "*" },
];

function remarkOn(run: RunSeen, offIndex: number | null, offNm: number | null, room: number): string {
  const { expected } = run;
  const far =
    expected !== null &&
    (Math.abs(offIndex ?? 0) > expected.indexHalf || Math.abs(offNm ?? 0) > expected.thicknessHalf);
  const said = run.suspect > 0.5 ? remarks[0] : run.step > 0.5 ? remarks[1] : far ? remarks[2] : null;
  if (said === null) return "";
  return [` ${said.full}`, ` ${said.short}`, ` ${said.sign}`].find((text) => text.length <= room) ?? said.sign;
}
