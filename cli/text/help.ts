/** Help from the verb table: examples first. */
import { usage } from "../args.ts";
import { verbs } from "../verbs/table.ts";
import type { Verb } from "../verbs/verb.ts";

export function generalHelp(): string {
  const width = Math.max(...verbs.map((v) => v.name.length));
  return [
    "coatwright brings the anti-reflection film of deposition chambers back to goal, and keeps the record.",
    "",
    "  coatwright                       the screens, on the line in this folder, else on the demo line",
    "  coatwright run A2 2.043 84.1     record a measured run",
    "  coatwright propose --chamber A2  what to do next, and why",
    "",
    "usage: coatwright [verb] [words] [--line DIR] [--json]",
    "",
    ...verbs.map((v) => `  ${v.name.padEnd(width)}  ${v.does}`),
    `  ${"converse".padEnd(width)}  JSON lines in, JSON lines out: any verb in one running process`,
    "",
    "Every verb: --line DIR, --json, --help. Writing verbs: --at TIME, --by NAME, --dry-run.",
    "Screens: --ascii, --no-color (or NO_COLOR).",
    "Exit: 0 done; 1 a fault of the program; 2 the call or the input is wrong; 3 done, and the answer is no; 4 locked by another writer.",
  ].join("\n");
}

export function verbHelp(verb: Verb): string {
  const rows = [
    ...[...verb.words, ...(verb.rest ? [verb.rest] : [])].map((w) => [w.name.toUpperCase(), w.what]),
    ...verb.flags.map((f) => [`--${f.name}${f.kind === "switch" ? "" : ` ${f.shows}`}`, f.what]),
    ...(verb.writes
      ? [
          ["--at TIME", "when it happened: ISO 8601, or 23:40 in the line's time zone; now when left out"],
          ["--by NAME", "who; from the environment when left out"],
          ["--dry-run", "show what would be written, write nothing"],
        ]
      : []),
    ["--line DIR", "the line folder; this folder when left out"],
    ["--json", "one JSON document instead of text"],
  ];
  const width = Math.max(...rows.map((r) => r[0].length));
  return [
    ...verb.examples.map((e) => `  ${e}`),
    "",
    `${verb.name}: ${verb.does}`,
    `usage: ${usage(verb)}`,
    "",
    ...rows.map(([a, b]) => `  ${a.padEnd(width)}  ${b}`),
  ].join("\n");
}
