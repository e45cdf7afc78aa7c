/** The verbs of a change's life: adopt, approve, enter, close, undo. */
import {
  adopt,
  approve,
  asQuantities,
  type Changed,
  changeAt,
  close,
  enter,
  parseChangeId,
  parseProposalId,
  parseSet,
  stepsOf,
  undo,
} from "../../recipes/index.ts";
import { flag, type Outcome, settingsFlag, toggle, type Verb, word } from "./verb.ts";

function changed(done: Changed, head: string, next: string, more: Record<string, unknown> = {}): Outcome {
  const receipt = done.receipts.at(-1);
  const document = receipt
    ? { change: done.change, entry: receipt.seq, hash: receipt.hash, warnings: done.warnings, ...more }
    : { would: "change", ...more };
  const text = [
    receipt ? head : `dry run, nothing is written; it would say: ${head}`,
    ...done.sheet.map((l) => `  ${l}`),
    ...done.warnings,
    receipt ? next : "",
  ]
    .filter(Boolean)
    .join("\n");
  return { document, text, notices: done.notices };
}

const changeWord = word("change", "the change, as c-000043");

export const changeVerbs: Verb[] = [
  {
    name: "adopt",
    does: "opens a change from a proposal; --entered says it is typed in already",
    words: [word("proposal", "the proposal, as p-000042")],
    flags: [flag("reason", "TEXT", "why", true), toggle("entered", "it has been typed in at the tool already")],
    examples: ["coatwright adopt p-000042 --reason 'thin since the clean'"],
    writes: true,
    run: async (call) => {
      const done = await adopt(call.workspace(), {
        proposal: parseProposalId(call.args.need("proposal")),
        reason: call.args.need("reason"),
        entered: call.args.switch("entered"),
        ...call.stamp(),
      });
      const entered = call.args.switch("entered");
      const next = entered
        ? `in force. After the next measured run: coatwright close ${done.change}`
        : done.awaits?.length
          ? `nothing may be typed in yet: it waits for ${done.awaits.join(" or ")}, who says: coatwright approve ${done.change}`
          : `type these in at the tool, then: coatwright enter ${done.change}`;
      return changed(done, `${done.change} is ${entered ? "adopted and entered" : "adopted"}.`, next, {
        sheet: done.sheet,
      });
    },
  },
  {
    name: "approve",
    does: "one of the people named in line.yaml says yes to a change",
    words: [changeWord],
    flags: [],
    examples: ["coatwright approve c-000043 --by Ines"],
    writes: true,
    run: async (call) => {
      const done = await approve(call.workspace(), {
        change: parseChangeId(call.args.need("change")),
        ...call.stamp(),
      });
      return changed(done, `${done.change} is approved.`, `then: coatwright enter ${done.change}`);
    },
  },
  {
    name: "enter",
    does: "the change has been typed in at the tool, with the values read back; in force from then",
    words: [changeWord],
    flags: [settingsFlag("a value read back that differs from the one adopted")],
    examples: ["coatwright enter c-000043", "coatwright enter c-000043 --set silane=834sccm"],
    writes: true,
    run: async (call) => {
      const ws = call.workspace();
      const stamp = call.stamp();
      const number = parseChangeId(call.args.need("change"));
      const chamber = ws.chamber(changeAt(ws.ledger, number).chamber);
      const read = parseSet(call.args.settings("set"), chamber, { allowOutside: true });
      const readBack = read.size > 0 ? stepsOf(Object.entries(asQuantities(read, chamber))) : [];
      const done = await enter(ws, { change: number, readBack, ...stamp });
      const next = `run and measure, then: coatwright close ${done.change}`;
      return changed(done, `${done.change} is in force.`, next, {
        ...(read.size > 0 ? { read_back: asQuantities(read, chamber) } : {}),
      });
    },
  },
  {
    name: "close",
    does: "closes a change against the runs since: expected beside got, and a verdict",
    words: [changeWord],
    flags: [],
    examples: ["coatwright close c-000043"],
    writes: true,
    run: async (call) => {
      const done = await close(call.workspace(), { change: parseChangeId(call.args.need("change")), ...call.stamp() });
      const { verdict, expected, got, lines } = done.verdict;
      return changed({ ...done, sheet: lines }, `${done.change} is closed: ${verdict}.`, "", {
        verdict,
        expected,
        got,
      });
    },
  },
  {
    name: "undo",
    does: "a change back to the settings from before, window checked again",
    words: [changeWord],
    flags: [flag("reason", "TEXT", "why", true)],
    examples: ["coatwright undo c-000043 --reason 'index went the wrong way'"],
    writes: true,
    run: async (call) => {
      const done = await undo(call.workspace(), {
        change: parseChangeId(call.args.need("change")),
        reason: call.args.need("reason"),
        ...call.stamp(),
      });
      if (done.cancelled)
        return changed(done, `${done.change} is cancelled; it was never entered.`, "", { cancelled: true });
      return changed(
        done,
        `${done.change} goes back to the settings from before.`,
        `type these in at the tool, then: coatwright enter ${done.change}`,
        { cancelled: false, sheet: done.sheet },
      );
    },
  },
];
