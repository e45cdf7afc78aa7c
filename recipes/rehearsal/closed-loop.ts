/**
 * The closed loop: one practice brings one chamber to goal and then keeps it there. Tuning runs until a reading lies in
 * goal (20 at most); then production, scored on the true film. Cleans come at fixed numbers of depositions and every film
 * is read whether anybody looks or not, so that weather, cleans and readings are the same for every practice.
 */

import { sameSettings, usable } from "./practices/dials.ts";
import type { Practice } from "./practices/practice.ts";
import type { Scenario } from "./scenarios.ts";
import { type Brief, inGoal, type Reading, type Stage } from "./stage.ts";
import type { ChamberSettings } from "./worlds.ts";

export const MOST_RUNS = 20;
/** A film expected, scatter aside, within half of every tolerance has nothing wrong with it. */
const NOTHING_WRONG = 0.5;

/** A chance that was stated for a deposition, and whether its true film was in goal. */
export interface Stated {
  chance: number;
  hit: boolean;
}

/** What one practice did in one world. */
export interface Played {
  /** Runs until a reading lay in goal; MOST_RUNS when none did. Null where there was nothing to tune. */
  runs: number | null;
  reached: boolean;
  /** The reading that ended the tuning was in goal, the film was not. */
  falseDone: boolean;
  /** Runs until the practice itself said that tuning is done; null where it never did or never says. */
  saidDone: number | null;
  /** True film in goal, over production. */
  later: { made: number; hits: number };
  /** Runs measured, over tuning and production: those due, and those that were asked for. */
  measured: number;
  changes: number;
  /** Changes made while there was nothing wrong, and the depositions before which there was nothing wrong. */
  idle: { changes: number; chances: number };
  stated: Stated[];
  /** How often each advice was given, over tuning and production. */
  advice: Record<string, number>;
  /** Stops without anything broken. */
  falseStops: number;
  /** Measured runs after the leak until it was named; null where it was not, or there was none. */
  leakNamedAfter: number | null;
  leaked: boolean;
  /** Did its first answer say what the history cannot tell? Null where there is nothing of the kind, or it says nothing. */
  toldUntold: boolean | null;
}

const fresh = (): Played => ({
  runs: null,
  reached: false,
  falseDone: false,
  saidDone: null,
  later: { made: 0, hits: 0 },
  measured: 0,
  changes: 0,
  idle: { changes: 0, chances: 0 },
  stated: [],
  advice: {},
  falseStops: 0,
  leakNamedAfter: null,
  leaked: false,
  toldUntold: null,
});

const measuredHit = (brief: Brief, reading: Reading): boolean => {
  const film = usable(brief, reading);
  return film !== null && inGoal(brief, film);
};

/** Plays one practice on one stage. The same stage and practice give the same result, in any order. */
export function playLoop(stage: Stage, practice: Practice, scenario: Scenario): Played {
  const { brief } = stage;
  const chamber = stage.chamber();
  let sinceClean = chamber.sinceClean;
  const hand = practice.begin(brief, {
    film: (settings) => (sinceClean === 0 ? chamber.usual(settings) : chamber.expected(settings)),
  });
  const played = fresh();
  let inForce = brief.start;
  let cleans = 0;
  let deposited = 0;
  let leaking = false;
  let measuredSinceLeak = 0;

  /** Asks, notes what is said of the run to come, and lets a person look where it stops. */
  function ask(): ChamberSettings {
    for (let asked = 0; ; asked++) {
      const settings = hand.next();
      const said = hand.says?.();
      if (!said) return settings;
      if (scenario.untold !== undefined && played.toldUntold === null)
        played.toldUntold = said.cannotTell.some((sentence) => sentence.includes(scenario.untold ?? ""));
      if (said.done && played.saidDone === null) played.saidDone = deposited;
      played.advice[said.advice] = (played.advice[said.advice] ?? 0) + 1;
      if (said.advice !== "fault" || asked > 0) return settings;
      // A person looks: what is broken is found and mended, and otherwise the alarm is overruled for some runs.
      if (leaking) {
        played.leakNamedAfter = measuredSinceLeak;
        chamber.mend();
        leaking = false;
        hand.looked?.(true);
      } else {
        played.falseStops++;
        hand.looked?.(false);
      }
    }
  }

  function deposit(due: boolean, tuning: boolean) {
    const settings = ask();
    const said = hand.says?.();
    const chance = said?.chance ?? null;
    // Who says that one more run should be measured gets it measured.
    const look = due || said?.advice === "measure";
    if (look) played.measured++;
    const moved = !sameSettings(settings, inForce);
    inForce = settings;
    const { film, reading } = chamber.run(settings);
    deposited++;
    sinceClean = chamber.sinceClean;
    if (chance !== null) played.stated.push({ chance, hit: inGoal(brief, film) });
    if (look && leaking) measuredSinceLeak++;
    hand.saw({ settings, reading: look ? reading : null, tuning });
    return { settings, film, reading, moved };
  }

  if (scenario.tuning) {
    for (let run = 1; run <= MOST_RUNS && !played.reached; run++) {
      const { film, reading } = deposit(true, true);
      played.runs = run;
      if (hand.planned?.() || !measuredHit(brief, reading)) continue;
      played.reached = true;
      played.falseDone = !inGoal(brief, film);
    }
  }

  let firstAfterClean = false;
  for (let made = 0; made < scenario.production; made++) {
    if (sinceClean >= scenario.cycle) {
      const { written } = chamber.clean();
      sinceClean = 0;
      if (written) hand.cleaned();
      firstAfterClean = written;
      if (scenario.leakAtClean === cleans) {
        chamber.leak();
        leaking = true;
        played.leaked = true;
      }
      cleans++;
    }
    const { goal, tolerance } = brief;
    const expected = sinceClean === 0 ? chamber.usual(inForce) : chamber.expected(inForce);
    const half = { index: NOTHING_WRONG * tolerance.index, thicknessNm: NOTHING_WRONG * tolerance.thicknessNm };
    const nothingWrong = !leaking && inGoal({ goal, tolerance: half }, expected);
    const look = made % scenario.measuredEvery === 0 || firstAfterClean;
    firstAfterClean = false;
    const { film, moved } = deposit(look, false);
    played.later.made++;
    if (inGoal(brief, film)) played.later.hits++;
    if (moved) played.changes++;
    if (nothingWrong) {
      played.idle.chances++;
      if (moved) played.idle.changes++;
    }
  }
  return played;
}
