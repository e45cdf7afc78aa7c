/** The screens' desk over a real workspace: every question and every act goes to the recipes room. */
import {
  adopt,
  chamberView,
  close,
  enter,
  overview,
  parseChangeId,
  parseProposalId,
  proposalView,
  propose,
  recordEvent,
  recordRun,
  undo,
  type Workspace,
  whatIf,
} from "../../recipes/index.ts";
import type { ScreenDesk } from "./desk.ts";
import { openScreens } from "./open.tsx";

export function deskOver(ws: Workspace): ScreenDesk {
  const withNotices = (sentence: string, notices: readonly string[]) => [sentence, ...notices].join(" ");
  return {
    overview: () => overview(ws),
    chamber: (name) => chamberView(ws, name),
    whatIf: (chamber, settings) => whatIf(ws, chamber, settings),
    propose: async (chamber) => proposalView(ws, await propose(ws, { chamber, forMode: null, dryRun: false })),
    adopt: async (proposal, reason) => {
      const done = await adopt(ws, { proposal: parseProposalId(proposal), reason, entered: false });
      return { change: done.change, sheet: done.sheet };
    },
    enter: async (change) => {
      const done = await enter(ws, { change: parseChangeId(change), readBack: [] });
      return withNotices(`${done.change} is in force: run and measure next.`, [...done.warnings, ...done.notices]);
    },
    logRun: async (chamber, run) => {
      const done = await recordRun(
        ws,
        {
          chamber,
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
      return [`${done.change} is closed: ${done.verdict.verdict}.`, ...done.verdict.lines];
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
