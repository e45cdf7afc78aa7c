/**
 * How the chamber stands, in a few sentences under the numbers: alarms, the open change, the proposal and its reasons.
 */
import { changeInWords, counted } from "../../text/line-words.ts";
import { type Paper, type Row, words } from "../../text/rows.ts";
import { cut, wrap } from "../../text/width.ts";
import { adviceInBrief, adviceInWords } from "../advice-words.ts";
import type { ChamberState } from "../state.ts";

export function standingRows(chamber: ChamberState, paper: Paper): Row[] {
  const { alarms, openChange, proposal, cannotTell } = chamber.view;
  const { look, width } = paper;
  const rows: Row[] = [];
  const say = (lead: string, text: string, tone: "alarm" | "strong" | "watch", most: number) => {
    const all = wrap(words(text, look).text, width - lead.length - 1);
    const lines = all.slice(0, most);
    const mark = look.ascii ? "~" : "…";
    if (all.length > most) lines[most - 1] = cut(`${lines[most - 1]} ${all[most]}`, width - lead.length - 2, "") + mark;
    lines.forEach((line, i) => {
      rows.push([{ text: i === 0 ? lead : " ".repeat(lead.length), tone }, { text: ` ${line}` }]);
    });
  };
  const room = paper.height;
  const roomy = room >= 8;
  for (const alarm of alarms.slice(0, roomy ? 4 : 1))
    say(alarm.startsWith("past_anchor") ? "LOOK " : "ALARM", alarm, "alarm", roomy ? 3 : 1);
  if (alarms.length > 1 && !roomy) say("ALARM", `and ${counted(alarms.length - 1, "more", "more")} (i)`, "alarm", 1);
  if (openChange !== null) say("open", changeInWords(openChange), "watch", 2);
  if (proposal !== null) {
    say(
      "asked",
      `${proposal.proposal ?? "not kept"}: ${roomy ? adviceInWords(proposal) : adviceInBrief(proposal)}`,
      "strong",
      roomy ? 2 : 1,
    );
    if (roomy) for (const reason of proposal.because) say("  because", reason, "strong", 3);
  }
  if (roomy)
    for (const sentence of (proposal?.cannotTell ?? cannotTell).slice(0, 4)) say("unsure", sentence, "strong", 3);
  return rows.slice(0, room);
}
