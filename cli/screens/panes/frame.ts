/**
 * What surrounds every screen: the head (where am I, what is the goal), the message line, the foot (keys valid now).
 */
import { type Command, footerCommands, keyText } from "../../keys.ts";
import { type Look, signs } from "../../palette.ts";
import { goalToFit } from "../../text/line-words.ts";
import { chanceText, chanceWord } from "../../text/numbers.ts";
import { type Row, rowCells, type Segment, toWidth, words } from "../../text/rows.ts";
import { cells, wrap } from "../../text/width.ts";
import { whyNot } from "../available.ts";
import { placeOf, type State } from "../state.ts";

export const headHeight = 3;

/** Where one is, and the goal everything is held against. */
export function headRows(state: State, width: number, look: Look): Row[] {
  const { overview, chamber } = state;
  const inChamber = state.screen === "chamber" && chamber !== null;
  const place = overview === null ? "reading the line" : overview.line;
  const path = inChamber ? `${place} / ${chamber.view.chamber} / ${chamber.view.recipe}` : place;
  const side = inChamber
    ? `in goal now: ${chanceText(chamber.view.now.chanceInGoal)}, ${chanceWord(chamber.view.now.chanceInGoal)}`
    : overview === null
      ? ""
      : `${overview.demo ? "demo line, " : ""}${overview.entries} entries`;
  const source = inChamber ? chamber.view : overview;
  const measure = (text: string) => cells(words(text, look).text);
  const goal = source === null ? "" : `goal ${goalToFit(source.goal, source.goalText, width - 5, measure)}`;
  const light = inChamber ? chamber.view.lightText : (overview?.lightText ?? "");
  return [
    spread([{ ...words(path, look), tone: "strong" }], [words(side, look)], width),
    spread([words(goal, look)], measure(goal) + measure(light) + 3 <= width ? [words(light, look)] : [], width),
    [{ text: signs(look).rule.repeat(width), tone: "quiet" }],
  ];
}

/** One part at the left, one at the right of a row; the left one gives way. */
export function spread(leftPart: Row, rightPart: Row, width: number): Row {
  const wide = rowCells(rightPart);
  return [...toWidth(leftPart, Math.max(0, width - wide)), ...rightPart];
}

/** Most rows a message may take. */
const longestMessage = 3;

/** The message, wrapped; otherwise what is being waited for; otherwise a hint on what to press next. */
export function messageRows(state: State, hint: string, width: number, look: Look): Row[] {
  if (state.message !== null) {
    const { tone, text } = state.message;
    const shown = tone === "watch" ? `! ${text}` : text;
    const lines = wrap(words(shown, look).text, width);
    const kept = lines.slice(0, longestMessage);
    if (lines.length > longestMessage)
      kept[longestMessage - 1] = `${kept[longestMessage - 1].slice(0, width - 16)} (all of it: m)`;
    return kept.map((line) => [{ text: line, tone }]);
  }
  const lines = wrap(words(state.busy === null ? hint : `${state.busy}, please wait`, look).text, width);
  return lines.slice(0, longestMessage).map((text): Row => [{ text }]);
}

/** The keys that can be pressed now, as many as fit; the help page has the others, each with why not. */
export function footRow(state: State, width: number, look: Look): Row {
  const place = placeOf(state);
  const shown = fitting(
    footerCommands(place).filter((command) => whyNot(state, command.id) === null),
    width,
  );
  const row: Segment[] = [];
  for (const command of shown) {
    if (row.length > 0) row.push({ text: "  " });
    row.push({ text: keyText(command.keys[0]), tone: "strong" }, { text: ` ${command.label}` });
  }
  return toWidth(row, width, look.ascii ? "~" : "…");
}

/** Leaves out from the middle of the order until the rest fits; ways out and help always stay. */
function fitting(all: readonly Command[], width: number): readonly Command[] {
  const needed = (list: readonly Command[]) =>
    list.reduce((sum, command) => sum + cells(keyText(command.keys[0])) + command.label.length + 3, 0);
  const kept = [...all];
  const stays = (command: Command) => command.id === "back" || command.id === "help" || command.id === "accept";
  while (needed(kept) > width + 2 || kept.length > 9) {
    const victim = kept.findLastIndex((command) => !stays(command));
    if (victim < 0) break;
    kept.splice(victim, 1);
  }
  return kept;
}
