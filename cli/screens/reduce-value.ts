/**
 * The what-if of the chamber screen: a value being typed, and every way a setting moves.
 */
import { Refusal } from "../../engine/index.ts";
import { commandFor } from "../keys.ts";
import type { Input } from "./keyboard.ts";
import { say } from "./say.ts";
import type { ChamberState, State, Step } from "./state.ts";
import { emptyField, typed } from "./text-field.ts";
import { inWords, nudged, sameSettings, settingTyped } from "./what-if.ts";

/** Drafts that can be stepped back through. */
const longestPast = 100;

/** A key or paste while a value is typed, or the first digit of one. */
export function reduceValue(state: State, input: Input): Step {
  const { chamber } = state;
  if (chamber === null) return { state, effects: [] };
  const command = input.kind === "key" ? commandFor("value", input.name) : null;
  if (command?.id === "back") return { state: withField(state, chamber, null), effects: [] };
  if (command?.id === "accept") return acceptValue(state, chamber);
  const field = typed(chamber.typing ?? emptyField, input);
  if (field === null) return { state, effects: [] };
  return { state: withField(state, chamber, field), effects: [] };
}

function withField(state: State, chamber: ChamberState, typing: ChamberState["typing"]): State {
  return { ...state, chamber: { ...chamber, typing } };
}

function acceptValue(state: State, chamber: ChamberState): Step {
  const setting = chamber.view.settings[chamber.cursor];
  if (setting === undefined || chamber.typing === null) return { state, effects: [] };
  if (chamber.typing.text.trim() === "") return { state: withField(state, chamber, null), effects: [] };
  try {
    const value = settingTyped(setting, chamber.typing.text);
    return tryValue(withField(state, chamber, null), setting.name, value);
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    return { state: say(state, "watch", inWords(error)), effects: [] };
  }
}

/** Moves the chosen setting by smallest steps. */
export function nudge(state: State, steps: number): Step {
  const { chamber } = state;
  const setting = chamber?.view.settings[chamber.cursor];
  if (chamber === null || setting === undefined) return { state, effects: [] };
  const value = chamber.draft.get(setting.name);
  if (value === undefined) return { state: say(state, "watch", `no value of ${setting.name} is known`), effects: [] };
  const next = nudged(setting, value, steps);
  if (next === value) {
    const end = steps > 0 ? "highest" : "lowest";
    return { state: say(state, "watch", `${setting.name} is at its ${end} here`), effects: [] };
  }
  return tryValue(state, setting.name, next);
}

/** One setting at a value, and the question what to expect of it. */
export function tryValue(state: State, name: string, value: number): Step {
  const { chamber } = state;
  if (chamber === null) return { state, effects: [] };
  const draft = new Map(chamber.draft).set(name, value);
  return tryDraft(state, chamber, draft, [...chamber.past, chamber.draft].slice(-longestPast));
}

/** Any draft; asks unless it is what is in force. The old answer stays on screen until the new one is there. */
export function tryDraft(
  state: State,
  chamber: ChamberState,
  draft: ReadonlyMap<string, number>,
  past: ChamberState["past"],
): Step {
  const isNow = sameSettings(draft, chamber.view.now.settings);
  const next = { ...state, chamber: { ...chamber, draft, past, after: isNow ? null : chamber.after } };
  return { state: next, effects: isNow ? [] : [{ do: "look", chamber: chamber.view.chamber, settings: draft }] };
}
