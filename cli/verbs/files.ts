/** The verbs about files: new, check, import, report. */
import { Refusal, refuse } from "../../engine/index.ts";
import { changeAt, checkLine, creating, importing, parseChangeId, reportMarkdown } from "../../recipes/index.ts";
import { flag, type Outcome, toggle, type Verb, word } from "./verb.ts";

export const fileVerbs: Verb[] = [
  {
    name: "new",
    does: "makes a line folder with a commented line.yaml, or the demo line with its invented history",
    words: [word("dir", "the folder to make")],
    flags: [toggle("demo", "the demo line Saltmarsh 2")],
    examples: ["coatwright new my-line", "coatwright new demo-line --demo"],
    writes: false,
    run: async (call) => {
      const dir = call.args.need("dir");
      if (dir.trim() === "") refuse("missing-argument", "new needs DIR", { hint: "coatwright new my-line" });
      const folder = call.resolve(dir);
      const timeZone = Intl.DateTimeFormat().resolvedOptions().timeZone || "UTC";
      const { createLine } = await creating();
      const ws = await createLine(folder, call.ports, { demo: call.args.switch("demo"), timeZone });
      const entries = ws.ledger.entries.length;
      return {
        document: { line: ws.line.name, folder, entries },
        text: call.args.switch("demo")
          ? `${ws.line.name} is in ${dir}: three chambers, ${entries} entries, all invented.\nLook at it: coatwright --line ${dir}`
          : `${dir}/line.yaml is ready to edit: wafer, goal, gauges, settings, window, chambers.\nThen: coatwright check --line ${dir}`,
      };
    },
  },
  {
    name: "check",
    does: "validates every file, replays the book, verifies its hash chain; names each problem by file, row, column",
    words: [],
    flags: [],
    examples: ["coatwright check"],
    writes: false,
    run: (call): Outcome => {
      const found = checkLine(call.workspace());
      const { problems, warnings, said, head, entries } = found;
      const where = (p: { file?: string; row?: number; column?: number }) =>
        [p.file, p.row, p.column].filter((v) => v !== undefined).join(":");
      return {
        document: { ok: problems.length === 0, problems, warnings, implications: said, entries, head },
        text: [
          ...problems.map((p) => `${where(p)}${p.file ? ": " : ""}${p.message}${p.hint ? ` (${p.hint})` : ""}`),
          ...warnings.map((w) => `note: ${w}`),
          ...said,
          problems.length === 0
            ? `all good: ${entries} ${entries === 1 ? "entry" : "entries"}, head ${head}`
            : `${problems.length} problem${problems.length > 1 ? "s" : ""}`,
        ].join("\n"),
        exit: problems.length === 0 ? 0 : 3,
      };
    },
  },
  {
    name: "import",
    does: "many runs at once from a CSV file, all or nothing",
    words: [word("file", "the CSV file")],
    flags: [
      flag(
        "map",
        "FILE.yaml",
        "other headings: column names, ignore, skip_lines, decimal, separator, encoding, time_zone",
      ),
    ],
    examples: ["coatwright import history.csv --dry-run", "coatwright import history.csv"],
    writes: true,
    run: async (call) => {
      const file = call.args.need("file");
      const map = call.args.text("map");
      const { importRuns } = await importing();
      const done = await importRuns(
        call.workspace(),
        { file, bytes: call.readFile(file), map: map === undefined ? null : { file: map, bytes: call.readFile(map) } },
        call.stamp(),
      );
      return { document: done.document, text: done.text, notices: done.notices };
    },
  },
  {
    name: "report",
    does: "the before-and-after report in Markdown, of all changes or one",
    words: [],
    flags: [flag("change", "c-000043", "one change")],
    examples: ["coatwright report", "coatwright report --change c-000043 > change.md"],
    writes: false,
    run: (call) => {
      const ws = call.workspace();
      if (ws.book.damage.length > 0) throw new Refusal(ws.book.problems());
      const named = call.args.text("change");
      const markdown = reportMarkdown(ws, named === undefined ? null : changeAt(ws.ledger, parseChangeId(named)));
      return { document: { markdown }, text: markdown };
    },
  },
];
