/**
 * The line screen: the list of chambers, warnings, and where there is room the last runs of the chosen one.
 */
import type { Look } from "../palette.ts";
import { type Row, words } from "../text/rows.ts";
import { wrap } from "../text/width.ts";
import type { Band } from "./compose.ts";
import { fieldRow } from "./panes/dialogs.ts";
import { lineListRows } from "./panes/line-list.ts";
import { runsTableRows } from "./panes/runs-table.ts";
import { chambersShown, type State } from "./state.ts";

/** Fewest rows worth giving the table of runs. */
const tableHeight = 8;

export function composeLine(state: State, width: number, height: number, look: Look): Band[] {
  const { overview } = state;
  const band = (key: string, rows: readonly Row[], bandHeight: number): Band => ({
    key,
    height: bandHeight,
    panes: [{ key, width, rows }],
  });
  if (overview === null) return [band("list", [[{ text: "reading the line..." }]], height)];
  const top: Row[] = [];
  if (state.filter !== null) {
    top.push(
      state.filtering
        ? fieldRow("show only: ", state.filter, width, look)
        : [words(`show only: ${state.filter.text}   (/ changes it, esc in it drops it)`, look)],
    );
  }
  const warned = overview.warnings.flatMap((text) => wrap(words(`! ${text}`, look).text, width));
  for (const text of warned.slice(0, 3)) top.push([{ text, tone: "watch" }]);
  const room = height - top.length;
  const shown = chambersShown(state);
  const listHeight = Math.min(room, Math.max(1, shown.length * 6));
  const rest = room - listHeight;
  const withTable = rest >= tableHeight;
  const list = lineListRows(shown, state.chosen, { width, height: withTable ? listHeight : room, look });
  const bands = [
    ...(top.length > 0 ? [band("top", top, top.length)] : []),
    band("list", list, withTable ? listHeight : room),
  ];
  const chosen = shown.find((row) => row.chamber === state.chosen);
  if (!withTable) return bands;
  const title = chosen === undefined ? "" : `${chosen.chamber}: last runs, newest first; off: from expected`;
  const rows = chosen === undefined ? [] : runsTableRows(chosen.lastRuns, title, { width, height: rest, look });
  return [...bands, band("runs", rows, rest)];
}
