/**
 * What was decided before something came to be known. The book never changes a proposal or a verdict; when an entry comes
 * later about a time or a run they had looked at (a late reading, a clean entered after the runs that followed it, a
 * correction), they are marked with it, so that nobody takes them for more than they were.
 */
import type { Change } from "./changes.ts";
import { changeId, proposalId } from "./ids.ts";
import type { Ledger } from "./ledger.ts";

/** The marks of a proposal or a verdict: entries corrected since, and entries that came later. */
export interface Marks {
  restsOnCorrected: number[];
  restsOnLate: number[];
}

export const unmarked = (): Marks => ({ restsOnCorrected: [], restsOnLate: [] });

/** What an entry is about: a time in a chamber's life (null: all chambers), and the run where it is a reading's or a run's. */
export interface About {
  chamber: string | null;
  atMs: number;
  run?: number;
}

const put = (list: number[], seq: number): void => {
  if (!list.includes(seq)) list.push(seq);
};

/** Had the verdict looked at this? Runs it was given by number; anything else that happened while the change was tried. */
export function judged(change: Change, { chamber, atMs, run }: About): boolean {
  const { closed, entered } = change;
  if (!closed || !entered || (chamber !== null && change.chamber !== chamber)) return false;
  if (run !== undefined && closed.runs.includes(run)) return true;
  return atMs >= entered.atMs && atMs < closed.atMs;
}

/**
 * Marks the proposals and verdicts made before entry `seq` that it comes too late for. `knownRun` is the run a late reading
 * belongs to: a proposal made before that run was entered had not looked at it.
 */
export function markDecided(
  ledger: Ledger,
  seq: number,
  chamber: string | null,
  atMs: number,
  knownRun?: number,
): void {
  // Nearly every entry is of the present, later than anything decided.
  if (atMs >= ledger.lastDecidedMs) return;
  for (const proposal of ledger.proposals.values()) {
    if (proposal.seq > seq || atMs >= proposal.atMs || (chamber !== null && proposal.data.chamber !== chamber))
      continue;
    if (knownRun === undefined || knownRun < proposal.seq) put(proposal.restsOnLate, seq);
  }
  for (const change of ledger.changes.values()) {
    const { closed } = change;
    if (!closed || closed.seq > seq) continue;
    if (knownRun === undefined ? judged(change, { chamber, atMs }) : closed.runs.includes(knownRun))
      put(closed.restsOnLate, seq);
  }
}

/** Marks what rested on entry `original`, which has been corrected; `about` is what that is about, before and after. */
export function markCorrected(ledger: Ledger, original: number, about: readonly About[]): void {
  for (const proposal of ledger.proposals.values()) {
    const { chamber } = proposal.data;
    if (proposal.seq > original && about.some((one) => one.chamber === null || one.chamber === chamber))
      proposal.restsOnCorrected.push(original);
  }
  for (const change of ledger.changes.values())
    if (change.closed && change.closed.seq > original && about.some((one) => judged(change, one)))
      put(change.closed.restsOnCorrected, original);
}

/** What was decided before these entries were known, by name: "p-000042", "the verdict on c-000043". */
export function decidedBefore(ledger: Ledger, entries: readonly number[]): string[] {
  const late = ({ restsOnLate }: Marks) => entries.some((seq) => restsOnLate.includes(seq));
  return [
    ...[...ledger.proposals.values()].filter(late).map((one) => proposalId(one.seq)),
    ...[...ledger.changes.values()]
      .filter(({ closed }) => closed !== null && late(closed))
      .map((change) => `the verdict on ${changeId(change.seq)}`),
  ];
}
