/**
 * What a practice of tuning is: somebody (a person with a rule, a controller, this program) who is told what the book
 * says and asked for the settings of the next deposition.
 */
import type { Film } from "../aim.ts";
import type { Brief, Logged, Reading } from "../stage.ts";
import type { ChamberSettings } from "../worlds.ts";

/** The truth, for the oracle alone: films without scatter, as far as they can be known before the next deposition. */
export interface Truth {
  film(settings: ChamberSettings): Film;
}

/** What a practice says of the deposition it asks for; only this program says anything. */
export interface Statement {
  /** Chance that the true film of the next deposition is in goal. */
  chance: number | null;
  advice: string;
  /** Does it take the chamber to be tuned, or in production? */
  mode: string;
  /** Does it say that tuning is finished? */
  done: boolean;
  /** Alarms that stop it, by name. */
  alarms: readonly string[];
  /** What it says that the history cannot tell. */
  cannotTell: readonly string[];
}

export interface Hand {
  /** Settings of the next deposition, typed to what the controllers take. */
  next(): ChamberSettings;
  /** A deposition was made; `reading` is null when nobody measured it. `tuning`: before the goal was first met. */
  saw(run: { settings: ChamberSettings; reading: Reading | null; tuning: boolean }): void;
  /** A clean was written down. */
  cleaned(): void;
  /** True while a fixed plan of runs is going on, which a lucky hit does not end. */
  planned?(): boolean;
  says?(): Statement;
  /** A person looked after an alarm that stops: found something and mended it, or found nothing. */
  looked?(found: boolean): void;
}

export interface Practice {
  /** One word for the command line and the table. */
  name: string;
  title: string;
  begin(brief: Brief, truth: Truth): Hand;
}

/** Tells a hand what the chamber's book already holds; for those that learn from it. Returns the hand. */
export function hearing<H extends Hand>(hand: H, history: readonly Logged[]): H {
  for (const event of history) {
    if (event.kind === "clean") hand.cleaned();
    else hand.saw({ settings: event.settings, reading: event.reading, tuning: false });
  }
  return hand;
}
