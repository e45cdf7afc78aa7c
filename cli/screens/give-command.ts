/**
 * What each command does on the line and chamber screens, once it is known that it may be given.
 */
import type { CommandId } from "../keys.ts";
import { openChange, whyNot } from "./available.ts";
import { helpLines } from "./help.ts";
import { nudge, tryDraft } from "./reduce-value.ts";
import { emptyForm } from "./run-form.ts";
import {
  type ChamberState,
  chamberInHand,
  chambersShown,
  type Effect,
  type Layer,
  pictures,
  placeOf,
  roomOf,
  type State,
  type Step,
} from "./state.ts";
import { emptyField } from "./text-field.ts";

const step = (state: State, ...effects: Effect[]): Step => ({ state, effects });
/** The settings to type in, large enough to be read at the tool. */
export function sheetLayer(change: string, chamber: string, lines: readonly string[]): Layer {
  return { kind: "reading", sheet: true, title: `${change}: type in at ${chamber}`, lines, scroll: 0 };
}

const over = (state: State, layer: Layer): Step => step({ ...state, layers: [...state.layers, layer] });

export function giveCommand(state: State, id: CommandId): Step {
  const name = chamberInHand(state) ?? "";
  const change = openChange(state);
  const { chamber } = state;
  switch (id) {
    case "up":
      return move(state, -1);
    case "down":
      return move(state, 1);
    case "first":
    case "page-up":
      return move(state, id === "first" ? Number.NEGATIVE_INFINITY : -5);
    case "last":
    case "page-down":
      return move(state, id === "last" ? Number.POSITIVE_INFINITY : 5);
    case "open":
      return step(state, { do: "open", chamber: name });
    case "back":
      return step({ ...state, screen: "line" });
    case "leave":
      return step(state, { do: "leave" });
    case "reread":
      return step(state, { do: "reread" });
    case "filter":
      return step({ ...state, filtering: true, filter: state.filter ?? emptyField });
    case "help":
      return over(state, {
        kind: "reading",
        title: "keys",
        lines: helpLines(placeOf(state), (one) => whyNot(state, one)),
        scroll: 0,
      });
    case "commands":
      return over(state, { kind: "commands", field: emptyField, cursor: 0 });
    case "messages": {
      const lines = state.log.length === 0 ? ["nothing was said yet"] : state.log.map((message) => message.text);
      return over(state, { kind: "reading", title: "messages, oldest first", lines, scroll: 0 });
    }
    case "learned": {
      if (chamber === null) return step(state);
      const { alarms, learned, cannotTell } = chamber.view;
      const part = (title: string, lines: readonly string[]) =>
        lines.length === 0 ? [] : [title, ...lines.map((line) => `-  ${line}`), ""];
      const lines = [...part("ALARMS", alarms), ...part("learned", learned), ...part("cannot tell", cannotTell)];
      const nothing = ["nothing is learned yet: log runs"];
      const title = `${name}: what the model knows`;
      return over(state, { kind: "reading", title, lines: lines.length === 0 ? nothing : lines, scroll: 0 });
    }
    case "less":
      return nudge(state, -1);
    case "more":
      return nudge(state, 1);
    case "much-less":
      return nudge(state, -10);
    case "much-more":
      return nudge(state, 10);
    case "reset":
      return chamber === null
        ? step(state)
        : tryDraft(state, chamber, chamber.view.now.settings, [...chamber.past, chamber.draft]);
    case "step-back": {
      const before = chamber?.past.at(-1);
      if (chamber === null || before === undefined) return step(state);
      return tryDraft(state, chamber, before, chamber.past.slice(0, -1));
    }
    case "view":
      return step(
        chamber === null ? state : { ...state, chamber: { ...chamber, picture: pictureAfter(state, chamber) } },
      );
    case "next-chamber":
    case "previous-chamber":
      return step(state, { do: "open", chamber: neighbour(state, name, id === "next-chamber" ? 1 : -1) });
    case "propose":
      return step(
        { ...state, busy: `asking for a proposal for ${name}` },
        ...(state.screen === "line" ? [{ do: "open", chamber: name } as const] : []),
        { do: "propose", chamber: name },
      );
    case "adopt":
      return adopt(state);
    case "sheet": {
      if (change === null) return step(state);
      return over(state, sheetLayer(change.change, name, change.sheet));
    }
    case "enter-change":
      if (change === null) return step(state);
      return step(
        { ...state, layers: [...state.layers, { kind: "entering", chamber: name, change, readBack: new Map() }] },
        // The settings, for a value that reads back differently.
        ...(state.screen === "line" ? [{ do: "peek", chamber: name } as const] : []),
      );
    case "log-run":
      return step(
        { ...state, layers: [...state.layers, { kind: "form", chamber: name, form: emptyForm }] },
        // From the line screen the expectation beside the fields has to be fetched first.
        ...(state.screen === "line" ? [{ do: "peek", chamber: name } as const] : []),
      );
    case "clean":
      return over(state, {
        kind: "confirm",
        question: `record that ${name} was cleaned just now?`,
        onYes: { do: "clean", chamber: name },
      });
    case "close-change":
      if (change === null) return step(state);
      return over(state, {
        kind: "confirm",
        question: `close ${change.change} on ${change.runsSince === 1 ? "one run" : `${change.runsSince} runs`} since?`,
        onYes: { do: "close", chamber: name, change: change.change },
      });
    case "undo-change":
      if (change === null) return step(state);
      return over(state, {
        kind: "reason",
        title: `take back ${change.change}`,
        about: ["A new change to the settings from before is opened; nothing is deleted."],
        field: emptyField,
        onYes: { do: "undo", chamber: name, change: change.change },
      });
    default:
      return step(state);
  }
}

/** Asks for the reason; a nearest point that misses the goal asks for the chamber's name as well. */
export function adopt(state: State): Step {
  const layer = state.layers.findLast((one) => one.kind === "proposal");
  const proposal = layer?.kind === "proposal" ? layer.proposal : (state.chamber?.view.proposal ?? null);
  const name = layer?.kind === "proposal" ? layer.chamber : chamberInHand(state);
  if (proposal === null || proposal.proposal === null || name === null) return step(state);
  const reach = proposal.advice === "out_of_reach";
  const about = [
    `Adopts ${proposal.proposal} as it was proposed, not a what-if.`,
    ...(reach ? ["It is the nearest point inside the window and does not reach the goal."] : []),
    "It counts only once it is typed in at the tool. Site rules and change control come first.",
  ];
  return over(state, {
    kind: "reason",
    title: `adopt ${proposal.proposal} for ${name}`,
    about,
    field: emptyField,
    onYes: { do: "adopt", chamber: name, proposal: proposal.proposal, nameFirst: reach },
  });
}

function move(state: State, by: number): Step {
  if (state.screen === "chamber") {
    const { chamber } = state;
    if (chamber === null) return step(state);
    const last = chamber.view.settings.length - 1;
    const cursor = Math.min(Math.max(0, last), Math.max(0, chamber.cursor + by));
    return step({ ...state, chamber: { ...chamber, cursor } });
  }
  const shown = chambersShown(state);
  if (shown.length === 0) return step(state);
  const at = shown.findIndex((row) => row.chamber === state.chosen);
  const next = Math.min(shown.length - 1, Math.max(0, at + by));
  return step({ ...state, chosen: shown[next].chamber });
}

function neighbour(state: State, name: string, by: number): string {
  const shown = chambersShown(state);
  const at = shown.findIndex((row) => row.chamber === name);
  return shown[(at + by + shown.length) % shown.length]?.chamber ?? name;
}

/** Where the film plane always shows, the turn goes through the others only. */
function pictureAfter(state: State, chamber: ChamberState): ChamberState["picture"] {
  const turn = roomOf(state.columns, state.rows) === "small" ? pictures : pictures.filter((one) => one !== "plane");
  const at = chamber.picture === "plane" ? turn.indexOf("plane") : turn.indexOf(chamber.picture);
  return turn[(Math.max(0, at) + 1) % turn.length];
}
