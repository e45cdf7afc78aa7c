/**
 * Holds the state, runs the reducer, hands effects on, and tells the painter when to draw: at once when it has been quiet,
 * else at most thirty times a second. Of several what-if questions waiting only the newest is asked.
 */
import { reduce } from "./reduce.ts";
import type { Effect, Event, State } from "./state.ts";

/** Milliseconds between paints: thirty a second. */
const pace = 33;

/** What the store needs of the world; a test brings its own. */
export interface Clock {
  now(): number;
  after(milliseconds: number, call: () => void): void;
}

export const realClock: Clock = {
  now: () => performance.now(),
  after: (milliseconds, call) => {
    setTimeout(call, milliseconds);
  },
};

export class Store {
  private state: State;
  private readonly listeners = new Set<() => void>();
  private lastPaint = Number.NEGATIVE_INFINITY;
  private paintWaits = false;
  private question: Effect | null = null;
  private readonly perform: (effect: Effect) => void;
  private readonly clock: Clock;

  constructor(state: State, perform: (effect: Effect) => void, clock: Clock = realClock) {
    this.state = state;
    this.perform = perform;
    this.clock = clock;
  }

  /** The state last painted, or to be painted now. */
  readonly read = (): State => this.state;

  readonly subscribe = (listener: () => void): (() => void) => {
    this.listeners.add(listener);
    return () => this.listeners.delete(listener);
  };

  readonly dispatch = (event: Event): void => {
    const { state, effects } = reduce(this.state, event);
    const changed = state !== this.state;
    this.state = state;
    for (const effect of effects) {
      if (effect.do === "look") this.ask(effect);
      else this.perform(effect);
    }
    if (changed) this.paintSoon();
  };

  /** A what-if is answered in the next turn; keys that arrived together are counted first. */
  private ask(question: Effect): void {
    const waiting = this.question !== null;
    this.question = question;
    if (waiting) return;
    this.clock.after(0, () => {
      const asked = this.question;
      this.question = null;
      if (asked !== null) this.perform(asked);
    });
  }

  private paintSoon(): void {
    if (this.paintWaits) return;
    const wait = this.lastPaint + pace - this.clock.now();
    // A question just asked is answered before the first paint, so that the numbers move with the setting.
    if (wait <= 0 && this.question === null) {
      this.paint();
      return;
    }
    this.paintWaits = true;
    this.clock.after(Math.max(0, wait), () => {
      this.paintWaits = false;
      this.paint();
    });
  }

  private paint(): void {
    this.lastPaint = this.clock.now();
    for (const listener of this.listeners) listener();
  }
}
