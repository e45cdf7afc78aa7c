/**
 * The scenarios of the rehearsal: what happens to a chamber, on which kind of world. The linear ones are those in which
 * the calibration's form is nearly right (and one where it is wrong in known ways); the tube ones obey other laws.
 */
import { refuse } from "../../engine/index.ts";
import { linearStage } from "./linear-stage.ts";
import type { LinearVariant } from "./linear-world.ts";
import type { Stage } from "./stage.ts";
import { type TubeOptions, tubeStage } from "./tube-stage.ts";

export interface Scenario {
  /** One word, what the command line picks scenarios by. */
  name: string;
  title: string;
  /** Is there a goal to be reached first, or does production simply go on? */
  tuning: boolean;
  /** Depositions of production, cleaned after every `cycle`, of which every so manieth is measured. */
  production: number;
  cycle: number;
  measuredEvery: number;
  /** A leak begins at the clean that comes after so many cleans. */
  leakAtClean?: number;
  /** A setting of which the history cannot tell anything; a practice that speaks should say so at first. */
  untold?: string;
  stage(seed: string): Stage;
}

const PRODUCTION = 100;
const CYCLE = 25;

const linear = (name: LinearVariant, title: string, measuredEvery = 1): Scenario => ({
  name,
  title,
  tuning: true,
  production: PRODUCTION,
  cycle: CYCLE,
  measuredEvery,
  stage: (seed) => linearStage(seed, name).stage,
});

const KNOWN: TubeOptions = { history: 50, cleanEvery: 25, afterClean: true, sisters: 2 };
const NEW: TubeOptions = { history: 0, cleanEvery: 25, afterClean: false, sisters: 3 };

function tube(name: string, title: string, options: TubeOptions, plan: Partial<Scenario> = {}): Scenario {
  return {
    name,
    title,
    tuning: true,
    production: PRODUCTION,
    cycle: CYCLE,
    measuredEvery: 1,
    stage: (seed) => tubeStage(seed, options).stage,
    ...plan,
  };
}

export const scenarios: readonly Scenario[] = [
  linear("base", "a new chamber, a new film, three sisters (linear worlds)"),
  linear("tight", "the same with a goal half as wide"),
  linear("cold", "the same without sisters"),
  linear("wide", "the same with chambers twice as far apart"),
  linear("fifth", "the same, production measured every fifth run", 5),
  linear("misfit", "the same with heavy tails, a worse gauge, unwritten cleans, interactions"),
  tube("after-clean", "a known chamber after a clean (tube-like worlds)", KNOWN),
  tube(
    "nothing-wrong",
    "a known chamber with nothing wrong: keep",
    { ...KNOWN, afterClean: false, cleanEvery: Number.POSITIVE_INFINITY, history: 30 },
    { tuning: false, cycle: Number.POSITIVE_INFINITY, production: 50 },
  ),
  tube("leak", "a known chamber; the clean after it was tuned leaves an air leak", KNOWN, {
    leakAtClean: 0,
    production: 50,
  }),
  tube(
    "silane-only",
    "a history in which only silane moved",
    { ...KNOWN, sisters: 0, moved: ["silane"] },
    { untold: "ammonia" },
  ),
  tube("outliers", "a known chamber after a clean, 5 % gross slips", { ...KNOWN, slips: 0.05 }),
  tube("unwritten", "half of the cleans are not written down", { ...KNOWN, unwritten: 0.5 }),
  tube(
    "out-of-reach",
    "an index wanted that nothing in the window reaches",
    { ...KNOWN, wantedIndex: 2.25 },
    { production: 0 },
  ),
  tube("new-tube", "a new chamber beside three sisters (tube-like worlds)", NEW),
  tube(
    "drift",
    "production measured every fifth run, cleaned every hundred",
    { ...KNOWN, history: 50 },
    { measuredEvery: 5, cycle: 100, production: 200 },
  ),
];

/** The scenario of that name. Refuses `unknown-scenario`. */
export function scenarioNamed(name: string): Scenario {
  return (
    scenarios.find((s) => s.name === name) ??
    refuse("unknown-scenario", `there is no scenario ${name}`, { hint: scenarios.map((s) => s.name).join(", ") })
  );
}
