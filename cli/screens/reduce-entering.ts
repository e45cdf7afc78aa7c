/**
 * Saying that a change has been typed in: yes, no, or with a value that reads back differently from the one adopted,
 * which is then what is in force.
 */
import { Refusal } from "../../engine/index.ts";
import type { Setting } from "../../recipes/index.ts";
import type { CommandId } from "../keys.ts";
import { settingText } from "../text/numbers.ts";
import type { Input } from "./keyboard.ts";
import { say } from "./say.ts";
import type { Layer, State, Step } from "./state.ts";
import { emptyField, typed } from "./text-field.ts";
import { inWords, settingTyped } from "./what-if.ts";

type Entering = Extract<Layer, { kind: "entering" }>;
type ReadBack = Extract<Layer, { kind: "read-back" }>;

const still = (state: State): Step => ({ state, effects: [] });
const under = (state: State) => state.layers.slice(0, -1);

/** The settings of a change in declared order; empty while the chamber is not read yet. */
export function settingsToRead(state: State, layer: Entering | ReadBack): readonly Setting[] {
  const { chamber } = state;
  if (chamber === null || chamber.view.chamber !== layer.chamber) return [];
  return chamber.view.settings.filter((setting) => layer.change.after.has(setting.name));
}

/** "835 sccm": a value of a setting with its unit. */
export function valueText(setting: Setting, value: number | undefined): string {
  return `${settingText(setting, value)} ${setting.unit}`.trim();
}

/** What is asked: with each value that differs, beside the one adopted. */
export function enteringQuestion(state: State, layer: Entering): string {
  const { change } = layer.change;
  if (layer.readBack.size === 0)
    return `${change}: typed in at ${layer.chamber}, and every value reads back as adopted?`;
  const differing = settingsToRead(state, layer)
    .filter((setting) => layer.readBack.has(setting.name))
    .map((setting) => {
      const adopted = valueText(setting, layer.change.after.get(setting.name));
      return `${setting.name} ${valueText(setting, layer.readBack.get(setting.name))} instead of ${adopted}`;
    });
  return `${change}: typed in at ${layer.chamber} with ${differing.join(", ")}; all others as adopted?`;
}

export function reduceEntering(state: State, top: Entering, command: CommandId | null): Step {
  const { change } = top.change;
  switch (command) {
    case "yes": {
      const differing = top.readBack.size === 0 ? {} : { readBack: top.readBack };
      return {
        state: { ...state, layers: under(state), busy: "writing to the book" },
        effects: [{ do: "enter", chamber: top.chamber, change, ...differing }],
      };
    }
    case "no": {
      const text = `${change} is not entered; when it is typed in at ${top.chamber}: e again, and d there for a value that differs`;
      return still(say({ ...state, layers: under(state) }, "plain", text));
    }
    case "differs": {
      const settings = settingsToRead(state, top);
      if (settings.length === 0) return still(say(state, "watch", `the settings of ${top.chamber} are not read yet`));
      // The settings that the change moves are the likeliest to be mistyped.
      const moved = settings.findIndex((one) => top.change.before.get(one.name) !== top.change.after.get(one.name));
      const layer: Layer = { ...top, kind: "read-back", at: Math.max(0, moved), field: emptyField };
      return still({ ...state, layers: [...under(state), layer] });
    }
    default:
      return still(say(state, "plain", "y enters it, d when one value differs, n leaves everything as it is"));
  }
}

export function reduceReadBack(state: State, top: ReadBack, input: Input, command: CommandId | null): Step {
  const settings = settingsToRead(state, top);
  const replace = (layer: Layer): State => ({ ...state, layers: [...under(state), layer] });
  const back = (readBack: ReadBack["readBack"]): State => replace({ ...top, kind: "entering", readBack });
  const goTo = (at: number) =>
    still(replace({ ...top, at: (at + settings.length) % settings.length, field: emptyField }));
  if (command === "back") return still(back(top.readBack));
  if (settings.length === 0) return still(state);
  if (command === "next-field") return goTo(top.at + 1);
  if (command === "previous-field") return goTo(top.at - 1);
  if (command === "accept") {
    const setting = settings[top.at];
    if (top.field.text.trim() === "")
      return still(say(state, "watch", `type what ${setting.name} reads, or esc goes back`));
    try {
      const value = settingTyped(setting, top.field.text);
      const adopted = top.change.after.get(setting.name);
      const readBack = new Map(top.readBack);
      if (settingText(setting, value) !== settingText(setting, adopted))
        return still(back(readBack.set(setting.name, value)));
      readBack.delete(setting.name);
      return still(say(back(readBack), "plain", `${setting.name} ${valueText(setting, value)} is what was adopted`));
    } catch (error) {
      if (!(error instanceof Refusal)) throw error;
      return still(say(state, "watch", inWords(error)));
    }
  }
  const field = typed(top.field, input);
  return still(field === null ? state : replace({ ...top, field }));
}
