/**
 * A proposal in full: the advice, what would change, what is expected of it, the reasons, what cannot be told, alarms
 * and cautions. Longer than the screen at times, so it scrolls.
 */
import type { ProposalView, Setting } from "../../../recipes/index.ts";
import type { Look } from "../../palette.ts";
import { chanceText, chanceWord, fixed, settingText } from "../../text/numbers.ts";
import { type Paper, type Row, words } from "../../text/rows.ts";
import { left, right } from "../../text/width.ts";
import { adviceInWords } from "../advice-words.ts";
import type { ChamberState } from "../state.ts";
import { sentences } from "./pictures.ts";

export function proposalRows(name: string, proposal: ProposalView, chamber: ChamberState | null, paper: Paper): Row[] {
  const { look } = paper;
  const known = chamber !== null && chamber.view.chamber === name ? chamber : null;
  const id = proposal.proposal === null ? "not kept in the book" : proposal.proposal;
  const watch = proposal.advice === "fault" || proposal.advice === "out_of_reach";
  const rows: Row[] = [
    [
      { ...words(`${name}: ${adviceInWords(proposal)}`, look), tone: watch ? "alarm" : "strong" },
      words(`   ${id}${proposal.done ? ", tuning is finished" : ""}`, look),
    ],
    [],
  ];
  if (proposal.alarms.length > 0)
    rows.push(...sentences([{ title: "ALARMS", lines: proposal.alarms, tone: "alarm" }], paper), []);
  if (known !== null && (proposal.advice === "change" || proposal.advice === "out_of_reach")) {
    rows.push(...changedRows(proposal, known, look), []);
  }
  rows.push(...chanceRows(proposal, known), []);
  rows.push(
    ...sentences(
      [
        { title: "because", lines: proposal.because },
        { title: "cannot tell", lines: proposal.cannotTell },
        { title: "cautions", lines: proposal.cautions },
      ],
      paper,
    ),
  );
  return rows;
}

function changedRows(proposal: ProposalView, chamber: ChamberState, look: Look): Row[] {
  const rows: Row[] = [];
  const before = chamber.view.now.settings;
  const line = (setting: Setting, a: number, b: number): Row => [
    { text: `  ${left(words(setting.name, look).text, 14)}${right(settingText(setting, a), 8)}  ->` },
    { text: right(settingText(setting, b), 8), tone: "after" },
    words(` ${setting.unit}`, look),
  ];
  let kept = 0;
  for (const setting of chamber.view.settings) {
    const a = before.get(setting.name);
    const b = proposal.after.settings.get(setting.name);
    if (a === undefined || b === undefined) continue;
    if (settingText(setting, a) === settingText(setting, b)) kept++;
    else rows.push(line(setting, a, b));
  }
  rows.push([
    { text: `  ${kept} other setting${kept === 1 ? " stays" : "s stay"} as ${kept === 1 ? "it is" : "they are"}` },
  ]);
  return rows;
}

function chanceRows(proposal: ProposalView, chamber: ChamberState | null): Row[] {
  const { predicted, chanceInGoal } = proposal.after;
  const before = chamber?.view.now ?? null;
  const pair = (label: string, a: string, b: string): Row => [
    { text: `  ${left(label, 14)}${right(a, 8)}  ->` },
    { text: right(b, 8), tone: "after" },
  ];
  const rows: Row[] = [
    pair("index", fixed(before?.predicted.index?.mean, 3), fixed(predicted.index?.mean, 3)),
    pair("thickness nm", fixed(before?.predicted.thickness_nm?.mean, 1), fixed(predicted.thickness_nm?.mean, 1)),
    pair("all in goal", before === null ? "-" : chanceText(before.chanceInGoal), chanceText(chanceInGoal)),
  ];
  return rows.map((row, i) => (i === 2 ? [...row, { text: `  ${chanceWord(chanceInGoal)}` }] : row));
}
