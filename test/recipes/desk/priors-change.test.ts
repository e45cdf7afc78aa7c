/** A change of priors is a changed line file: recorded before the next entry, and part of what a proposal rests on. */
import { expect, it } from "vitest";
import { proposalBasis } from "../../../recipes/desk/asking.ts";
import { chamberModel, LINE_FILE, recordNote } from "../../../recipes/index.ts";
import { replaceFile } from "../../../recipes/record/atomic-replace.ts";
import { lineWith, onGoal, play, settled } from "../../support/desk-line.ts";

it("a prior stated in line.yaml is recorded as a difference that loosens nothing, and makes the proposal another", async () => {
  const ws = lineWith();
  await recordNote(ws, { text: "the first entry keeps the line file" }, {});
  await settled(play(ws, "A2", "priors"), onGoal, 3);
  const slope = () => {
    const terms = chamberModel(ws, "A2").coefficients();
    return terms.find(({ term }) => term.name === "silane" && term.output === "rate")?.mean ?? 0;
  };
  const [basis, before] = [proposalBasis(ws, "A2", "blue", null), slope()];

  const row = "priors: { rate: { silane: 0.6 sd 0.01 } }";
  const text = `${new TextDecoder().decode(ws.readBeside(LINE_FILE))}${row}\n`;
  replaceFile(ws.ports, `/line/${LINE_FILE}`, new TextEncoder().encode(text));
  ws.refresh();
  expect(proposalBasis(ws, "A2", "blue", null)).not.toBe(basis);
  // sd 0.01 against a chamber spread of 0.06 and three runs: pulled most of the way from 0.8 to 0.6.
  expect(slope()).toBeLessThan(before - 0.08);

  const { notices } = await recordNote(ws, { text: "the next one notices" }, {});
  expect(notices).toEqual([expect.stringContaining("line.yaml has changed")]);
  expect(ws.ledger.entries.at(-2)).toMatchObject({
    kind: "line file",
    data: { after: text, difference: [`+ ${row}`], loosened: [] },
  });
});
