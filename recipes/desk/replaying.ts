/**
 * The replay: over a chamber's own book, what this program would have expected of every measured run before its reading
 * was entered, and what it would have advised, beside the tuned EWMA told the same. Whether the model earns its keep here
 * is judged by the misses of the two on the same runs, in units of the goal's tolerance.
 */
import { type FilmReading, filmMoments, indexBounds, type Settings, thicknessBounds } from "../../calibration/index.ts";
import { Refusal, refuse } from "../../engine/index.ts";
import { decide } from "../advice/decide.ts";
import { chanceOf, goalNames, isLight } from "../advice/goal-region.ts";
import { measuredInGoal } from "../advice/mode.ts";
import type { Advice } from "../outlook.ts";
import { chamberRecord } from "../record/ledger.ts";
import { type RunRecord, runsOf } from "../record/timeline.ts";
import { chamberModel, inForce, question } from "./asking.ts";
import { canonicalSettings } from "./learn.ts";
import { Past } from "./past.ts";
import { rivalOf, weighed } from "./rival.ts";
import type { Workspace } from "./workspace.ts";

/** With fewer measured runs nothing is judged. */
const FEWEST = 10;
const HINT = "coatwright rehearse --scenario base judges on virtual chambers";
/** The latest measured runs that are replayed: each is a proposal of its own. */
const MOST = 200;
/** Misses count up to so many tolerances: a slip of units is nobody's fault. */
const CAP = 3;
/** Judged apart beyond so many standard errors. */
const SURE = 2;

interface Expected {
  index: number;
  thicknessNm: number;
}

export interface ReplayedRun {
  entry: number;
  recipe: string;
  read: { index: number | null; thicknessNm: number | null };
  ours: Expected & {
    /** Was the reading inside the 95 % interval? Null where not read. */
    insideIndex: boolean | null;
    insideThickness: boolean | null;
    /** Chance stated of the reading lying in the film goals at the settings that ran, and whether it did. */
    chance: number | null;
    inGoal: boolean | null;
    /** What would have been advised before it; null where nothing was in force. */
    advice: Advice | null;
  };
  rival: (Expected & { moves: boolean }) | null;
  /** Misses in tolerances, index and thickness averaged; null where nothing was read. */
  miss: { ours: number; rival: number | null };
}

export type Verdict = "earns_its_keep" | "no_better" | "worse" | "no_rival";

export interface Replay {
  chamber: string;
  measured: number;
  /** Measured runs not replayed: before anything was known, older than the latest 200, or read after a later run was. */
  leftOut: number;
  runs: ReplayedRun[];
  /** Mean of (rival's miss - ours), in tolerances, with its standard error; null without a rival. */
  better: { mean: number; error: number; runs: number } | null;
  verdict: Verdict;
}

/** The entry that first said what film a run has; null where none did. */
function readAt(ws: Workspace, run: RunRecord): number | null {
  if (ws.filmOf(run) === null) return null;
  const film = (r: { on: string; index?: number; thickness_nm?: number }) =>
    r.index !== undefined || r.thickness_nm !== undefined;
  const later = run.later.find((l) => film(l.reading));
  const own = run.readings.slice(0, run.readings.length - run.later.length);
  return own.some(film) ? run.seq : (later?.seq ?? null);
}

const measuredRuns = (ws: Workspace, chamber: string) =>
  runsOf(chamberRecord(ws.ledger, chamber).timeline)
    .map((run) => ({ run, at: readAt(ws, run) }))
    .filter((one): one is { run: RunRecord; at: number } => one.at !== null);

/** The chambers with enough measured runs. Refuses `too-few-runs` when none has. */
export function replayable(ws: Workspace): string[] {
  const counts = [...ws.line.chambers.keys()].map((name) => ({ name, runs: measuredRuns(ws, name).length }));
  const enough = counts.filter(({ runs }) => runs >= FEWEST).map(({ name }) => name);
  if (enough.length > 0) return enough;
  const most = Math.max(...counts.map(({ runs }) => runs));
  return refuse("too-few-runs", `no chamber has ${FEWEST} measured runs yet, the most is ${most}`, { hint: HINT });
}

/** Replays a chamber's book. Refuses `too-few-runs` under ten measured runs. */
export function replayChamber(ws: Workspace, name: string): Replay {
  const { chamber } = chamberRecord(ws.ledger, ws.chamber(name).name);
  const measured = measuredRuns(ws, chamber);
  if (measured.length < FEWEST)
    refuse("too-few-runs", `${chamber} has ${measured.length} measured runs, a replay needs ${FEWEST}`, {
      hint: HINT,
    });
  const wanted = new Map(measured.slice(-MOST).map(({ run, at }) => [at, run]));
  const past = new Past(ws);
  const runs: ReplayedRun[] = [];
  /** When the latest run read so far was made. */
  let latest = Number.NEGATIVE_INFINITY;
  for (const entry of ws.ledger.entries) {
    const run = wanted.get(entry.seq);
    if (run && run.atMs >= latest) {
      past.at(run.atMs);
      const replayed = replayRun(ws, past, run);
      if (replayed) runs.push(replayed);
      latest = run.atMs;
    }
    past.enter(entry);
  }
  const leftOut = measured.length - runs.length;
  return { chamber, measured: measured.length, leftOut, runs, ...judged(runs) };
}

function replayRun(ws: Workspace, past: Past, run: RunRecord): ReplayedRun | null {
  const film = ws.filmOf(run) as FilmReading;
  const { chamber, recipe } = run;
  if (past.model === null || run.data.steps.length !== 1) return null;
  const settings = canonicalSettings(ws.line, run.data.steps);
  const goal = ws.goal(recipe);
  const model = chamberModel(past, chamber);
  const law = model.measuredLaw(settings, film.gauge);
  const { index, lnThickness } = filmMoments(law);
  const ours: Expected = { index, thicknessNm: Math.exp(lnThickness) };
  const within = (value: number | null, { low, high }: { low: number; high: number }) =>
    value === null ? null : value >= low && value <= high;
  const names = goalNames(goal).filter((one) => !isLight(one));
  // Of the reading, gauge and all, so that it can be held against what was read.
  const chance = names.length > 0 ? chanceOf(law, goal, names, past.light) : Number.NaN;
  const rivalSays = rivalAt(past, run, settings, ours);
  const { tolerance } = weighed(goal, ours);
  const missOf = (e: Expected) => {
    const parts = [
      film.index === null ? null : Math.abs(film.index - e.index) / tolerance.index,
      film.thicknessNm === null ? null : Math.abs(film.thicknessNm - e.thicknessNm) / tolerance.thicknessNm,
    ].filter((miss) => miss !== null);
    return parts.reduce((sum, miss) => sum + Math.min(miss, CAP), 0) / parts.length;
  };
  const { index: readIndex, thicknessNm } = film;
  const reads = { index: readIndex, thicknessNm, reflectanceMinimumNm: null, weightedReflectancePercent: null };
  return {
    entry: run.seq,
    recipe,
    read: { index: readIndex, thicknessNm },
    ours: {
      ...ours,
      insideIndex: within(readIndex, indexBounds(law)),
      insideThickness: within(thicknessNm, thicknessBounds(law)),
      chance: Number.isFinite(chance) ? chance : null,
      inGoal: measuredInGoal(reads, goal),
      advice: advised(past, chamber, recipe),
    },
    rival: rivalSays,
    miss: { ours: missOf(ours), rival: rivalSays && missOf(rivalSays) },
  };
}

/** What would have been advised then; null where no recipe was in force yet. */
function advised(past: Past, chamber: string, recipe: string): Advice | null {
  try {
    return decide(question(past, chamber, recipe, null)).advice;
  } catch (error) {
    if (error instanceof Refusal && (error.code === "no-recipe" || error.code === "many-steps")) return null;
    throw error;
  }
}

function rivalAt(past: Past, run: RunRecord, settings: Settings, ours: Expected): ReplayedRun["rival"] {
  let force = settings;
  try {
    force = inForce(past, run.chamber, run.recipe, run.atMs).settings;
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
  }
  const rival = rivalOf(past, run.chamber, force, weighed(past.goal(run.recipe), ours));
  const expects = rival?.expects(settings);
  return rival && expects ? { ...expects, moves: rival.moves } : null;
}

function judged(runs: readonly ReplayedRun[]): Pick<Replay, "better" | "verdict"> {
  const gains = runs.flatMap(({ miss }) => (miss.rival === null ? [] : [miss.rival - miss.ours]));
  if (gains.length < 2) return { better: null, verdict: "no_rival" };
  const mean = gains.reduce((a, b) => a + b, 0) / gains.length;
  const square = gains.reduce((sum, g) => sum + (g - mean) ** 2, 0);
  const error = Math.sqrt(square / (gains.length - 1) / gains.length);
  const verdict = mean > SURE * error ? "earns_its_keep" : mean < -SURE * error ? "worse" : "no_better";
  return { better: { mean, error, runs: gains.length }, verdict };
}
