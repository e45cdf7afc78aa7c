/** The verb `plan`: the most informative runs to do next. */
import { refuse } from "../../engine/index.ts";
import { plan } from "../../recipes/index.ts";
import { planText } from "../text/plan.ts";
import { chamberFlag, flag, type Verb } from "./verb.ts";

function count(text: string): number {
  if (!/^\d+$/.test(text)) refuse("bad-runs", `--runs is a number of runs, not "${text}"`, { hint: "--runs 4" });
  return Number(text);
}

export const planVerbs: Verb[] = [
  {
    name: "plan",
    does: "the N most informative runs to do next, in values that can be typed in, with what each is for",
    words: [],
    flags: [
      chamberFlag(),
      flag("runs", "N", "how many, 1 to 12", true),
      flag("recipe", "NAME", "the recipe"),
      flag("levers", "NAMES", "settings the runs may move, with commas; those the line tunes when left out"),
    ],
    examples: [
      "coatwright plan --chamber B1 --runs 4",
      "coatwright plan --chamber B1 --runs 6 --levers power,pressure",
    ],
    writes: false,
    run: (call) => {
      const ws = call.workspace();
      const levers = call.args.text("levers");
      const planned = plan(ws, {
        chamber: call.args.need("chamber"),
        recipe: call.args.text("recipe"),
        runs: count(call.args.need("runs")),
        levers:
          levers === undefined
            ? null
            : levers
                .split(",")
                .map((name) => name.trim())
                .filter((name) => name !== ""),
      });
      return { document: planned.document, text: planText(planned), notices: planned.alarms };
    },
  },
];
