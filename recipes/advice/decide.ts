/**
 * The advice: change, keep, measure, fault or out of reach, with its reasons. A pipeline of plain questions, the first that
 * answers wins: is something broken? has the last change been run? is there anything to stand on? is a better recipe worth
 * it? would one more reading change the answer? does the best reach the goal at all?
 */
import {
  type ChamberModel,
  chanceIn,
  type Lever,
  type Settings,
  type Suspicion,
  type TrackedRun,
  untold,
} from "../../calibration/index.ts";
import type { Chamber, Goal, Line } from "../line/line.ts";
import { anchorUse, bindingLimits, outside } from "../line/window.ts";
import type { Advice } from "../outlook.ts";
import { type Alarm, alarmsFrom } from "./alarms.ts";
import { cautionsFor } from "./cautions.ts";
import type { CellLight } from "./cell-light.ts";
import { chanceAt, type Expectation, expectation } from "./expectation.ts";
import { chanceOf, goalNames, isLight } from "./goal-region.ts";
import { tunedLevers } from "./levers.ts";
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
import { bestSettings } from "./search.ts";

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
  /** Runs measured since the last event that starts tuning, and since the last clean. */
  runsSinceEvent: readonly MeasuredRun[];
  runsSinceClean: readonly MeasuredRun[];
  record: readonly TrackedRun[];
  suspicions: readonly Suspicion[];
  overridden: ReadonlySet<string>;
  openChange: { change: string; state: "adopted" | "entered"; after: Settings; runsSince: number } | null;
  awaitingReadings: number;
  forMode: Mode | null;
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
const worthwhile: Record<Mode, number> = { tuning: 0.03, production: 0.05 };
/** Tuning is done at this share of the chance a perfectly known chamber would have. */
const doneShare = 0.9;

export function decide(q: Question): Answer {
  const context = { line: q.line, goal: q.goal, light: q.light, sites: q.sites };
  const now = expectation(q.model, q.before, context);
  const best = search(q);
  const moved = [...best.settings].some(([name, value]) => q.before.get(name) !== value);
  const then = moved ? expectation(q.model, best.settings, context) : now;
  const attainable = attainableChance(q, then);
  const lastRead = q.runsSinceEvent.at(-1) ?? q.runsSinceClean.at(-1);
  const hit = lastRead ? measuredInGoal(lastRead, q.goal) === true : false;
  const done = hit && now.chanceJudged >= doneShare * attainable;
  const mode = q.forMode ?? modeOf(q.runsSinceEvent, q.goal, done);
  const alarms = alarmsFrom(q.suspicions, q.overridden);
  const because = opening(q, now);
  const finish = (advice: Advice, after: Settings, more: string[]): Answer => {
    const same = after === q.before;
    return {
      advice,
      mode,
      before: q.before,
      after,
      now,
      ahead: same ? now : then,
      done,
      because: [...because, ...more],
      cannotTell: [
        ...new Set([...now.cannotTell, ...then.cannotTell, ...untold(q.model, q.levers).map((u) => u.sentence)]),
      ],
      alarms,
      cautions: cautionsFor(q.chamber, q.before, after),
    };
  };

  const certain = alarms.filter((a) => a.certain);
  if (certain.length > 0)
    return finish(
      "fault",
      q.before,
      certain.flatMap((a) => [a.sentence, `First checks: ${a.checks.join(" ")}`]),
    );
  const adopted = q.openChange?.state === "adopted" ? q.openChange : null;
  if (adopted && [...best.settings].every(([name, value]) => adopted.after.get(name) === value))
    return finish("keep", q.before, [
      `Change ${adopted.change} already asks for the best settings known: enter it at the tool (or undo it).`,
    ]);
  if (adopted) because.push(`Change ${adopted.change} is adopted but not entered: adopting another one supersedes it.`);
  if (q.openChange?.state === "entered" && q.openChange.runsSince === 0)
    return finish("measure", q.before, [
      `Change ${q.openChange.change} was entered and no run has been measured since: run and measure it first.`,
    ]);
  if (alarms.length > 0)
    return finish("measure", q.before, [
      ...alarms.map((a) => a.sentence),
      "One more run as it is decides between a fault, a bad measurement and an ordinary offset.",
    ]);
  if (q.model.ownReadings === 0 && q.model.context.sisters.length === 0)
    return finish("measure", q.before, [
      `${q.chamber.name} has no measured run and no sisters: run the recipe as it is and measure it.`,
    ]);

  const lossNow = filmLoss(q.model.quick(q.before), q.goal, q.light);
  const gain = lossNow - filmLoss(q.model.quick(best.settings), q.goal, q.light);
  const outsideNow = outside(q.before, q.chamber, q.line);
  const reached = reaches(q, then);
  const better = then.chanceJudged - now.chanceJudged;

  if (!best.inside)
    return finish("out_of_reach", q.before, [
      "No settings inside the qualified window were found.",
      ...outsideNow.map((f) => f.sentence),
    ]);
  if (outsideNow.length === 0 && reached) {
    const doubt = openDoubt(q);
    if (doubt) return finish("measure", q.before, [doubt]);
    if (!moved || gain <= deadBand[mode] || better < worthwhile[mode])
      return finish("keep", q.before, keepReasons(q, now, then, best.settings, mode));
  }
  const anchor = q.anchor ? anchorUse(q.anchor, best.settings, q.line).filter((use) => use.past) : [];
  if (anchor.length > 0 && !q.overridden.has("past_anchor")) {
    const past: Alarm = {
      name: "past_anchor",
      certain: true,
      sentence: `past_anchor: ${anchor.map((a) => a.sentence).join(" ")}`,
      checks: [
        "Look for a slow leak, a drifting controller or a drifting gauge before absorbing more.",
        "If the film is right as it is, requalify the recipe and state it with `record recipe`.",
      ],
    };
    alarms.push(past);
    return finish("fault", q.before, [past.sentence, `First checks: ${past.checks.join(" ")}`]);
  }
  if (!reached)
    return finish("out_of_reach", best.settings, [
      `Nothing inside the window reaches the goal: the nearest point has ${missWords(then.film, q.goal).join(" and ") || "the reflectance goal unmet"}, a chance of ${asPercent(then.chanceJudged)}.`,
      ...bindingLimits(best.settings, q.chamber, q.line).map((f) => f.sentence),
    ]);
  return finish(
    "change",
    best.settings,
    changeReasons(
      q,
      best.settings,
      then,
      attainable,
      outsideNow.map((f) => f.sentence),
    ),
  );
}

/** What one more moved lever must gain, in loss: a tenth of a tolerance squared is 0.01. */
const perLever = 0.02;

/**
 * The fewest levers that do: time alone, then with one gas, then with both; power, pressure and the rest only when those
 * do not bring the film inside. A bigger set must gain more than the price of its levers.
 */
function search(q: Question) {
  const levers = tunedLevers(q.chamber).filter((l) => q.before.has(l.name));
  const context = { model: q.model, line: q.line, chamber: q.chamber, goal: q.goal, light: q.light, before: q.before };
  const gases = levers.filter((l) => !l.reserve && l.setting.meaning !== "time" && l.setting.meaning !== "belt_speed");
  const time = levers.filter((l) => !l.reserve && !gases.includes(l));
  const sets = [time, ...gases.map((g) => [...time, g]), ...(gases.length > 1 ? [[...time, ...gases]] : [])].filter(
    (s) => s.length > 0,
  );
  let best: (ReturnType<typeof bestSettings> & { priced: number }) | null = null;
  for (const set of sets) {
    const found = bestSettings({ ...context, levers: set });
    const gasesMoved = gases.filter((g) => found.settings.get(g.name) !== q.before.get(g.name)).length;
    const priced = found.loss + perLever * gasesMoved;
    if (!best || priced < best.priced) best = { ...found, priced };
  }
  const few = best ?? { ...bestSettings({ ...context, levers }), priced: 0 };
  if (levers.every((l) => !l.reserve)) return few;
  const film = q.model.quick(few.settings);
  return few.inside && filmInside(q, film.index, Math.exp(film.lnThickness))
    ? few
    : bestSettings({ ...context, levers });
}

const filmInside = (q: Question, index: number, thicknessNm: number): boolean =>
  (!q.goal.index || Math.abs(index - q.goal.index.value) <= q.goal.index.within) &&
  (!q.goal.thicknessNm || Math.abs(thicknessNm - q.goal.thicknessNm.value) <= q.goal.thicknessNm.within);

/** Does the mean film of an expectation meet every judged goal? */
function reaches(q: Question, e: Expectation): boolean {
  if (!filmInside(q, e.film.index, e.film.thicknessNm)) return false;
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
  if (!filmInside(q, expected.index, expected.thicknessNm) || filmInside(q, read.index, read.thicknessNm)) return null;
  return `The last reading (entry ${last.entry}: index ${read.index.toFixed(3)}, ${read.thicknessNm.toFixed(1)} nm) is out of goal where index ${expected.index.toFixed(3)}, ${expected.thicknessNm.toFixed(1)} nm was expected: a bad measurement with ${asPercent(last.suspect)} probability, a step nobody logged with ${asPercent(last.step)}. Measure that wafer again, or run once more as it is.`;
}

/** A reading left aside as bad is said, so that nobody wonders why it moved nothing. */
function leftAside(q: Question): string | null {
  const last = q.record.at(-1);
  if (!last || last.suspect <= undecided[1] - last.step) return null;
  return `The last reading (entry ${last.entry}) is a bad measurement with ${asPercent(last.suspect)} probability and is left aside: a wrong wafer, swapped rows or a slip of units?`;
}

function opening(q: Question, now: Expectation): string[] {
  const out: string[] = [];
  const cycle = q.runsSinceClean.length > 0 && q.model.log.events.some((e) => e.kind === "clean");
  const read = readSentence(q.runsSinceClean.length ? q.runsSinceClean : q.runsSinceEvent, q.goal, cycle);
  if (read) out.push(read);
  if (!q.stated)
    out.push("No recipe was ever stated for this chamber: the settings of its latest run are taken as in force.");
  out.push(expectSentence("At the recipe in force", now, q.light));
  const aside = leftAside(q);
  if (aside) out.push(aside);
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

function changeReasons(
  q: Question,
  after: Settings,
  then: Expectation,
  attainable: number,
  outsideNow: string[],
): string[] {
  const out = [...outsideNow, `Proposed: ${moveWords(q.chamber, q.before, after).join(", ")}.`];
  out.push(...effectSentences(q.model, q.chamber, q.before, after));
  out.push(expectSentence("With it", then, q.light));
  if (then.chanceJudged < 0.5)
    out.push(
      "This is an exploratory run: the chance is under one half, and its reading is what makes the next proposal sure.",
    );
  if (attainable - then.chanceJudged > 0.05)
    out.push(
      `A chamber known perfectly would reach ${asPercent(attainable)}; the rest is what is not yet known of ${q.chamber.name}.`,
    );
  const timeOnly = timeAlone(q, after);
  if (timeOnly) out.push(timeOnly);
  out.push(...bindingLimits(after, q.chamber, q.line).map((f) => f.sentence));
  return out;
}

/** The runner-up an engineer asks about first: what if only the time is moved? */
function timeAlone(q: Question, proposed: Settings): string | null {
  const time = tunedLevers(q.chamber).filter((l) => l.setting.meaning === "time" || l.setting.meaning === "belt_speed");
  if (time.length === 0) return null;
  const best = bestSettings({
    model: q.model,
    line: q.line,
    chamber: q.chamber,
    goal: q.goal,
    light: q.light,
    before: q.before,
    levers: time,
  });
  if (!best.inside) return null;
  const words = moveWords(q.chamber, q.before, best.settings);
  const same = [...best.settings].every(([name, value]) => proposed.get(name) === value);
  if (words.length === 0 || same) return null;
  return `Runner-up: ${words.join(", ")} alone has a chance of ${asPercent(chanceAt(q.model, best.settings, q))}.`;
}
