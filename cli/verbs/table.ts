/** The one table of verbs: parsing, help and the JSON conversation all read it. */
import { nearestWord, refuse } from "../../engine/index.ts";
import { askVerbs } from "./ask.ts";
import { changeVerbs } from "./change.ts";
import { fileVerbs } from "./files.ts";
import { filmVerbs } from "./film.ts";
import { planVerbs } from "./plan.ts";
import { recordVerbs } from "./record.ts";
import { rehearseVerbs } from "./rehearse.ts";
import type { Verb } from "./verb.ts";
import { watchVerbs } from "./watch.ts";
import { whyVerbs } from "./why.ts";

const all = [
  ...fileVerbs,
  ...filmVerbs,
  ...recordVerbs,
  ...askVerbs,
  ...whyVerbs,
  ...changeVerbs,
  ...planVerbs,
  ...watchVerbs,
  ...rehearseVerbs,
];
const inOrder = [
  "new",
  "check",
  "run",
  "record run",
  "record reading",
  "record recipe",
  "record clean",
  "record precoat",
  "record service",
  "record gauge",
  "record note",
  "correct",
  "import",
  "film",
  "chamber",
  "why",
  "predict",
  "propose",
  "plan",
  "adopt",
  "approve",
  "enter",
  "close",
  "undo",
  "watch",
  "report",
  "rehearse",
];

/** Every verb that can be asked for one at a time, in the order the help shows them. `converse` is the loop around them. */
export const verbs: readonly Verb[] = inOrder.map((name) => all.find((v) => v.name === name) as Verb);

/** The verb that the first words name, and the rest of the words. Refuses `unknown-verb` with the nearest. */
export function findVerb(argv: readonly string[]): { verb: Verb; rest: string[] } {
  for (const length of [2, 1]) {
    const name = argv.slice(0, length).join(" ");
    const verb = verbs.find((v) => v.name === name);
    if (verb) return { verb, rest: argv.slice(length) };
  }
  return refuse("unknown-verb", ...unknown(argv));
}

function unknown(argv: readonly string[]): [string, { hint: string }] {
  if (argv[0] === "record")
    return [
      argv[1] && !argv[1].startsWith("-") ? `there is no record ${argv[1]}` : "record what?",
      { hint: "run, reading, recipe, clean, precoat, service, gauge or note" },
    ];
  const near = nearestWord(
    argv[0] ?? "",
    verbs.map((v) => v.name),
  );
  return [`"${argv[0]}" is not a verb`, { hint: near ? `did you mean ${near}?` : "coatwright --help lists them" }];
}

/** A verb by its full name, for requests. */
export function verbNamed(name: string): Verb {
  return verbs.find((v) => v.name === name) ?? refuse("unknown-verb", ...unknown(name.split(" ")));
}
