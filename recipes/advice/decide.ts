/**
 * The advice: change, keep, measure, fault or out of reach, with its reasons. A pipeline of plain questions, the first that
 * answers wins: is something broken? has the last change been run? is there anything to stand on? is a better recipe worth
 * it? would one more reading change the answer? does the best reach the goal at all?
 */
import { type ChamberModel, chanceIn, type Lever, type Settings, type TrackedRun } from "../../calibration/index.ts";
import type { Chamber, Goal, Line } from "../line/line.ts";
import { anchorUse, bindingLimits, outside } from "../line/window.ts";
import type { Advice } from "../outlook.ts";
import { type Alarm, type AlarmEvidence, alarmsOf } from "./alarms.ts";
import { isPastAnchor, pastAnchor } from "./anchor.ts";
import { untoldHere } from "./cannot-tell.ts";
import { cautionsFor } from "./cautions.ts";
import type { CellLight } from "./cell-light.ts";
import { type Choice, choose, filmInside } from "./choose.ts";
import { type Expectation, expectation } from "./expectation.ts";
import { chanceOf, goalNames, isLight } from "./goal-region.ts";
import { deadBand, type MeasuredRun, type Mode, measuredInGoal, modeOf } from "./mode.ts";
import { filmLoss } from "./objective.ts";
import {
  asPercent,
  effectSentences,
  expectSentence,
  missWords,
  moveWords,
  readSentence,
  runsWord,
  sistersSentence,
} from "./reasons.ts";
import type { Steering } from "./steering.ts";

export interface Question {
  line: Line;
  chamber: Chamber;
  recipe: string;
  goal: Goal;
  model: ChamberModel;
  levers: readonly Lever[];
  light: CellLight;
  /** The recipe in force. `stated` false: nobody stated it, it is the latest run's. */
  before: Settings;
  stated: boolean;
  /** The last qualified recipe, from which corrections add up. */
  anchor: Settings | null;
  /** The entry that recipe comes from. */
  anchorEntry: number | null;
  /** Runs measured since the last event that starts tuning, and since the last clean. */
  runsSinceEvent: readonly MeasuredRun[];
  runsSinceClean: readonly MeasuredRun[];
  record: readonly TrackedRun[];
  found: AlarmEvidence;
  overridden: ReadonlySet<string>;
  openChange: { change: string; state: "adopted" | "entered"; after: Settings; runsSince: number } | null;
  awaitingReadings: number;
  forMode: Mode | null;
  /** What the engineer holds, allows and limits. */
  steering?: Steering;
  sites: number;
}

export interface Answer {
  advice: Advice;
  mode: Mode;
  before: Settings;
  after: Settings;
  now: Expectation;
  ahead: Expectation;
  done: boolean;
  because: string[];
  cannotTell: string[];
  alarms: Alarm[];
  cautions: string[];
}

/** A gain in chance smaller than this is not worth a change, whatever the loss says. */
const worthwhile: Record<Mode, number> = { tuning: 0.02, production: 0.05 };
/** A doubt is waited out where the change it speaks against promises no more than this in chance. */
const patience = 0.15;
/** Where even a perfectly known chamber would hardly ever be in goal, tuning is not done, it is hopeless. */
const leastDone = 0.2;
/** Tuning is done at this share of the chance a perfectly known chamber would have. */
const doneShare = 0.9;

export function decide(q: Question): Answer {
  const context = { line: q.line, goal: q.goal, light: q.light, sites: q.sites };
  const now = expectation(q.model, q.before, context);
  // Inside the anchor first. A recipe already past it cannot be held inside: there a person is asked for.
  const pastNow = isPastAnchor(q, q.before);
  const held = q.anchor !== null && !pastNow && !q.overridden.has("past_anchor");
  const best = choose({ ...q, anchor: held ? q.anchor : null });
  const moved = [...best.settings].some(([name, value]) => q.before.get(name) !== value);
  const ahead = moved ? expectation(q.model, best.settings, context) : now;
  const attainable = attainableChance(q, ahead);
  const lastRead = q.runsSinceEvent.at(-1) ?? q.runsSinceClean.at(-1);
  const hit = lastRead ? measuredInGoal(lastRead, q.goal) === true : false;
  const done = hit && now.chanceJudged >= Math.max(doneShare * attainable, leastDone);
  const mode = q.forMode ?? modeOf(q.runsSinceEvent, q.goal, done);
  const alarms = alarmsOf(q.found, q.overridden);
  // A fault comes first: that the recipe is past its anchor is told where nothing is broken.
  if (pastNow && !alarms.some((a) => a.certain)) alarms.push(pastAnchor(q, q.before));
  const because = opening(q, now, alarms);
  const finish = (advice: Advice, after: Settings, more: string[]): Answer => {
    const shown = after === q.before ? now : ahead;
    return {
      advice,
      mode,
      before: q.before,
      after,
      now,
      ahead: shown,
      done,
      because: [...because, ...more],
      cannotTell: [
        ...new Set([
          ...unusable(q),
          ...now.cannotTell,
          ...shown.cannotTell,
          ...untoldHere(q.model, q.levers, q).map((u) => u.sentence),
        ]),
      ],
      alarms,
      cautions: cautionsFor(q.chamber, q.before, after),
    };
  };
  const stop = (found: readonly Alarm[]) =>
    finish(
      "fault",
      q.before,
      found.flatMap((a) => [a.sentence, `First checks: ${a.checks.join(" ")}`, overruleSentence(q, a)]),
    );

  const certain = alarms.filter((a) => a.certain);
  if (certain.length > 0) return stop(certain);
  if (q.openChange?.state === "entered" && q.openChange.runsSince === 0)
    return finish("measure", q.before, [
      `Change ${q.openChange.change} was entered and no run has been measured since: run and measure it first.`,
    ]);
  const asking = alarms.filter((a) => a.calls === "ask");
  if (asking.length > 0)
    return finish("measure", q.before, [
      ...asking.map((a) => a.sentence),
      "One more run as it is decides between a fault, a bad measurement and an ordinary offset.",
    ]);
  if (q.model.ownReadings === 0 && q.model.context.sisters.length === 0)
    return finish("measure", q.before, [
      `${q.chamber.name} has no measured run and no sisters: run the recipe as it is and measure it.`,
    ]);

  const gain =
    filmLoss(q.model.quick(q.before), q.goal, q.light) - filmLoss(q.model.quick(best.settings), q.goal, q.light);
  const settled = outside(q.before, q.chamber, q.line).length === 0;
  const reached = best.inside && reaches(q, ahead);
  if (settled && (reached || reaches(q, now))) {
    // Waiting costs a run at the present chance: where a change promises much more, it is made all the same.
    const urgent = moved && ahead.chanceJudged - now.chanceJudged > patience;
    const doubt = urgent ? null : openDoubt(q);
    if (doubt) return finish("measure", q.before, [doubt]);
    if (!moved || gain <= deadBand[mode] || ahead.chanceJudged - now.chanceJudged < worthwhile[mode])
      return finish("keep", q.before, keepReasons(q, now, ahead, best.settings, mode));
    const noise = mode === "production" && !urgent ? oneReading(q) : null;
    if (noise) return finish("measure", q.before, [noise]);
  }
  const stopAtAnchor = (wanted: Settings): Answer => {
    const past = pastAnchor(q, wanted);
    alarms.splice(0, alarms.length, past, ...alarms.filter((a) => a.name !== past.name));
    return stop([past]);
  };
  if (reached && isPastAnchor(q, best.settings)) return stopAtAnchor(best.settings);
  if (reached) return finish("change", best.settings, changeReasons(q, best, ahead, attainable));

  if (held) {
    const free = choose({ ...q, anchor: null });
    if (free.inside && isPastAnchor(q, free.settings) && reaches(q, expectation(q.model, free.settings, context)))
      return stopAtAnchor(free.settings);
  }
  if (!best.inside) return finish("out_of_reach", q.before, ["No settings inside the qualified window were found."]);
  return finish("out_of_reach", best.settings, [
    `Nothing inside the window reaches the goal: the nearest point has ${missWords(ahead.film, q.goal, 0).join(" and ") || "the reflectance goal unmet"}, a chance of ${asPercent(ahead.chanceJudged)}.`,
    ...bindingLimits(best.settings, q.chamber, q.line).map((f) => f.sentence),
  ]);
}

const overruleSentence = (q: Question, a: Alarm) =>
  `To go on after the look: coatwright record note --chamber ${q.chamber.name} --override ${a.name} --runs 5 --text EVIDENCE (it ends after these runs or at the next clean).`;

/** Measured runs whose settings make no sense: left out, said, and mended by a correction. */
const unusable = (q: Question): string[] =>
  q.model.log.unusable.map(
    ({ entry, missing }) =>
      `Entry ${entry} has no usable ${missing} and teaches nothing: coatwright correct ${entry} ${missing}=VALUE --reason TEXT.`,
  );

/** Does the mean film of an expectation meet every judged goal? */
function reaches(q: Question, e: Expectation): boolean {
  if (!filmInside(q.goal, e.film.index, e.film.thicknessNm)) return false;
  if (q.light.unjudged) return true;
  const facetNm = e.film.thicknessNm * q.light.facet.mean;
  const minimum = q.goal.reflectanceMinimumNm;
  const weighted = q.goal.weightedReflectancePercent;
  const m = minimum ? q.light.minimum(e.film.index, facetNm) : null;
  const w = weighted ? q.light.weighted(e.film.index, facetNm) : null;
  return (
    (!minimum || (m !== null && Math.abs(m - minimum.value) <= minimum.within)) &&
    (!weighted || (w !== null && w <= weighted.atMost))
  );
}

/** Chance in goal of the best film if the chamber were known perfectly: only the scatter from run to run is left. */
function attainableChance(q: Question, best: Expectation): number {
  const [pn, pl] = q.model.processScatter;
  const law = {
    parts: [
      {
        weight: 1,
        index: best.film.index,
        lnThickness: Math.log(best.film.thicknessNm),
        covariance: [pn, 0, pl] as const,
      },
    ],
  };
  const names = goalNames(q.goal).filter((name) => !isLight(name) || q.light.unjudged === null);
  if (names.length === 0) return chanceIn(law, { index: [-Infinity, Infinity], thicknessNm: [0, Infinity], also: [] });
  return chanceOf(law, q.goal, names, q.light);
}

/** Joint probability that the last reading was bad or the chamber stepped, between which nothing is decided yet. */
const undecided: readonly [number, number] = [0.25, 0.93];

/**
 * Is there an open doubt about the last reading that would turn the answer? A reading out of goal where the film was
 * expected in goal is a bad measurement (keep) or a step nobody logged (change): one more run tells, and costs less than
 * either mistake.
 */
function openDoubt(q: Question): string | null {
  const last = q.record.at(-1);
  if (!last) return null;
  const doubt = last.suspect + last.step;
  if (doubt < undecided[0] || doubt > undecided[1]) return null;
  const expected = { index: last.expectedIndex.mean, thicknessNm: last.expectedThickness.mean };
  const read = { index: last.index ?? expected.index, thicknessNm: last.thicknessNm ?? expected.thicknessNm };
  if (!filmInside(q.goal, expected.index, expected.thicknessNm) || filmInside(q.goal, read.index, read.thicknessNm))
    return null;
  return `The last reading (entry ${last.entry}: index ${read.index.toFixed(3)}, ${read.thicknessNm.toFixed(1)} nm) is out of goal where index ${expected.index.toFixed(3)}, ${expected.thicknessNm.toFixed(1)} nm was expected: a bad measurement with ${asPercent(last.suspect)} probability, a step nobody logged with ${asPercent(last.step)}. Measure that wafer again, or run once more as it is.`;
}

/** Readings further out than this many standard deviations count as a surprise worth a second look. */
const surprising = 1.5;

/**
 * In production, a change that one surprising reading alone calls for is chasing noise: before it the film was expected
 * well inside the goal. A second reading that agrees is what a change should rest on.
 */
function oneReading(q: Question): string | null {
  const last = q.record.at(-1);
  if (!last || Math.max(Math.abs(last.surpriseIndex ?? 0), Math.abs(last.surpriseThickness ?? 0)) < surprising)
    return null;
  const { index, thicknessNm } = q.goal;
  const miss = (goal: { value: number; within: number } | undefined, value: number) =>
    goal ? ((value - goal.value) / goal.within) ** 2 : 0;
  const before = miss(index, last.expectedIndex.mean) + miss(thicknessNm, last.expectedThickness.mean);
  if (before > 2 * deadBand.production) return null;
  return `Only the last reading (entry ${last.entry}) speaks for a change: before it the film was expected at index ${last.expectedIndex.mean.toFixed(3)}, ${last.expectedThickness.mean.toFixed(1)} nm. Measure one more run before moving anything.`;
}

/** A reading left aside as bad is said, so that nobody wonders why it moved nothing; where an alarm says what it was, that does. */
function leftAside(q: Question, alarms: readonly Alarm[]): string | null {
  const last = q.record.at(-1);
  if (!last || last.suspect <= undecided[1] - last.step) return null;
  if (alarms.some((a) => a.calls === "tell" && a.entry === last.entry)) return null;
  return `The last reading (entry ${last.entry}) is a bad measurement with ${asPercent(last.suspect)} probability and is left aside: a wrong wafer, swapped rows or a slip of units?`;
}

function opening(q: Question, now: Expectation, alarms: readonly Alarm[]): string[] {
  const out = outside(q.before, q.chamber, q.line).map((f) => `In force now: ${f.sentence}`);
  const cycle = q.runsSinceClean.length > 0 && q.model.log.events.some((e) => e.kind === "clean");
  const bad = new Set(q.record.filter((r) => r.suspect > undecided[1] - r.step).map((r) => r.entry));
  const runs = (q.runsSinceClean.length ? q.runsSinceClean : q.runsSinceEvent).filter((r) => !bad.has(r.entry));
  if (q.steering?.words) out.push(`As you steered it (${q.steering.words}).`);
  const read = readSentence(runs, q.goal, cycle);
  if (read) out.push(read);
  if (!q.stated)
    out.push("No recipe was ever stated for this chamber: the settings of its latest run are taken as in force.");
  out.push(expectSentence("At the recipe in force", now, q.light));
  const aside = leftAside(q, alarms);
  if (aside) out.push(aside);
  for (const told of alarms.filter((a) => a.calls === "tell"))
    out.push(told.sentence, `First checks: ${told.checks.join(" ")}`);
  const sisters = sistersSentence(q.model);
  if (sisters) out.push(sisters);
  if (q.awaitingReadings > 0)
    out.push(
      `${runsWord(q.awaitingReadings)} since the last reading ${q.awaitingReadings === 1 ? "is" : "are"} not measured.`,
    );
  return out;
}

function keepReasons(q: Question, now: Expectation, then: Expectation, best: Settings, mode: Mode): string[] {
  const moves = moveWords(q.chamber, q.before, best);
  if (moves.length === 0) return ["No typeable change inside the window would bring the film closer to goal."];
  const production = mode === "production" ? "; correcting every run by its error would only add scatter" : "";
  return [
    `The best change (${moves.join(", ")}) would move the chance only from ${asPercent(now.chanceJudged)} to ${asPercent(then.chanceJudged)}: not worth more than noise${production}.`,
  ];
}

function changeReasons(q: Question, best: Choice, ahead: Expectation, attainable: number): string[] {
  const after = best.settings;
  const out: string[] = [];
  const adopted = q.openChange?.state === "adopted" ? q.openChange : null;
  if (adopted)
    out.push(
      [...after].every(([name, value]) => adopted.after.get(name) === value)
        ? `Change ${adopted.change} already asks for exactly this: enter it at the tool (coatwright enter ${adopted.change}) rather than adopting it again.`
        : `Change ${adopted.change} is adopted but not entered: adopting this one supersedes it.`,
    );
  out.push(`Proposed: ${moveWords(q.chamber, q.before, after).join(", ")}.`);
  out.push(...effectSentences(q.model, q.chamber, q.before, after));
  out.push(expectSentence("With it", ahead, q.light));
  if (ahead.chanceJudged < 0.5)
    out.push(
      "This is an exploratory run: the chance is under one half, and its reading is what makes the next proposal sure.",
    );
  if (attainable - ahead.chanceJudged > 0.05)
    out.push(
      `A chamber known perfectly would reach ${asPercent(attainable)}; the rest is what is not yet known of ${q.chamber.name}.`,
    );
  if (best.runnerUp)
    out.push(
      `Runner-up: ${moveWords(q.chamber, q.before, best.runnerUp.settings).join(", ")} would have a chance of ${asPercent(best.runnerUp.chance)}.`,
    );
  out.push(...bindingLimits(after, q.chamber, q.line).map((f) => f.sentence));
  for (const use of q.anchor ? anchorUse(q.anchor, after, q.line) : [])
    if (Math.abs(use.used) > use.limit / 2)
      out.push(
        `With this, corrections of ${use.text} add up to ${(100 * use.used).toFixed(1)} % from the last qualified recipe, of ${Number((100 * use.limit).toPrecision(3))} % allowed before a person must look.`,
      );
  return out;
}
