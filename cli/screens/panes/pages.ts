/**
 * Pages that lie over a screen: text to read, a proposal, the command list. All scroll inside the room they have.
 */
import { type Look, signs } from "../../palette.ts";
import { type Paper, type Row, words } from "../../text/rows.ts";
import { left, wrap } from "../../text/width.ts";
import { whyNot } from "../available.ts";
import { keysOf, matching } from "../help.ts";
import { type Layer, placeOf, type State } from "../state.ts";
import { fieldRow } from "./dialogs.ts";
import { proposalRows } from "./proposal-page.ts";

/** All rows of a page, before scrolling; null when the layer is not a page. */
export function pageRows(state: State, layer: Layer, width: number, look: Look): Row[] | null {
  const paper: Paper = { width, height: Number.POSITIVE_INFINITY, look };
  switch (layer.kind) {
    case "proposal":
      return proposalRows(layer.chamber, layer.proposal, state.chamber, paper);
    case "reading":
      return [
        [{ ...words(layer.title, look), tone: "strong" }],
        [],
        ...layer.lines.flatMap((line) => indented(words(line, look).text, width)),
      ];
    case "commands":
      return commandRows(state, layer, width, look);
    default:
      return null;
  }
}

/** A long line goes on under its own text: below the second column when it has one (two blanks inside). */
function indented(line: string, width: number): Row[] {
  const gap = /^(\S.{0,22}? {2,})\S/.exec(line);
  const hang = gap === null ? 0 : gap[1].length;
  if (hang === 0) return wrap(line, width).map((text): Row => [{ text }]);
  const head = line.slice(0, hang);
  return wrap(line.slice(hang), width - hang).map(
    (text, i): Row => [{ text: i === 0 ? head : " ".repeat(hang) }, { text }],
  );
}

/** The part of a page that is seen; the last row says how much more there is. */
export function scrolledRows(rows: readonly Row[], scroll: number, paper: Paper): Row[] {
  if (rows.length <= paper.height) return [...rows];
  const room = paper.height - 1;
  const first = Math.min(scroll, rows.length - room);
  const below = rows.length - room - first;
  const sign = signs(paper.look);
  const more =
    below > 0 ? `${sign.low} ${below} more below: down, PgDn` : `${sign.high} end; up, PgUp for what is above`;
  return [...rows.slice(first, first + room), [{ text: more, tone: "strong" }]];
}

/** Farthest a page of so many rows scrolls in the room it has. */
export function farthest(rows: number, height: number): number {
  return rows <= height ? 0 : rows - (height - 1);
}

function commandRows(state: State, layer: Extract<Layer, { kind: "commands" }>, width: number, look: Look): Row[] {
  const under = { ...state, layers: state.layers.slice(0, -1) };
  const found = matching(placeOf(under), layer.field.text);
  const rows: Row[] = [fieldRow(": ", layer.field, width, look), []];
  if (found.length === 0) rows.push([{ text: "no command is called that" }]);
  found.forEach((command, i) => {
    const reason = whyNot(under, command.id);
    rows.push([
      { text: i === layer.cursor ? `${signs(look).pointer} ` : "  ", tone: "strong" },
      { text: left(command.label, 13), tone: i === layer.cursor ? "chosen" : "plain" },
      { text: ` ${left(keysOf(command), 16)} ` },
      words(reason === null ? command.help : `not now: ${reason}`, look),
    ]);
  });
  return rows;
}
