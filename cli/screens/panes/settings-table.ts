/**
 * The settings of a chamber: in force, as tried, and where both stand in the range. The chosen one can be moved.
 */

import { type Look, signs } from "../../palette.ts";
import { barRow } from "../../plot/window-bar.ts";
import { settingText } from "../../text/numbers.ts";
import { type Paper, type Row, words } from "../../text/rows.ts";
import { left, right } from "../../text/width.ts";
import type { ChamberState } from "../state.ts";
import { sameSettings } from "../what-if.ts";

/** What the second column shows: "proposed" while it is exactly that, else "what-if". */
export function draftName(chamber: ChamberState): string {
  const { proposal, now } = chamber.view;
  if (sameSettings(chamber.draft, now.settings)) return "no what-if";
  return proposal !== null && sameSettings(chamber.draft, proposal.after.settings) ? "proposed" : "what-if";
}

export function settingsRows(chamber: ChamberState, paper: Paper): Row[] {
  const { width, height, look } = paper;
  const nameWidth = Math.max(11, Math.min(18, width - 34));
  const barWidth = width - nameWidth - 22;
  const name = draftName(chamber);
  const rows: Row[] = [
    [
      {
        text: `  ${left("setting", nameWidth)}${right("now", 6)} ${right(name === "no what-if" ? "what-if" : name, 8)} ${left("unit", 5)}`,
      },
      ...(barWidth >= 6 ? [{ text: left("range", barWidth - 1) }] : []),
    ],
  ];
  const room = Math.max(1, height - 1);
  const first = Math.max(0, Math.min(chamber.cursor - room + 1, chamber.view.settings.length - room));
  for (let i = first; i < Math.min(first + room, chamber.view.settings.length); i++) {
    rows.push(settingRow(chamber, i, nameWidth, barWidth, look));
  }
  return rows;
}

function settingRow(chamber: ChamberState, at: number, nameWidth: number, barWidth: number, look: Look): Row {
  const setting = chamber.view.settings[at];
  const chosen = at === chamber.cursor;
  const now = chamber.view.now.settings.get(setting.name);
  const draft = chamber.draft.get(setting.name);
  const moved = now !== undefined && draft !== undefined && Math.abs(draft - now) > 1e-9 * Math.max(1, Math.abs(now));
  const typing = chosen ? chamber.typing : null;
  const mark = look.ascii ? "~" : "…";
  const after = typing !== null ? `${typing.text}_` : moved ? settingText(setting, draft) : "=";
  return [
    { text: chosen ? `${signs(look).pointer} ` : "  ", tone: "strong" },
    { text: left(words(setting.name, look).text, nameWidth, mark), tone: chosen ? "chosen" : "plain" },
    { text: right(settingText(setting, now), 6, mark) },
    { text: ` ${right(after, 8, mark)}`, tone: typing !== null || moved ? "after" : "plain" },
    { text: ` ${left(words(setting.unit, look).text, 5, mark)}` },
    ...(barWidth >= 6 && now !== undefined
      ? barRow({ width: barWidth - 1, look, low: setting.low, high: setting.high, now, after: draft ?? now })
      : []),
  ];
}
