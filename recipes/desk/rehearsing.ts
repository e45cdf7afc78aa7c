/**
 * The rehearsal as the verb asks for it: scenarios, practices and seeds in, the scoreboard out. Joins the rehearsal, which
 * knows no model, with this program as one of its practices. Worlds may be played anywhere and in any order: what comes
 * out is the same.
 */
import { refuse } from "../../engine/index.ts";
import { type Played, playLoop } from "../rehearsal/closed-loop.ts";
import { oracle, usualPractices } from "../rehearsal/practices/all.ts";
import type { Practice } from "../rehearsal/practices/practice.ts";
import { scenarioNamed, scenarios } from "../rehearsal/scenarios.ts";
import { type Figure, gapClosed, type Score, scoreOf } from "../rehearsal/score.ts";
import { ours } from "./our-practice.ts";

export { replayDocument, summaryOf } from "./replay-words.ts";
export { replayable, replayChamber } from "./replaying.ts";
export { sealCount, sealCountDocument } from "./shadow-words.ts";
export { countSeals, seal } from "./shadowing.ts";
export type { Figure, Played, Score };

/** Every practice in the order of the table. */
const practices: readonly Practice[] = [...usualPractices, ours, oracle];
export const practiceNames: readonly string[] = practices.map((p) => p.name);
export const OURS = ours.name;
/** In place of names: every scenario. */
export const ALL = "all";
/** The rival that the gap is measured from. */
const RIVAL = "tuned-ewma";

/** One world to be played: plain data, so that it can be sent to a worker. */
export interface WorldAsked {
  scenario: string;
  practices: readonly string[];
  seed: string;
}

/** What each practice did in that world, in the order asked. */
export type WorldPlayed = Played[];

function practiceNamed(name: string): Practice {
  return (
    practices.find((p) => p.name === name) ??
    refuse("unknown-practice", `there is no practice ${name}`, { hint: practiceNames.join(", ") })
  );
}

/** Plays one world. The same question gives the same answer on any machine and in any order. */
export function playWorld(asked: WorldAsked): WorldPlayed {
  const scenario = scenarioNamed(asked.scenario);
  const stage = scenario.stage(asked.seed);
  return asked.practices.map((name) => playLoop(stage, practiceNamed(name), scenario));
}

/** What a rehearsal is to play. */
export interface RehearsalAsked {
  scenarios: readonly string[];
  practices: readonly string[];
  seed: string;
  worlds: number;
}

/** Scenarios and practices as asked for, all of them known. Refuses `unknown-scenario` and `unknown-practice`. */
export function rehearsalOf(words: {
  scenarios: readonly string[];
  practices: readonly string[];
  seed: string;
  worlds: number;
}): RehearsalAsked {
  const every = words.scenarios.length === 1 && words.scenarios[0] === ALL;
  const chosen = every ? scenarios.map((s) => s.name) : words.scenarios.map((name) => scenarioNamed(name).name);
  for (const name of words.practices) practiceNamed(name);
  // In the order of the table, whatever the order they were asked in.
  const some = practiceNames.filter((name) => words.practices.length === 0 || words.practices.includes(name));
  return { ...words, scenarios: chosen, practices: some };
}

/** The worlds of a rehearsal in order: scenario by scenario, seeds TEXT-1 to TEXT-N. */
export function worldsOf({ scenarios: names, practices: some, seed, worlds }: RehearsalAsked): WorldAsked[] {
  return names.flatMap((scenario) =>
    Array.from({ length: worlds }, (_, i) => ({ scenario, practices: some, seed: `${seed}-${i + 1}` })),
  );
}

export interface ScenarioScore {
  name: string;
  title: string;
  seeds: { first: string; last: string };
  worlds: number;
  /** Is every run of production measured anyway? */
  everyRunMeasured: boolean;
  scores: { title: string; score: Score }[];
  /** Share of the way from the tuned EWMA to the oracle; null where one of the three was not asked. */
  gapClosed: Figure | null;
}

/** The scoreboard from all worlds played, in the order of `worldsOf`. */
export function scoreboard(asked: RehearsalAsked, played: readonly WorldPlayed[]): ScenarioScore[] {
  return asked.scenarios.map((name, s): ScenarioScore => {
    const mine = played.slice(s * asked.worlds, (s + 1) * asked.worlds);
    const of = (practice: string): Played[] | null => {
      const at = asked.practices.indexOf(practice);
      return at < 0 ? null : mine.map((world) => world[at]);
    };
    const [own, rival, best] = [of(OURS), of(RIVAL), of(oracle.name)];
    return {
      name,
      title: scenarioNamed(name).title,
      seeds: { first: `${asked.seed}-1`, last: `${asked.seed}-${asked.worlds}` },
      worlds: asked.worlds,
      everyRunMeasured: scenarioNamed(name).measuredEvery === 1,
      scores: asked.practices.map((practice) => ({
        title: practiceNamed(practice).title,
        score: scoreOf(practice, of(practice) ?? []),
      })),
      gapClosed: own && rival && best && own.some((p) => p.later.made > 0) ? gapClosed(own, rival, best) : null,
    };
  });
}

/** The scoreboard as `--json` gives it; figures are {value, error}, null where there is nothing to tell. */
export function scoreboardDocument(board: readonly ScenarioScore[]): Record<string, unknown> {
  const number = (v: number) => (Number.isFinite(v) ? Number(v.toPrecision(5)) : null);
  const figure = (f: Figure | null) =>
    f && Number.isFinite(f.value) ? { value: number(f.value), error: number(f.error) } : null;
  return {
    scenarios: board.map((s) => ({
      scenario: s.name,
      title: s.title,
      worlds: s.worlds,
      seeds: s.seeds,
      gap_closed: figure(s.gapClosed),
      practices: s.scores.map(({ title, score }) => ({
        practice: score.practice,
        title,
        runs_to_goal: score.runs && {
          median: score.runs.median,
          mean: figure(score.runs.mean),
          p90: number(score.runs.p90),
          within_1: figure(score.runs.within[0]),
          within_2: figure(score.runs.within[1]),
          within_3: figure(score.runs.within[2]),
          never: figure(score.runs.never),
        },
        false_done: figure(score.falseDone),
        later_in_goal: figure(score.later),
        worst_decile: figure(score.worstDecile),
        measured_runs: figure(score.measured),
        changes_per_100: figure(score.changesPer100),
        idle_changes_per_100: figure(score.idlePer100),
        false_stops_per_100: figure(score.falseStopsPer100),
        leak_named: score.leakNamed && {
          within_1: figure(score.leakNamed[0]),
          within_2: figure(score.leakNamed[1]),
          within_3: figure(score.leakNamed[2]),
        },
        said_done: score.saidDone && { median: number(score.saidDone.median), share: figure(score.saidDone.share) },
        told_untold: figure(score.toldUntold),
        advice: Object.fromEntries(Object.entries(score.advice).map(([name, share]) => [name, number(share)])),
        chances: score.calibration.map((c) => ({
          from: c.from,
          to: c.to,
          stated: number(c.stated),
          came: figure(c.came),
          count: c.count,
        })),
      })),
    })),
  };
}
