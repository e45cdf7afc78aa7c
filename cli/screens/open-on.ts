/** The screens' desk over a real workspace: every question and every act goes to the recipes room. */
import {
  adopt,
  asQuantities,
  chamberView,
  changeAt,
  close,
  enter,
  overview,
  parseChangeId,
  parseProposalId,
  proposalView,
  propose,
  recordEvent,
  recordRun,
  stepsOf,
  undo,
  type Workspace,
  whatIf,
} from "../../recipes/index.ts";
import type { ScreenDesk } from "./desk.ts";
import { openScreens } from "./open.tsx";

export function deskOver(ws: Workspace): ScreenDesk {
  const withNotices = (sentence: string, notices: readonly string[]) => [sentence, ...notices].join(" ");
  // The recipe each chamber was last shown with: what is asked and written is about what is on the screen.
  const shown = new Map<string, string>();
  return {
    overview: () => {
      const line = overview(ws);
      for (const row of line.chambers) if (row.recipe !== "") shown.set(row.chamber, row.recipe);
      return line;
    },
    chamber: (name) => {
      const view = chamberView(ws, name);
      shown.set(name, view.recipe);
      return view;
    },
    whatIf: (chamber, settings) => whatIf(ws, chamber, settings, shown.get(chamber)),
    propose: async (chamber) =>
      proposalView(ws, await propose(ws, { chamber, recipe: shown.get(chamber), forMode: null, dryRun: false })),
    adopt: async (proposal, reason) => {
      const done = await adopt(ws, { proposal: parseProposalId(proposal), reason, entered: false });
      return { change: done.change, sheet: done.sheet };
    },
    enter: async (change, read) => {
      const number = parseChangeId(change);
      const chamber = ws.chamber(changeAt(ws.ledger, number).chamber);
      const readBack = read && read.size > 0 ? stepsOf(Object.entries(asQuantities(read, chamber))) : [];
      const done = await enter(ws, { change: number, readBack });
      return withNotices(`${done.change} is in force: run and measure next.`, [...done.warnings, ...done.notices]);
    },
    logRun: async (chamber, run) => {
      const done = await recordRun(
        ws,
        {
          chamber,
          recipe: shown.get(chamber),
          index: run.index ?? undefined,
          thickness: run.thicknessNm ?? undefined,
          reflectanceMinimum: run.reflectanceMinimumNm ?? undefined,
        },
        {},
      );
      return withNotices(`recorded #${done.entry}. ${done.sentence}`, done.notices);
    },
    recordClean: async (chamber) => {
      const done = await recordEvent(ws, { kind: "clean", chamber }, {});
      return withNotices(`recorded #${done.entry}. ${done.sentence}`, done.notices);
    },
    close: async (change) => {
      const done = await close(ws, { change: parseChangeId(change) });
      return [`${done.verdict.verdict}.`, ...done.verdict.lines];
    },
    undo: async (change, reason) => {
      const done = await undo(ws, { change: parseChangeId(change), reason });
      return withNotices(
        done.cancelled
          ? `${done.change} is cancelled; it was never entered.`
          : `${done.change} goes back: type the old settings in, then enter it.`,
        [...done.warnings, ...done.notices],
      );
    },
    refresh: () => ws.refresh(),
  };
}

export interface ScreenWishes {
  env: NodeJS.ProcessEnv;
  noColour: boolean;
  ascii: boolean;
}

/** Opens the screens on a workspace; the promise is the exit code. */
export function openOn(ws: Workspace, wishes: ScreenWishes): Promise<number> {
  return openScreens(deskOver(ws), {
    stdin: process.stdin,
    stdout: process.stdout,
    env: wishes.env,
    ...(wishes.noColour ? { colour: "never" as const } : {}),
    ...(wishes.ascii ? { ascii: true } : {}),
  });
}
