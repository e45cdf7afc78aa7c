/**
 * Keys while something lies over a screen: a proposal, a page to read, a question, a form, the command list.
 */
import { type CommandId, commandFor } from "../keys.ts";
import { whyNot } from "./available.ts";
import { bodyHeightOf } from "./compose.ts";
import { notHere } from "./elsewhere.ts";
import { adopt, giveCommand } from "./give-command.ts";
import { helpLines, matching } from "./help.ts";
import type { Input } from "./keyboard.ts";
import { farthest, pageRows } from "./panes/pages.ts";
import { reduceEntering, reduceReadBack } from "./reduce-entering.ts";
import { runOf } from "./run-form.ts";
import { say } from "./say.ts";
import { type Effect, type Layer, placeOf, type State, type Step } from "./state.ts";
import { typed } from "./text-field.ts";

const still = (state: State): Step => ({ state, effects: [] });
type Of<K extends Layer["kind"]> = Extract<Layer, { kind: K }>;

export function reduceLayer(state: State, input: Input): Step {
  const top = state.layers.at(-1) as Layer;
  const command = input.kind === "key" ? (commandFor(placeOf(state), input.name)?.id ?? null) : null;
  switch (top.kind) {
    case "proposal":
    case "reading":
      return reduceReading(state, top, command, input);
    case "confirm":
      return reduceConfirm(state, top, command);
    case "entering":
      return reduceEntering(state, top, command);
    case "read-back":
      return reduceReadBack(state, top, input, command);
    case "reason":
      return reduceReason(state, top, input, command);
    case "name":
      return reduceName(state, top, input, command);
    case "form":
      return reduceForm(state, top, input, command);
    case "commands":
      return reduceCommands(state, top, input, command);
  }
}

function replace(state: State, layer: Layer): State {
  return { ...state, layers: [...state.layers.slice(0, -1), layer] };
}

function drop(state: State): State {
  return { ...state, layers: state.layers.slice(0, -1) };
}

function send(state: State, effect: Effect, busy: string): Step {
  return { state: { ...state, busy }, effects: [effect] };
}

function reduceReading(
  state: State,
  top: Of<"proposal"> | Of<"reading">,
  command: CommandId | null,
  input: Input,
): Step {
  const scrolls: Partial<Record<CommandId, number>> = { up: -1, down: 1, "page-up": -10, "page-down": 10 };
  if (command === null) {
    const there = input.kind === "key" ? notHere(state, input.name) : null;
    return still(say(state, "plain", there ?? "that key does nothing here; q goes back"));
  }
  if (command === "first") return still(replace(state, { ...top, scroll: 0 }));
  const end = farthest(
    pageRows(state, top, state.columns, { colour: "none", ascii: false })?.length ?? 0,
    bodyHeightOf(state),
  );
  if (command === "last") return still(replace(state, { ...top, scroll: end }));
  const by = scrolls[command];
  if (by !== undefined) return still(replace(state, { ...top, scroll: Math.min(end, Math.max(0, top.scroll + by)) }));
  if (command === "back") return still(drop(state));
  if (command === "help")
    return still({
      ...state,
      layers: [
        ...state.layers,
        { kind: "reading", title: "keys", lines: helpLines("proposal", (id) => whyNot(state, id)), scroll: 0 },
      ],
    });
  if (command === "enter-change") {
    const reason = whyNot(state, "enter-change");
    return reason === null ? giveCommand(drop(state), "enter-change") : still(say(state, "watch", reason));
  }
  if (command === "adopt") {
    const reason = whyNot(state, "adopt");
    return reason === null ? adopt(state) : still(say(state, "watch", reason));
  }
  return still(state);
}

function reduceConfirm(state: State, top: Of<"confirm">, command: CommandId | null): Step {
  if (command === "yes") return send(drop(state), top.onYes, "writing to the book");
  if (command === "no") return still(say(drop(state), "plain", "left as it was"));
  return still(say(state, "plain", "y does it; n leaves everything as it is"));
}

function reduceReason(state: State, top: Of<"reason">, input: Input, command: CommandId | null): Step {
  if (command === "back") return still(say(drop(state), "plain", "left as it was"));
  if (command === "accept") {
    const reason = top.field.text.trim();
    if (reason === "") return still(say(state, "watch", "a reason is needed: whoever reads the book next will ask"));
    if (state.busy !== null) return still(say(state, "watch", `wait: ${state.busy}`));
    if (top.onYes.do === "undo") return send(state, { ...top.onYes, reason }, "writing to the book");
    const { chamber, proposal } = top.onYes;
    const effect: Effect = { do: "adopt", chamber, proposal, reason };
    if (!top.onYes.nameFirst) return send(state, effect, "writing to the book");
    const question = `This does not reach the goal. Type ${chamber} to adopt it all the same`;
    const layer: Layer = { kind: "name", question, expected: chamber, field: { text: "", at: 0 }, onYes: effect };
    return still({ ...state, layers: [...state.layers, layer] });
  }
  const field = typed(top.field, input);
  return still(field === null ? state : replace(state, { ...top, field }));
}

function reduceName(state: State, top: Of<"name">, input: Input, command: CommandId | null): Step {
  if (command === "back") return still(drop(state));
  if (command === "accept") {
    if (top.field.text.trim() !== top.expected)
      return still(say(state, "watch", `that is not ${top.expected}; esc goes back`));
    if (state.busy !== null) return still(say(state, "watch", `wait: ${state.busy}`));
    return send(state, top.onYes, "writing to the book");
  }
  // The point of typing a name is typing it.
  if (input.kind === "paste") return still(say(state, "plain", "type it, pasting does not count"));
  const field = typed(top.field, input);
  return still(field === null ? state : replace(state, { ...top, field }));
}

function reduceForm(state: State, top: Of<"form">, input: Input, command: CommandId | null): Step {
  const { form } = top;
  const last = form.fields.length - 1;
  const goTo = (at: number) =>
    still(replace(state, { ...top, form: { ...form, at: Math.min(last, Math.max(0, at)) } }));
  if (command === "back") return still(say(drop(state), "plain", "no run was logged"));
  if (command === "next-field") return goTo(form.at === last ? 0 : form.at + 1);
  if (command === "previous-field") return goTo(form.at === 0 ? last : form.at - 1);
  if (command === "accept") {
    if (form.at < last) return goTo(form.at + 1);
    const checked = runOf(form);
    if ("problem" in checked) {
      const there = replace(state, { ...top, form: { ...form, at: checked.at } });
      // What is wrong with a field stands under the fields already.
      return still(
        say(there, "watch", checked.marked ? "not logged yet: put the marked field right" : checked.problem),
      );
    }
    if (state.busy !== null) return still(say(state, "watch", `wait: ${state.busy}`));
    return send(state, { do: "log", chamber: top.chamber, run: checked.run }, "writing to the book");
  }
  const field = typed(form.fields[form.at], input);
  if (field === null) return still(state);
  const [a, b, c] = form.fields.map((one, i) => (i === form.at ? field : one));
  return still(replace(state, { ...top, form: { ...form, fields: [a, b, c] } }));
}

function reduceCommands(state: State, top: Of<"commands">, input: Input, command: CommandId | null): Step {
  const under = drop(state);
  const found = matching(placeOf(under), top.field.text);
  if (command === "back") return still(under);
  const key = input.kind === "key" ? input.name : null;
  // Letters are for the filter here, so only the arrows move.
  if (key === "up" || key === "down") {
    const cursor = Math.min(Math.max(0, found.length - 1), Math.max(0, top.cursor + (key === "up" ? -1 : 1)));
    return still(replace(state, { ...top, cursor }));
  }
  if (command === "accept") {
    const chosen = found[top.cursor];
    if (chosen === undefined) return still(say(state, "watch", "no command is called that"));
    const reason = whyNot(under, chosen.id);
    return reason === null ? giveCommand(under, chosen.id) : still(say(under, "watch", reason));
  }
  const field = typed(top.field, input);
  return still(field === null ? state : replace(state, { ...top, field, cursor: 0 }));
}
