/** Process capability of a recipe's production runs in one sentence, with what it promises; refused where runs are few. */
import { type Capability, capability, LEAST_RUNS, Refusal } from "../../engine/index.ts";
import type { Goal } from "../line/line.ts";
import { chamberRecord } from "../record/ledger.ts";
import { runsOf } from "../record/timeline.ts";
import type { Workspace } from "./workspace.ts";

export interface CapabilityHere {
  sentence: string;
  runs: number;
  /** Null where refused, or where the film has no goal. */
  index: Capability | null;
  thicknessNm: Capability | null;
}

/** The latest production runs that count. */
const latest = 50;

/** Ppk of the last readings under a recipe, those marked as tuning left out. */
export function capabilityOf(ws: Workspace, chamber: string, recipe: string, goal: Goal): CapabilityHere {
  const films = runsOf(chamberRecord(ws.ledger, chamber).timeline)
    .filter((run) => run.recipe === recipe && run.data.kind !== "tuning")
    .map((run) => ws.filmOf(run))
    .filter((film) => film !== null)
    .slice(-latest);
  const none = { runs: films.length, index: null, thicknessNm: null };
  if (!goal.index && !goal.thicknessNm) return { sentence: "no Ppk: the film itself has no goal.", ...none };
  const values = { index: films.map((f) => f.index), thicknessNm: films.map((f) => f.thicknessNm) };
  const read = (["index", "thicknessNm"] as const).map((name) => ({
    aim: goal[name],
    values: values[name].filter((v) => v !== null),
  }));
  const fewest = Math.min(...read.filter((r) => r.aim).map((r) => r.values.length));
  if (fewest < LEAST_RUNS)
    return {
      sentence: `no Ppk: ${fewest} reading${fewest === 1 ? "" : "s"} not marked as tuning, and fewer than ${LEAST_RUNS} promise too little.`,
      ...none,
    };
  try {
    const [index, thicknessNm] = read.map(({ aim, values: v }) =>
      aim ? capability(v, { lower: aim.value - aim.within, upper: aim.value + aim.within }) : null,
    );
    const found = [index, thicknessNm].filter((c) => c !== null);
    const least = found.reduce((a, b) => (b.ppk < a.ppk ? b : a));
    const apart =
      index && thicknessNm ? ` (index ${index.ppk.toFixed(2)}, thickness ${thicknessNm.ppk.toFixed(2)})` : "";
    const promise = Math.min(...found.map((c) => c.ppkAtLeast));
    return {
      sentence: `Ppk ${least.ppk.toFixed(2)}${apart}, at least ${promise.toFixed(2)} with 95 % confidence: the last ${least.runs} readings not marked as tuning, gauge scatter included.`,
      runs: films.length,
      index,
      thicknessNm,
    };
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    return { sentence: `no Ppk: ${error.problems[0].message}.`, ...none };
  }
}
