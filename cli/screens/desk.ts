/**
 * What the screens ask of the line: everything they know, they know through this. Calls without a promise answer in a few
 * milliseconds (`chamber` up to a tenth of a second). What cannot be done is thrown as a Refusal and shown in words.
 */
import type { ChamberView, LineOverview, Outlook, ProposalView } from "../../recipes/index.ts";

/** A run as typed into the form; null for what was not measured. At least one is a number. */
export interface RunTyped {
  index: number | null;
  thicknessNm: number | null;
  reflectanceMinimumNm: number | null;
}

export interface ScreenDesk {
  overview(): LineOverview;
  chamber(name: string): ChamberView;
  /** What to expect at these settings (all of them, canonical units). Writes nothing. */
  whatIf(chamber: string, settings: ReadonlyMap<string, number>): Outlook;
  /** Asks for advice; the answer is appended to the book. */
  propose(chamber: string): Promise<ProposalView>;
  /** Opens a change. `sheet` is what to type in at the tool, a line each. */
  adopt(proposal: string, reason: string): Promise<{ change: string; sheet: string[] }>;
  /**
   * The change has been typed in at the tool; `readBack` holds values that differ from the ones adopted (canonical units).
   * Returns one sentence to show, as the others below.
   */
  enter(change: string, readBack?: ReadonlyMap<string, number>): Promise<string>;
  logRun(chamber: string, run: RunTyped): Promise<string>;
  recordClean(chamber: string): Promise<string>;
  /** Closes a change against the runs since: the verdict, then expected beside got, a sentence each. */
  close(change: string): Promise<string[]>;
  undo(change: string, reason: string): Promise<string>;
  /** Forgets what was read; the next call reads the folder again. */
  refresh(): void;
}
