/**
 * Saying something in the message line, and remembering that it was said.
 */
import type { Message, State } from "./state.ts";

/** Messages kept; more than anyone pages through. */
const most = 200;

export function say(state: State, tone: Message["tone"], text: string): State {
  const message = { tone, text };
  return { ...state, message, log: [...state.log, message].slice(-most) };
}
