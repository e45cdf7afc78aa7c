/**
 * One sentence under the screen on what to press next, from how things stand.
 */
import { due } from "../text/line-words.ts";
import { whyNot } from "./available.ts";
import { placeOf, type State } from "./state.ts";

export function hintFor(state: State): string {
  switch (placeOf(state)) {
    case "line":
      return lineHint(state);
    case "chamber":
      return chamberHint(state);
    case "value":
      return "enter takes the value, esc gives it up; a unit may follow";
    case "filter":
      return "type part of a name or need; enter keeps it, esc drops it";
    case "proposal":
      return whyNot(state, "adopt") === null
        ? "a adopts it, with a reason; q goes back to try settings"
        : "nothing to adopt; q goes back";
    case "form":
      return "enter: next field, in the last one log the run; esc gives up";
    case "reason":
      return "say why, in a sentence; enter writes it, esc leaves it";
    case "name":
      return "enter when the name is typed; esc goes back";
    case "confirm":
      return "only y does it";
    case "entering":
      return "y enters it; d: a value reads back differently; n: not yet";
    case "read-back":
      return "up down choose the setting; enter takes the value; esc back";
    case "commands":
      return "type part of a name, arrows choose, enter gives the command";
    case "reading":
      return "q goes back";
    case "sheet":
      return "type these in and read them back; e when done, q goes back";
  }
}

function lineHint(state: State): string {
  const row = state.overview?.chambers.find((one) => one.chamber === state.chosen);
  if (row === undefined) return "? shows every key";
  const key = due(row).key;
  switch (row.attention) {
    case "fault":
      if (row.alarm === "past_anchor") return `p says how far ${row.chamber} has come and how to go on`;
      return `enter opens ${row.chamber}: the alarm names the first checks`;
    case "propose":
      return `p asks for the next settings of ${row.chamber}; enter opens it`;
    case "measure":
      return `l logs a measured run of ${row.chamber}`;
    case "enter":
      return `e when all is typed in at ${row.chamber}; sheet: enter, then s`;
    case "close":
      return `enter opens ${row.chamber}, then c compares expected with got`;
    case "keep":
      return `nothing to do at ${row.chamber}; ${state.overview?.chambers.length === 1 ? "enter opens it" : "down for the next, enter opens it"}`;
    default:
      return `${key === "" ? "enter" : key} is next for ${row.chamber}`;
  }
}

function chamberHint(state: State): string {
  const view = state.chamber?.view;
  if (view === undefined) return "";
  const [outside, ...others] = (state.chamber?.after ?? view.now).outsideWindow;
  if (outside !== undefined) return `OUTSIDE: ${outside}${others.length === 0 ? "" : ` And ${others.length} more.`}`;
  const change = view.openChange;
  if (change !== null && change.state === "adopted") return `type ${change.change} in at the tool (s: sheet), then e`;
  if (change !== null && change.runsSince === 0) return `l logs the first run after ${change.change}`;
  if (change !== null) return `c closes ${change.change}: expected beside got`;
  const choose = "arrows choose a setting and try it";
  if (whyNot(state, "adopt") !== null) return `${choose}; p proposes`;
  return `${choose}; a adopts ${view.proposal?.proposal ?? "it"}`;
}
