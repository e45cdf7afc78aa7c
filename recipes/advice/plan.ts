/**
 * The most informative runs to do next: of what can be typed in inside range and window, the runs after which the chamber is
 * known best over its goal, with what each is for and the interval at the goal after it. A run's reading only narrows the
 * covariance here, so no data are needed, and a new line with nothing but a stated recipe gets a plan too.
 */
import { beliefOf, beliefRows, type ChamberModel, type Lever, type Settings } from "../../calibration/index.ts";
import { refuse } from "../../engine/index.ts";
import type { Chamber, Goal, Line, Setting } from "../line/line.ts";
import { settingOf } from "../line/settings.ts";
import { anchorUse, bindingLimits, outside } from "../line/window.ts";
import type { Interval } from "../outlook.ts";
import { untoldHere } from "./cannot-tell.ts";
import { cautionsFor } from "./cautions.ts";
import type { CellLight } from "./cell-light.ts";
import { choose } from "./choose.ts";
import { type Design, design, type Probe, whitened } from "./design.ts";
import { gaugeCovariance, gaugeFor } from "./expectation.ts";
import {
  candidateRows,
  type PlanCandidate,
  type PlannedLever,
  planCandidates,
  plannedLevers,
  type Scales,
  tolerancesOf,
} from "./plan-candidates.ts";
import { goalBox, meanFilm } from "./plan-region.ts";
import { along, contrastsOf, mostSharpened, purposeOf, type Sharpened } from "./plan-words.ts";
import { moveWords } from "./reasons.ts";

export interface PlanQuestion {
  line: Line;
  chamber: Chamber;
  goal: Goal;
  model: ChamberModel;
  levers: readonly Lever[];
  light: CellLight;
  /** The recipe in force, and the last qualified one. */
  before: Settings;
  anchor: Settings | null;
  runs: number;
  /** Levers named by the person; null: those the line tunes. */
  named: readonly string[] | null;
  sites: number;
}

/** The film at the goal's settings, middle 95 % of the true film of one run. */
export interface AtGoal {
  index: Interval;
  thicknessNm: Interval;
}

export interface PlannedRun {
  settings: Settings;
  /** "silane 812 -> 880 sccm (+8.4 %)"; empty for the recipe as it is. */
  moves: string[];
  purpose: string;
  sharpens: Sharpened | null;
  /** At the goal once this run has been read. */
  atGoal: AtGoal;
  /** Mean predictive variance over the goal box after it, in squared tolerances, index and thickness together. */
  meanVariance: number;
  /** Limits of range and window this run touches; what of the anchor it passes. */
  touches: string[];
  pastAnchor: string[];
}

export interface Plan {
  levers: PlannedLever[];
  runs: PlannedRun[];
  /** Settings expected to reach the goal, where the intervals are told. */
  goalSettings: Settings;
  before: AtGoal;
  meanVarianceBefore: number;
  candidates: number;
  notices: string[];
  cannotTell: string[];
  cautions: string[];
}

export const mostRuns = 12;
/** A plan whose runs move fewer levers is taken where its mean variance is larger by no more than this. */
const slack = 0.03;

/** Plans `runs` runs. Refuses `bad-runs`, `no-levers`, `not-in-recipe`, `unknown-setting`, `no-room`. */
export function planRuns(q: PlanQuestion): Plan {
  if (!Number.isInteger(q.runs) || q.runs < 1 || q.runs > mostRuns)
    refuse("bad-runs", `a plan has 1 to ${mostRuns} runs, not ${q.runs}`);
  const { model, line, chamber, goal, before } = q;
  const notices: string[] = [];
  const settings = leversMeant(q);
  const goalSettings = choose({ ...q, anchor: null }).settings;
  const base = baseOf(q, goalSettings, notices);
  const belief = beliefOf(model);
  const thickness = Math.exp(model.quick(base).lnThickness);
  const gauge = gaugeCovariance(gaugeFor(line, "polished", "film"), q.sites);
  const noise = [
    belief.process[0] + gauge[0],
    gauge[1] / thickness,
    belief.process[1] + gauge[2] / thickness ** 2,
  ] as const;
  const scales: Scales = { noise: [Math.sqrt(noise[0]), Math.sqrt(noise[2])], tolerance: tolerancesOf(goal) };
  const levers = plannedLevers(model, base, settings, scales);
  const candidates = planCandidates(base, levers, { line, chamber });
  if (candidates.length < 2)
    refuse("no-room", `range and window leave no room to move ${levers.map((l) => l.name).join(", ")}`);

  // The plan's end is what it is judged at: the chamber ages while it is run.
  const box = goalBox(model, belief, goalSettings, levers, { goal, line, chamber, scales, k: belief.k + q.runs });
  const probes = candidates.map((c) => Array.from({ length: q.runs }, (_, at): Probe => probeOf(q, c, at, noise)));
  // Levers moved, and one more where a person would have to look first.
  const trouble = candidates.map(
    (c) => c.signs.filter((s) => s !== 0).length + (pastAnchorWords(q, c.settings).length > 0 ? 1 : 0),
  );
  const start = belief.covariance.slice();
  belief.steps.forEach((state, o) => {
    start[state * (belief.n + 1)] += belief.walk[o];
  });
  const found = design({
    n: belief.n,
    covariance: start,
    candidates: candidates.length,
    probe: (c, at) => probes[c][at],
    runs: q.runs,
    region: box.region,
    walk: belief.steps.map((state, o) => ({ state, variance: belief.walk[o] })),
    simplicity: { moves: (c) => trouble[c], slack },
  });

  const goalRows = beliefRows(model, goalSettings, belief.k);
  const mean = meanFilm(belief, goalRows);
  const atGoal = (p: Float64Array): AtGoal => {
    const half = ([goalRows.index, goalRows.lnThickness] as const).map(
      (row, o) => 1.96 * Math.sqrt(along(p, belief.n, row) + belief.process[o]),
    );
    const around = (m: number, low: number, high: number): Interval => ({ mean: m, low, high });
    return {
      index: around(mean[0], mean[0] - half[0], mean[0] + half[0]),
      thicknessNm: around(Math.exp(mean[1]), Math.exp(mean[1] - half[1]), Math.exp(mean[1] + half[1])),
    };
  };
  const contrasts = contrastsOf(model, belief, base, levers);
  const untaught = untaughtOf(model, levers);
  const newIn = (c: number, i: number) =>
    new Set(
      levers
        .filter(
          (l, at) =>
            candidates[c].signs[at] !== 0 &&
            untaught.has(l.name) &&
            !found.chosen.slice(0, i).some((e) => candidates[e].signs[at] !== 0),
        )
        .map((l) => l.name),
    );
  const runs = found.chosen.map((c, i): PlannedRun => {
    const { settings: at } = candidates[c];
    const [p, after] = [found.covariances[i], found.covariances[i + 1]];
    return {
      settings: at,
      moves: moveWords(chamber, before, at),
      purpose: purposeOf(candidates[c], levers, newIn(c, i), found.chosen.indexOf(c) < i),
      sharpens: mostSharpened(contrasts, belief.n, p, after),
      atGoal: atGoal(after),
      meanVariance: found.criterion[i + 1],
      touches: bindingLimits(at, chamber, line).map((b) => b.sentence),
      pastAnchor: pastAnchorWords(q, at),
    };
  });
  return {
    levers,
    runs,
    goalSettings,
    before: atGoal(start),
    meanVarianceBefore: found.criterion[0],
    candidates: candidates.length,
    notices,
    cannotTell: untoldHere(model, q.levers, { line, chamber, before: base }).map((u) => u.sentence),
    cautions: cautionsFor(chamber, before, highest(found, candidates)),
  };
}

function pastAnchorWords({ anchor, line }: PlanQuestion, at: Settings): string[] {
  if (!anchor) return [];
  const percent = (share: number) => `${(100 * Math.abs(share)).toFixed(1)} %`;
  return anchorUse(anchor, at, line)
    .filter((use) => use.past)
    .map(
      ({ text, used, limit }) =>
        `Passes the anchor: ${text} ${percent(used)} ${used < 0 ? "below" : "above"} the last qualified recipe where ${Number((100 * limit).toPrecision(3))} % is allowed: a person must look first.`,
    );
}

function probeOf(q: PlanQuestion, c: PlanCandidate, at: number, noise: readonly [number, number, number]): Probe {
  const { index, lnThickness } = candidateRows(q.model, c, at);
  return whitened(index, lnThickness, noise);
}

/** The settings a plan may move: those named, else those the line tunes, of those in the recipe. */
function leversMeant({ chamber, before, named }: PlanQuestion): Setting[] {
  const wanted = named
    ? [...new Set(named)].map((name) => settingOf(chamber, name))
    : [...chamber.settings.values()].filter((s) => s.tune && before.has(s.name));
  for (const { name, low, high } of wanted) {
    if (!before.has(name)) refuse("not-in-recipe", `${name} is not in the recipe in force`);
    if (!(high > low)) refuse("no-levers", `${name} has no range to move in`);
  }
  if (wanted.length === 0)
    refuse("no-levers", "the line file lets nothing be tuned", {
      hint: "tune: true in the line file, or --levers silane,ammonia,time",
    });
  return wanted;
}

/** The recipe the runs are about: that in force, or the goal's where the one in force is outside the window. */
function baseOf({ before, chamber, line }: PlanQuestion, goalSettings: Settings, notices: string[]): Settings {
  const broken = outside(before, chamber, line);
  if (broken.length === 0) return before;
  if (outside(goalSettings, chamber, line).length > 0)
    refuse("no-room", `the recipe in force is outside, and nothing near it is inside: ${broken[0].sentence}`);
  notices.push(
    `The recipe in force is outside (${broken[0].sentence}): the plan is about the nearest settings inside.`,
  );
  return goalSettings;
}

/** Levers none of whose effects any run of the line has shown. */
function untaughtOf({ layout }: ChamberModel, levers: readonly PlannedLever[]): Set<string> {
  const idle = (name: string) => {
    const terms = [...layout.active, ...layout.idle].filter((t) => t.movedBy.includes(name));
    return terms.length > 0 && terms.every((t) => layout.idle.includes(t));
  };
  return new Set(levers.map((l) => l.name).filter(idle));
}

/** The highest value each setting takes anywhere in the plan: what the cautions are about. */
function highest({ chosen }: Design, candidates: readonly PlanCandidate[]): Settings {
  const out = new Map<string, number>();
  for (const c of chosen)
    for (const [name, value] of candidates[c].settings) out.set(name, Math.max(value, out.get(name) ?? value));
  return out;
}
