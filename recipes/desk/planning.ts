/** Planning: gathers what a chamber's plan of runs rests on and words the answer's document. Writes nothing. */
import { alarmsOf } from "../advice/alarms.ts";
import { type AtGoal, type Plan, planRuns } from "../advice/plan.ts";
import { sharpenedWords } from "../advice/plan-words.ts";
import type { Chamber, Goal } from "../line/line.ts";
import { asQuantities } from "../line/settings.ts";
import { question } from "./asking.ts";
import { goalWords } from "./words.ts";
import type { Workspace } from "./workspace.ts";

export interface Planned {
  chamber: Chamber;
  recipe: string;
  goal: Goal;
  plan: Plan;
  /** The alarms that stop proposals: runs done meanwhile teach the fault. */
  alarms: string[];
  /** The --json document, without `schema`. */
  document: Record<string, unknown>;
}

/** The plan of `runs` runs for a chamber's recipe. Throws what `planRuns` refuses, and as `Workspace.recipe`. */
export function plan(
  ws: Workspace,
  how: { chamber: string; recipe?: string; runs: number; levers: readonly string[] | null },
): Planned {
  const chamber = ws.chamber(how.chamber);
  const recipe = ws.recipe(chamber.name, how.recipe);
  const q = question(ws, chamber.name, recipe, null);
  const found = planRuns({ ...q, runs: how.runs, named: how.levers });
  const alarms = alarmsOf(q.found, q.overridden)
    .filter((a) => a.certain)
    .map((a) => a.sentence);
  const document = {
    chamber: chamber.name,
    recipe,
    goal: goalWords(q.goal),
    before: asQuantities(q.before, chamber),
    levers: found.levers.map((l) => l.name),
    at_goal_settings: asQuantities(found.goalSettings, chamber),
    at_goal_before: atGoalDocument(found.before),
    mean_variance_before: Number(found.meanVarianceBefore.toPrecision(4)),
    runs: found.runs.map((run, i) => ({
      run: i + 1,
      settings: asQuantities(run.settings, chamber),
      moves: run.moves,
      for: run.purpose,
      sharpens: run.sharpens && {
        of: run.sharpens.of,
        on: run.sharpens.on,
        sd_before: Number(run.sharpens.sdBefore.toPrecision(3)),
        sd_after: Number(run.sharpens.sdAfter.toPrecision(3)),
        says: sharpenedWords(run.sharpens),
      },
      at_goal: atGoalDocument(run.atGoal),
      mean_variance: Number(run.meanVariance.toPrecision(4)),
      touches: run.touches,
      past_anchor: run.pastAnchor,
    })),
    candidates: found.candidates,
    notices: found.notices,
    cannot_tell: found.cannotTell,
    alarms,
    cautions: found.cautions,
  };
  return { chamber, recipe, goal: q.goal, plan: found, alarms, document };
}

const atGoalDocument = ({ index, thicknessNm }: AtGoal) => ({
  index: rounded(index, 4),
  thickness_nm: rounded(thicknessNm, 2),
});

const rounded = (v: { mean: number; low: number; high: number }, digits: number) => ({
  mean: Number(v.mean.toFixed(digits)),
  low: Number(v.low.toFixed(digits)),
  high: Number(v.high.toFixed(digits)),
});
