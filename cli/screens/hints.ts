/**
 * One sentence under the screen on what to press next, from how things stand.
 */
import { due } from "../text/line-words.ts";
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
      return "type a part of a name or of what is needed; enter keeps it, esc drops it";
    case "proposal":
      return state.layers.length === 0
        ? ""
        : "read it, then a adopts it with a reason; q goes back to try other settings";
    case "form":
      return "enter goes to the next field and logs the run from the last; esc gives it up";
    case "reason":
      return "say why, in a sentence; enter writes it, esc leaves everything as it is";
    case "name":
      return "enter when the name is typed; esc goes back";
    case "confirm":
      return "only y does it";
    case "commands":
      return "type a part of the name, arrows choose, enter gives the command";
    case "reading":
      return "q goes back";
    case "sheet":
      return "type these in at the tool and read them back; e when all of it is in, q goes back";
  }
}

function lineHint(state: State): string {
  const row = state.overview?.chambers.find((one) => one.chamber === state.chosen);
  if (row === undefined) return "? shows every key";
  const key = due(row).key;
  switch (row.attention) {
    case "fault":
      return `enter opens ${row.chamber}: the alarm names the first checks`;
    case "propose":
      return `p asks for the next settings of ${row.chamber}; enter opens it to try settings first`;
    case "measure":
      return `l logs a measured run of ${row.chamber}`;
    case "enter":
      return `e when the settings are typed in at ${row.chamber}; the sheet is under enter, s`;
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
  const change = view.openChange;
  if (change !== null && change.state === "adopted") return `type ${change.change} in at the tool (s: sheet), then e`;
  if (change !== null && change.runsSince === 0) return `l logs the first run after ${change.change}`;
  if (change !== null) return `c closes ${change.change}: expected beside got`;
  const choose = "up down choose a setting, left right try it";
  return view.proposal === null
    ? `${choose}; p asks for a proposal`
    : `${choose}; p asks again, a adopts ${view.proposal.proposal ?? ""}`.trimEnd();
}
