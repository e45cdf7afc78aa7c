/**
 * Carries out what the reducer asks for, against the desk, and reports back with events. The only place where the screens
 * call out. Every failure comes back in words; nothing is thrown into the terminal.
 */
import type { ScreenDesk } from "./desk.ts";
import type { Effect, Event } from "./state.ts";
import { inWords } from "./what-if.ts";

export type Outside = "leave" | "repaint" | "suspend";

/** Effects that are the terminal's business are passed on. */
export async function perform(
  desk: ScreenDesk,
  effect: Effect,
  dispatch: (event: Event) => void,
  outside: (what: Outside) => void,
): Promise<void> {
  try {
    await carryOut(desk, effect, dispatch, outside);
  } catch (error) {
    dispatch({ kind: "failed", text: inWords(error) });
  }
}

async function carryOut(
  desk: ScreenDesk,
  effect: Effect,
  dispatch: (event: Event) => void,
  outside: (what: Outside) => void,
): Promise<void> {
  // After each entry both screens are read again: what stands in the book is what is shown.
  const reread = (chamber: string, open: boolean) => {
    dispatch({ kind: "overview", overview: desk.overview() });
    if (open) dispatch({ kind: "chamber", view: desk.chamber(chamber), open: false });
  };
  switch (effect.do) {
    case "load":
      return dispatch({ kind: "overview", overview: desk.overview() });
    case "reread":
      desk.refresh();
      dispatch({ kind: "overview", overview: desk.overview() });
      return dispatch({ kind: "done", text: "the line folder was read again" });
    case "open":
      return dispatch({ kind: "chamber", view: desk.chamber(effect.chamber), open: true });
    case "peek":
      return dispatch({ kind: "chamber", view: desk.chamber(effect.chamber), open: false });
    case "look": {
      const outlook = desk.whatIf(effect.chamber, effect.settings);
      return dispatch({ kind: "looked", chamber: effect.chamber, settings: effect.settings, outlook });
    }
    case "propose": {
      const proposal = await desk.propose(effect.chamber);
      reread(effect.chamber, true);
      return dispatch({ kind: "proposed", chamber: effect.chamber, proposal });
    }
    case "adopt": {
      const { change, sheet } = await desk.adopt(effect.proposal, effect.reason);
      reread(effect.chamber, true);
      return dispatch({ kind: "adopted", chamber: effect.chamber, change, sheet });
    }
    case "close": {
      const lines = await desk.close(effect.change);
      reread(effect.chamber, true);
      return dispatch({ kind: "closed", change: effect.change, lines });
    }
    case "enter":
    case "log":
    case "clean":
    case "undo": {
      const text = await write(desk, effect);
      reread(effect.chamber, true);
      return dispatch({ kind: "done", text });
    }
    default:
      return outside(effect.do);
  }
}

function write(desk: ScreenDesk, effect: Extract<Effect, { do: "enter" | "log" | "clean" | "undo" }>): Promise<string> {
  switch (effect.do) {
    case "enter":
      return desk.enter(effect.change, effect.readBack);
    case "log":
      return desk.logRun(effect.chamber, effect.run);
    case "clean":
      return desk.recordClean(effect.chamber);
    case "undo":
      return desk.undo(effect.change, effect.reason);
  }
}
