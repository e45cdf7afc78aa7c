/**
 * Puts a screen together: which panes, how wide and high, from the state and the size of the terminal. Pure; the same
 * bands are drawn by the layout library and read by tests.
 */
import type { Look } from "../palette.ts";
import { fill, type Row, rowText } from "../text/rows.ts";
import { wrap } from "../text/width.ts";
import { composeChamber } from "./compose-chamber.ts";
import { composeLine } from "./compose-line.ts";
import { hintFor } from "./hints.ts";
import { dialogRows } from "./panes/dialogs.ts";
import { footRow, headHeight, headRows, messageRows } from "./panes/frame.ts";
import { pageRows, scrolledRows } from "./panes/pages.ts";
import { type State, smallest, tooSmall } from "./state.ts";

/** Rows with the place they take beside their neighbours. */
export interface Placed {
  key: string;
  width: number;
  rows: readonly Row[];
}

/** Panes side by side. */
export interface Band {
  key: string;
  height: number;
  panes: readonly Placed[];
}

export function compose(state: State, look: Look): Band[] {
  const { columns: width, rows: height } = state;
  const whole = (key: string, rows: readonly Row[], bandHeight: number): Band => ({
    key,
    height: bandHeight,
    panes: [{ key, width, rows }],
  });
  if (tooSmall(state)) {
    const text = `enlarge to ${smallest.columns}x${smallest.rows} or more (is ${width}x${height}); nothing is lost; Q leaves`;
    const rows = wrap(text, width).map((line): Row => [{ text: line }]);
    return [whole("small", rows, height)];
  }
  const top = state.layers.at(-1) ?? null;
  const asked = top === null ? null : dialogRows(state, top, width, look);
  const said = messageRows(state, hintFor(state), width, look);
  const below = [...(asked ?? []), ...said];
  const bodyHeight = Math.max(1, height - headHeight - below.length - 1);
  return [
    whole("head", headRows(state, width, look), headHeight),
    ...bodyBands(state, width, bodyHeight, look),
    whole("below", below, below.length),
    whole("foot", [footRow(state, width, look)], 1),
  ];
}

/** Room for a page or screen, as `compose` gives it: the reducer needs it to know where scrolling ends. */
export function bodyHeightOf(state: State): number {
  return Math.max(1, state.rows - headHeight - 2);
}

function bodyBands(state: State, width: number, height: number, look: Look): Band[] {
  const page = state.layers.findLast((layer) => pageKinds.includes(layer.kind));
  if (page !== undefined) {
    const rows = pageRows(state, page, width, look) ?? [];
    const scroll =
      "scroll" in page ? page.scroll : page.kind === "commands" ? Math.max(0, page.cursor - height + 5) : 0;
    return [
      {
        key: "page",
        height,
        panes: [{ key: "page", width, rows: scrolledRows(rows, scroll, { width, height, look }) }],
      },
    ];
  }
  if (state.screen === "chamber" && state.chamber !== null) return composeChamber(state.chamber, width, height, look);
  return composeLine(state, width, height, look);
}

const pageKinds: readonly string[] = ["proposal", "reading", "commands"];

/** The whole screen as lines of text, for tests and for looking at without a terminal. */
export function screenText(state: State, look: Look): string[] {
  const lines: string[] = [];
  for (const band of compose(state, look)) {
    const panes = band.panes.map((pane) => fill(pane.rows, { width: pane.width, height: band.height, look }));
    for (let row = 0; row < band.height; row++)
      lines.push(
        panes
          .map((rows) => rowText(rows[row]))
          .join("")
          .trimEnd(),
      );
  }
  return lines;
}
