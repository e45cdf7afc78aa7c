/**
 * Why a command cannot be given now, in a sentence: shown when its key is pressed, and used to mark it in the footer.
 * Null means that it can.
 */
import type { OpenChange } from "../../recipes/index.ts";
import type { CommandId } from "../keys.ts";
import { mustLook } from "./advice-words.ts";
import { chamberInHand, chambersShown, openChangeOf, type State } from "./state.ts";
import { sameSettings } from "./what-if.ts";

const writing: readonly CommandId[] = [
  "propose",
  "adopt",
  "enter-change",
  "log-run",
  "clean",
  "close-change",
  "undo-change",
];

export function whyNot(state: State, id: CommandId): string | null {
  if (state.busy !== null && (writing.includes(id) || id === "reread")) return `wait: ${state.busy}`;
  const name = chamberInHand(state);
  const needsChamber = writing.includes(id) || id === "open" || id === "sheet";
  if (needsChamber && name === null) return "no chamber is chosen";
  switch (id) {
    case "adopt":
      return whyNotAdopt(state);
    case "enter-change":
      return whyNotEnter(name as string, openChange(state));
    case "close-change":
      return whyNotClose(name as string, openChange(state));
    case "undo-change":
    case "sheet": {
      if (openChange(state) !== null) return null;
      return id === "sheet"
        ? `${name} has no open change, so nothing waits to be typed in`
        : `${name} has no open change; a closed one is taken back with: coatwright undo CHANGE --reason TEXT`;
    }
    case "reset":
      return draftIsNow(state) ? "no what-if to drop: the settings are those in force" : null;
    case "step-back":
      return state.chamber === null || state.chamber.past.length === 0 ? "no what-if step to take back" : null;
    case "next-chamber":
    case "previous-chamber":
      return chambersShown(state).length < 2 ? "there is no other chamber" : null;
    default:
      return null;
  }
}

function draftIsNow(state: State): boolean {
  return state.chamber === null || sameSettings(state.chamber.draft, state.chamber.view.now.settings);
}

/** The open change of the chamber in hand, from whichever screen shows it. */
export function openChange(state: State): OpenChange | null {
  const name = chamberInHand(state);
  return name === null ? null : openChangeOf(state, name);
}

function whyNotAdopt(state: State): string | null {
  const layer = state.layers.findLast((one) => one.kind === "proposal");
  const proposal = layer?.kind === "proposal" ? layer.proposal : (state.chamber?.view.proposal ?? null);
  if (proposal === null) return "nothing to adopt yet: p asks for a proposal";
  switch (proposal.advice) {
    case "keep":
      return "nothing to adopt: the advice is to keep the settings";
    case "measure":
      return "nothing to adopt: the advice is to measure once more before any change";
    case "fault":
      if (mustLook(proposal.alarms)) return "not to be corrected further before a person has looked; p says why";
      return "not to be tuned away: look for the fault first; the alarm names the checks";
    default:
  }
  return proposal.proposal === null ? "this proposal is not in the book yet: p asks for it" : null;
}

function whyNotEnter(name: string, change: OpenChange | null): string | null {
  if (change === null) return `${name} has no open change to enter`;
  if (change.state === "entered") return `${change.change} is entered already; it waits for runs, then c closes it`;
  return null;
}

function whyNotClose(name: string, change: OpenChange | null): string | null {
  if (change === null) return `${name} has no open change to close`;
  if (change.state === "adopted") return `${change.change} is not entered yet: type the settings in, then e`;
  if (change.runsSince === 0) return `no run since ${change.change} was entered: l logs one`;
  return null;
}
