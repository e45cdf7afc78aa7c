/**
 * The steps of a change as entries to be written: each function asks whether the step is allowed on the ledger as it is
 * (to be called under the lock, inside `Book.write`), refuses with a code when not, and gives the draft.
 */
import { Refusal, refuse } from "../../engine/index.ts";
import { type Change, openChange, restsOnCorrected, stepFault } from "./changes.ts";
import { corrected } from "./corrections.ts";
import type { Draft, EntryData, Quantity, StepSettings } from "./entries.ts";
import { changeId, proposalId } from "./ids.ts";
import type { Ledger, ProposalRecord } from "./ledger.ts";
import { chamberRecord } from "./ledger.ts";
import { flatSettings, mergeSteps, stepsOf } from "./steps.ts";
import { type RunRecord, runsOf, type TimelineEvent } from "./timeline.ts";
import { recipeInForce } from "./versions.ts";

/** When and who; both may be left to the book. */
export interface Who {
  at?: string;
  by?: string;
}

/** A proposal by its number. Throws `no-such-proposal`. */
export function proposalAt(ledger: Ledger, number: number): ProposalRecord {
  return ledger.proposals.get(number) ?? refuse("no-such-proposal", `there is no proposal ${proposalId(number)}`);
}

/** A change by its number. Throws `no-such-change`. */
export function changeAt(ledger: Ledger, number: number): Change {
  return ledger.changes.get(number) ?? refuse("no-such-change", `there is no change ${changeId(number)}`);
}

function demand(fault: ReturnType<typeof stepFault>): void {
  if (fault) throw new Refusal([fault]);
}

/** The settings of `before` or `after` in a propose document (contract: flat, every setting of the recipe). */
export function documentSettings(document: Record<string, unknown>, side: "before" | "after"): StepSettings[] {
  const settings = document[side];
  if (typeof settings !== "object" || settings === null) {
    return refuse("nothing-to-adopt", `the proposal holds no settings ${side}`);
  }
  return stepsOf(Object.entries(settings as Record<string, Quantity>));
}

/**
 * Opens a change from a proposal. `basis` is `basisHash` now, with the same parts the proposal was made with. Throws
 * `no-such-proposal`, `stale-proposal` (the basis changed), `already-adopted`, `nothing-to-adopt` (keep, measure, fault).
 */
export function adoptDraft(
  ledger: Ledger,
  how: { proposal: number; reason: string; basis: string } & Who,
): Draft<"adopt"> {
  const proposal = proposalAt(ledger, how.proposal);
  const { chamber, recipe, document, basis } = proposal.data;
  const id = proposalId(how.proposal);
  const earlier = proposal.adoptedBy === null ? undefined : ledger.changes.get(proposal.adoptedBy);
  if (earlier && !(earlier.state === "cancelled" || (earlier.state === "superseded" && !earlier.entered))) {
    refuse("already-adopted", `${id} was adopted already, as ${earlier.id}`);
  }
  if (basis !== how.basis) {
    refuse("stale-proposal", `what ${id} rests on has changed since it was made`, { hint: "propose again" });
  }
  const advice = document["advice"];
  if (advice === "keep" || advice === "measure" || advice === "fault") {
    refuse("nothing-to-adopt", `${id} advises "${advice}": there is nothing to change`);
  }
  const open = openChange(ledger, chamber, recipe);
  const predicted = document["predicted"];
  return {
    kind: "adopt",
    ...who(how),
    data: {
      proposal: how.proposal,
      chamber,
      recipe,
      reason: how.reason,
      before: documentSettings(document, "before"),
      after: documentSettings(document, "after"),
      predicted: typeof predicted === "object" && predicted !== null ? (predicted as Record<string, unknown>) : {},
      ...(open ? { supersedes: open.seq } : {}),
    },
  };
}

function who({ at, by }: Who): Who {
  return { ...(at === undefined ? {} : { at }), ...(by === undefined ? {} : { by }) };
}

/**
 * One of the line's approvers says yes. Throws `no-such-change`, `already-entered`, `superseded`, ..., `not-an-approver`
 * when the line names approvers and `person` is none of them.
 */
export function approveDraft(
  ledger: Ledger,
  how: { change: number; person: string; approvers: readonly string[] } & Omit<Who, "by">,
): Draft<"approve"> {
  demand(stepFault(ledger, "approve", how.change));
  if (how.approvers.length > 0 && !how.approvers.includes(how.person)) {
    refuse("not-an-approver", `${how.person} may not approve changes on this line`, {
      hint: `line.yaml names ${how.approvers.join(", ")}`,
    });
  }
  return { kind: "approve", ...who(how), by: how.person, data: { change: how.change } };
}

/**
 * The change has been typed in. `readBack` are the values read back at the tool; those not given are taken as adopted.
 * Throws `no-such-change`, `already-entered`, `superseded`, ..., `needs-approval` when the line names approvers and none
 * has approved, `no-such-setting` when something was read back that the recipe does not have.
 */
export function enterDraft(
  ledger: Ledger,
  how: { change: number; readBack?: readonly StepSettings[]; approvers: readonly string[] } & Who,
): Draft<"enter"> {
  demand(stepFault(ledger, "enter", how.change));
  const change = changeAt(ledger, how.change);
  if (how.approvers.length > 0 && !change.approved.some(({ by }) => how.approvers.includes(by))) {
    refuse("needs-approval", `change ${change.id} waits for ${how.approvers.join(" or ")}`, {
      hint: `coatwright approve ${change.id}`,
    });
  }
  const known = flatSettings(change.after);
  const stranger = [...flatSettings(how.readBack ?? []).keys()].find((name) => !known.has(name));
  if (stranger !== undefined) {
    refuse("no-such-setting", `${change.id} has no setting "${stranger}"`, { hint: [...known.keys()].join(", ") });
  }
  const readBack = mergeSteps(change.after, how.readBack ?? []);
  return { kind: "enter", ...who(how), data: { change: how.change, read_back: readBack } };
}

/** Runs of the change's chamber and recipe deposited since it was entered, up to `untilMs`, in order. */
export function runsSince(ledger: Ledger, change: Change, untilMs = Number.POSITIVE_INFINITY): RunRecord[] {
  const { entered } = change;
  if (!entered) return [];
  return runsOf(chamberRecord(ledger, change.chamber).timeline).filter(
    (run) => run.recipe === change.recipe && isAfter(run, entered) && run.atMs <= untilMs,
  );
}

function isAfter(event: { atMs: number; seq: number }, mark: { atMs: number; seq: number }): boolean {
  return event.atMs > mark.atMs || (event.atMs === mark.atMs && event.seq > mark.seq);
}

/** Cleans and services since a change was entered: what makes going back to the old settings doubtful. */
export function cameBetween(ledger: Ledger, change: Change): TimelineEvent[] {
  const { entered } = change;
  if (!entered) return [];
  return chamberRecord(ledger, change.chamber).timeline.filter(
    (event) => (event.kind === "clean" || event.kind === "service") && isAfter(event, entered),
  );
}

/** Runs a change may be closed against. Throws `no-such-change`, `not-entered`, `already-closed`, ..., `no-run-since`. */
export function runsToClose(ledger: Ledger, number: number): RunRecord[] {
  demand(stepFault(ledger, "close", number));
  const change = changeAt(ledger, number);
  const runs = runsSince(ledger, change);
  if (runs.length === 0) {
    refuse("no-run-since", `no run of ${change.chamber} under ${change.recipe} since ${change.id} was entered`, {
      hint: "record a run first",
    });
  }
  return runs;
}

/** Closes a change against the runs since. Throws what `runsToClose` throws. */
export function closeDraft(
  ledger: Ledger,
  how: { change: number } & Pick<EntryData["close"], "verdict" | "expected" | "got"> & Who,
): Draft<"close"> {
  const runs = runsToClose(ledger, how.change).map((run) => run.seq);
  const { change, verdict, expected, got } = how;
  return { kind: "close", ...who(how), data: { change, verdict, expected, got, runs } };
}

/**
 * Takes a change back: cancels one never entered; of one entered opens the change back to the settings from before.
 * `nowMs` says what is in force now. Throws `no-such-change`, `already-undone`, `already-cancelled`, `superseded`.
 */
export function undoDraft(ledger: Ledger, how: { change: number; reason: string; nowMs: number } & Who): Draft<"undo"> {
  demand(stepFault(ledger, "undo", how.change));
  const change = changeAt(ledger, how.change);
  const { chamber, recipe } = change;
  const cancelled = change.state === "adopted";
  const now = recipeInForce(ledger, chamber, recipe, how.nowMs)?.steps ?? change.after;
  const other = openChange(ledger, chamber, recipe);
  return {
    kind: "undo",
    ...who(how),
    data: {
      change: how.change,
      reason: how.reason,
      chamber,
      recipe,
      cancelled,
      ...(other && other.seq !== change.seq && !cancelled ? { supersedes: other.seq } : {}),
      before: cancelled ? change.after : now,
      after: change.before,
    },
  };
}

/**
 * Corrects an entry. Throws `no-such-entry`, `cannot-correct`, `no-such-field`, `bad-entry`, `no-such-run`, and
 * `no-reason`. `decided` are the changes that rested on it, to be told.
 */
export function correctDraft(
  ledger: Ledger,
  how: { entry: number; fields: Record<string, unknown>; reason: string } & Who,
): Draft<"correct"> {
  if (how.reason.trim() === "") refuse("no-reason", "a correction needs a reason", { hint: "--reason TEXT" });
  if (Object.keys(how.fields).length === 0) refuse("no-such-field", "nothing to correct was given");
  const earlier = (ledger.corrections.get(how.entry) ?? []).flatMap((seq) => {
    const entry = ledger.entries[seq];
    return entry.kind === "correct" ? [entry.data.fields] : [];
  });
  const result = corrected(ledger.entries[how.entry], how.entry, [...earlier, how.fields]);
  if ("problem" in result) throw new Refusal([result.problem]);
  if (result.original.kind === "reading") {
    const { run } = result.data as EntryData["reading"];
    if (!ledger.runs.has(run)) refuse("no-such-run", `entry ${run} is not a run`);
  }
  return { kind: "correct", ...who(how), data: { entry: how.entry, fields: how.fields, reason: how.reason } };
}

/** Changes whose proposal rested on entries corrected since, with those entries. */
export function changesOnCorrected(ledger: Ledger): { change: Change; entries: readonly number[] }[] {
  return [...ledger.changes.values()].flatMap((change) => {
    const entries = restsOnCorrected(ledger, change);
    return entries.length > 0 ? [{ change, entries }] : [];
  });
}
