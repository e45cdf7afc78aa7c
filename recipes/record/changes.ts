/**
 * Where each change stands. The states and the ways between them:
 *
 *   proposal --adopt--> adopted --enter--> entered --close--> closed
 *
 *   adopted  --undo--> cancelled      (never typed in: nothing to take back)
 *   entered, closed --undo--> undone  (the undo opens a change of its own, back to the settings from before)
 *   adopted, entered --adopt or undo of another in the same chamber and recipe--> superseded
 *
 * A chamber has at most one open change (adopted or entered) for a recipe. When an undo is itself cancelled or
 * superseded before it was typed in, the change it was to undo stands as it did, unless another is open by then.
 *
 * This file replays; asking whether a step is allowed and making its entry is change-steps.ts, which uses the same rule.
 */
import type { Problem } from "../../engine/index.ts";
import type { Entry, StepSettings } from "./entries.ts";
import { changeId } from "./ids.ts";
import { type Marks, unmarked } from "./late.ts";
import type { Ledger } from "./ledger.ts";

export type ChangeState = "adopted" | "entered" | "closed" | "superseded" | "undone" | "cancelled";

/** Who did a step of a change, and when. */
export interface Mark {
  seq: number;
  at: string;
  atMs: number;
  by: string;
}

export interface Change extends Mark {
  /** "c-000043", from the number of the entry that opened it. */
  id: string;
  state: ChangeState;
  chamber: string;
  recipe: string;
  reason: string;
  before: StepSettings[];
  after: StepSettings[];
  /** As the proposal predicted it; empty for an undo. */
  predicted: Record<string, unknown>;
  /** The proposal adopted; null for an undo. */
  proposal: number | null;
  /** The change this one undoes; null for an adoption. */
  undoes: number | null;
  approved: Mark[];
  entered: (Mark & { readBack: StepSettings[] }) | null;
  closed:
    | (Mark &
        Marks & { verdict: string; expected: Record<string, unknown>; got: Record<string, unknown>; runs: number[] })
    | null;
  supersededBy: number | null;
  /** The change opened to undo this one. */
  undoneBy: number | null;
  cancelled: (Mark & { reason: string }) | null;
}

export const isOpen = (change: Change): boolean => change.state === "adopted" || change.state === "entered";

/** The open change of a chamber (for one recipe, or any), or null. */
export function openChange(ledger: Ledger, chamber: string, recipe?: string): Change | null {
  for (const change of [...ledger.changes.values()].reverse()) {
    if (isOpen(change) && change.chamber === chamber && (recipe === undefined || change.recipe === recipe))
      return change;
  }
  return null;
}

/** All changes of a chamber, oldest first. */
export function changesOf(ledger: Ledger, chamber: string): Change[] {
  return [...ledger.changes.values()].filter((change) => change.chamber === chamber);
}

/** Entries corrected since the change was adopted, on which its proposal had rested. */
export function restsOnCorrected(ledger: Ledger, change: Change): readonly number[] {
  return change.proposal === null ? [] : (ledger.proposals.get(change.proposal)?.restsOnCorrected ?? []);
}

export type Step = "approve" | "enter" | "close" | "undo";

const ENDED: Record<Exclude<ChangeState, "adopted" | "entered">, { code: string; text: string }> = {
  closed: { code: "already-closed", text: "is closed already" },
  superseded: { code: "superseded", text: "was superseded by another" },
  undone: { code: "already-undone", text: "was undone already" },
  cancelled: { code: "already-cancelled", text: "was cancelled" },
};

/** Null when this step is allowed on the change numbered `number`, else why not. The one place with the rule. */
export function stepFault(ledger: Ledger, step: Step, number: number): Problem | null {
  const change = ledger.changes.get(number);
  if (!change) return { code: "no-such-change", message: `there is no change ${changeId(number)}` };
  const { state } = change;
  const ended = state === "adopted" || state === "entered" ? null : ENDED[state];
  if (step === "undo") {
    if (state === "superseded" && change.entered) return null;
    if (state === "closed" || ended === null) return null;
    return { code: ended.code, message: `change ${change.id} ${ended.text}` };
  }
  if (ended) return { code: ended.code, message: `change ${change.id} ${ended.text}` };
  if (step === "close") {
    if (state === "entered") return null;
    return {
      code: "not-entered",
      message: `change ${change.id} has not been entered at the tool`,
      hint: `coatwright enter ${change.id} when it has been typed in`,
    };
  }
  if (state === "adopted") return null;
  return { code: "already-entered", message: `change ${change.id} is entered already` };
}

type ChangeEntry = Entry<"adopt"> | Entry<"approve"> | Entry<"enter"> | Entry<"close"> | Entry<"undo">;

/** Replays a step. Returns a problem, and does nothing, when the step is not allowed where the book has it. */
export function applyToChanges(ledger: Ledger, entry: ChangeEntry): Problem | null {
  const mark: Mark = { seq: entry.seq, at: entry.at, atMs: Date.parse(entry.at), by: entry.by };
  if (entry.kind === "adopt") return adopt(ledger, entry, mark);
  const fault = stepFault(ledger, entry.kind, entry.data.change);
  if (fault) return { ...fault, message: `entry ${entry.seq} (${entry.kind}) has no effect: ${fault.message}` };
  const change = ledger.changes.get(entry.data.change);
  if (!change) return null;
  switch (entry.kind) {
    case "approve":
      change.approved.push(mark);
      return null;
    case "enter":
      change.state = "entered";
      change.entered = { ...mark, readBack: entry.data.read_back };
      return null;
    case "close": {
      const { verdict, expected, got, runs } = entry.data;
      change.state = "closed";
      change.closed = { ...mark, verdict, expected, got, runs, ...unmarked() };
      return null;
    }
    case "undo":
      return undo(ledger, entry, change, mark);
  }
}

function adopt(ledger: Ledger, entry: Entry<"adopt">, mark: Mark): Problem | null {
  const proposal = ledger.proposals.get(entry.data.proposal);
  if (!proposal) {
    return {
      code: "no-such-proposal",
      message: `entry ${entry.seq} adopts proposal ${entry.data.proposal}, which does not exist`,
    };
  }
  proposal.adoptedBy = entry.seq;
  open(ledger, entry.data, mark, { proposal: entry.data.proposal, undoes: null, predicted: entry.data.predicted });
  return null;
}

function undo(ledger: Ledger, entry: Entry<"undo">, change: Change, mark: Mark): Problem | null {
  const never = change.state === "adopted";
  if (entry.data.cancelled !== never) {
    const message = `entry ${entry.seq} says ${change.id} was ${never ? "" : "not "}entered, the book says otherwise`;
    return { code: never ? "not-entered" : "already-entered", message };
  }
  if (never) {
    change.state = "cancelled";
    change.cancelled = { ...mark, reason: entry.data.reason };
    reinstate(ledger, change);
    return null;
  }
  change.state = "undone";
  change.undoneBy = entry.seq;
  open(ledger, entry.data, mark, { proposal: null, undoes: change.seq, predicted: {} });
  return null;
}

function open(
  ledger: Ledger,
  data: { chamber: string; recipe: string; reason: string; before: StepSettings[]; after: StepSettings[] },
  mark: Mark,
  origin: Pick<Change, "proposal" | "undoes" | "predicted">,
): void {
  const { chamber, recipe, reason, before, after } = data;
  const other = openChange(ledger, chamber, recipe);
  ledger.changes.set(mark.seq, {
    ...mark,
    ...origin,
    id: changeId(mark.seq),
    state: "adopted",
    chamber,
    recipe,
    reason,
    before,
    after,
    approved: [],
    entered: null,
    closed: null,
    supersededBy: null,
    undoneBy: null,
    cancelled: null,
  });
  if (!other) return;
  const entered = other.state === "entered";
  other.state = "superseded";
  other.supersededBy = mark.seq;
  // an undo that was never typed in undid nothing
  if (!entered) reinstate(ledger, other);
}

/** The change that `ended` was to undo stands again as it did. */
function reinstate(ledger: Ledger, ended: Change): void {
  const target = ended.undoes === null ? undefined : ledger.changes.get(ended.undoes);
  if (!target || target.undoneBy !== ended.seq) return;
  target.undoneBy = null;
  const open = openChange(ledger, target.chamber, target.recipe);
  if (target.closed) target.state = "closed";
  else if (target.supersededBy !== null) target.state = "superseded";
  else if (open) {
    target.state = "superseded";
    target.supersededBy = open.seq;
  } else target.state = "entered";
}
