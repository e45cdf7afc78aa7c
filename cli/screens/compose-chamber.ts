/**
 * The chamber screen in three sizes. Small: one picture beside the numbers. Medium: film plane over a second picture.
 * Large: a third column with the runs and what was learned.
 */
import type { Look } from "../palette.ts";
import type { Row } from "../text/rows.ts";
import type { Band } from "./compose.ts";
import { expectedRows } from "./panes/expected-table.ts";
import { pictureRows } from "./panes/pictures.ts";
import { settingsRows } from "./panes/settings-table.ts";
import { standingRows } from "./panes/standing.ts";
import { type ChamberState, roomOf } from "./state.ts";

export function composeChamber(chamber: ChamberState, width: number, height: number, look: Look): Band[] {
  const room = roomOf(width, height + 6);
  if (room === "small") {
    // The numbers need their room: names, two values, units.
    const pictureWidth = Math.min(Math.floor(width / 2) - 1, width - 36);
    return [
      body(height, [
        {
          key: "picture",
          width: pictureWidth,
          rows: pictureRows(chamber.picture, chamber, { width: pictureWidth - 1, height, look }),
        },
        { key: "numbers", width: width - pictureWidth, rows: numbers(chamber, width - pictureWidth, height, look) },
      ]),
    ];
  }
  const columns = room === "large" ? 3 : 2;
  const pictureWidth = Math.floor(width / columns) + (columns === 2 ? 0 : 6);
  const upper = Math.ceil(height * 0.55);
  const paper = (rows: number) => ({ width: pictureWidth - 2, height: rows, look });
  const second = chamber.picture === "plane" ? "spectrum" : chamber.picture;
  const pictures: Row[] = [
    ...padded(pictureRows("plane", chamber, paper(upper - 1)), upper),
    ...pictureRows(second, chamber, paper(height - upper)),
  ];
  if (columns === 2) {
    return [
      body(height, [
        { key: "picture", width: pictureWidth, rows: pictures },
        { key: "numbers", width: width - pictureWidth, rows: numbers(chamber, width - pictureWidth, height, look) },
      ]),
    ];
  }
  const numbersWidth = 66;
  const factsWidth = width - pictureWidth - numbersWidth;
  const facts: Row[] = [
    ...padded(pictureRows("runs", chamber, { width: factsWidth, height: upper - 1, look }), upper),
    ...pictureRows("learned", chamber, { width: factsWidth, height: height - upper, look }),
  ];
  return [
    body(height, [
      { key: "picture", width: pictureWidth, rows: pictures },
      { key: "numbers", width: numbersWidth, rows: numbers(chamber, numbersWidth - 2, height, look) },
      { key: "facts", width: factsWidth, rows: facts },
    ]),
  ];
}

const body = (height: number, panes: Band["panes"]): Band => ({ key: "chamber", height, panes });

function padded(rows: readonly Row[], height: number): Row[] {
  return Array.from({ length: height }, (_, i) => rows[i] ?? []);
}

/** Settings, expectation and standing, one under the other. */
function numbers(chamber: ChamberState, width: number, height: number, look: Look): Row[] {
  const { alarms, openChange, proposal } = chamber.view;
  // What stands at the foot is worth more than the last rows of the expectation.
  const foot = (alarms.length > 0 ? 1 : 0) + (openChange !== null ? 1 : 0) + (proposal !== null ? 1 : 0);
  const fewSettings = 4;
  const expected = expectedRows(chamber, { width, height: height - fewSettings - 1 - Math.min(foot, 2), look });
  const settings = settingsRows(chamber, {
    width,
    height: Math.max(
      fewSettings,
      Math.min(chamber.view.settings.length + 1, height - expected.length - 1 - Math.max(foot, height > 14 ? 2 : 0)),
    ),
    look,
  });
  // The blank before the last block goes first when room is short.
  const gap: Row[] = height - settings.length - expected.length - 2 >= 2 ? [[]] : [];
  const used = settings.length + expected.length + 1 + gap.length;
  const standing = standingRows(chamber, { width, height: Math.max(0, height - used), look });
  return [...settings, [], ...expected, ...gap, ...standing];
}
