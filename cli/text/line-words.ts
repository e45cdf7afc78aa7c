/**
 * What a chamber needs, in words: shared by the line screen and the plain overview.
 */
import type { ChamberRow, Goal, OpenChange } from "../../recipes/index.ts";
import type { Tone } from "../palette.ts";
import { fixed } from "./numbers.ts";
import { cells } from "./width.ts";

/** What is due next, as an order to oneself, and the key that does it on the screens ("" for none). */
export function due(row: ChamberRow): { text: string; key: string; tone: Tone } {
  const change = row.openChange?.change ?? "the change";
  switch (row.attention) {
    case "fault":
      if (row.alarm === "past_anchor") return { text: "A PERSON MUST LOOK: past the anchor", key: "p", tone: "alarm" };
      return { text: "FAULT: find it first", key: "enter", tone: "alarm" };
    case "propose":
      return { text: "OFF: ask for a proposal", key: "p", tone: "watch" };
    case "measure":
      return { text: "UNSURE: measure a run", key: "l", tone: "watch" };
    case "enter":
      return { text: `OPEN: type in ${change}`, key: "e", tone: "watch" };
    case "close":
      return { text: `OPEN: close ${change}`, key: "c", tone: "watch" };
    case "keep":
      return { text: "FINE: leave it alone", key: "", tone: "good" };
    case "no data":
      return { text: "NO DATA: log its runs", key: "l", tone: "plain" };
  }
}

/** The state of an open change in a few words. */
export function changeInWords(change: OpenChange): string {
  if (change.state === "adopted") return `${change.change} adopted, not entered`;
  const runs = change.runsSince === 0 ? "no run" : change.runsSince === 1 ? "1 run" : `${change.runsSince} runs`;
  return `${change.change} entered, ${runs} since`;
}

export function counted(count: number, one: string, many = `${one}s`): string {
  return `${count} ${count === 1 ? one : many}`;
}

/** The goal in few words, for a head that is short of room: "index 2.06 ±0.02, 88 ±2 nm, R at most 2.5 %, minimum 600 ±15 nm". */
export function goalInBrief(goal: Goal): string {
  const around = (tolerance: { value: number; within: number }) => `${tolerance.value} ±${tolerance.within}`;
  return [
    ...(goal.index === undefined ? [] : [`index ${around(goal.index)}`]),
    ...(goal.thicknessNm === undefined ? [] : [`${around(goal.thicknessNm)} nm`]),
    ...(goal.weightedReflectancePercent === undefined
      ? []
      : [`R at most ${fixed(goal.weightedReflectancePercent.atMost, 1)} %`]),
    ...(goal.reflectanceMinimumNm === undefined ? [] : [`minimum ${around(goal.reflectanceMinimumNm)} nm`]),
  ].join(", ");
}

/** The goal in the words that fit `width`, from whole to shortest; `measure` tells the cells a text will take. */
export function goalToFit(goal: Goal, whole: string, width: number, measure: (text: string) => number): string {
  const brief = goalInBrief(goal);
  const shorter = brief.replace("R at most ", "R max ").replace("minimum ", "min ");
  const forms = [whole, brief, shorter, shorter.replace("index ", "n ").replace("R max ", "R<=")];
  return forms.find((text) => measure(text) <= width) ?? forms[forms.length - 1];
}

/**
 * A chamber's sentence in the room there is. What follows its last colon is the advice, which stands above it already;
 * after that it loses whole clauses from the end, never part of one.
 */
export function sentenceInBrief(sentence: string, width: number): string {
  let text = sentence;
  if (cells(text) > width && text.includes(": ")) text = text.slice(0, text.lastIndexOf(": "));
  while (cells(text) > width && text.includes(", ")) text = text.slice(0, text.lastIndexOf(", "));
  return text;
}
