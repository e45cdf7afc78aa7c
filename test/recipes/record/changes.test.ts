/**
 * Where changes stand: every step allowed where it should be and refused with its code elsewhere. A random walk is
 * compared, step by step, with a model written here in another way: a table of states.
 */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { Refusal } from "../../../engine/index.ts";
import {
  adoptDraft,
  approveDraft,
  cameBetween,
  changesOnCorrected,
  closeDraft,
  correctDraft,
  enterDraft,
  runsToClose,
  undoDraft,
} from "../../../recipes/record/change-steps.ts";
import { openChange } from "../../../recipes/record/changes.ts";
import { changeId, parseChangeId, parseProposalId, proposalId } from "../../../recipes/record/ids.ts";
import { replay } from "../../../recipes/record/ledger.ts";
import { recipeInForce } from "../../../recipes/record/versions.ts";
import { Bench, steps } from "../../support/ledger-bench.ts";

const adopt = (bench: Bench, proposal: number): number =>
  bench.add(adoptDraft(bench.ledger, { proposal, reason: "to goal", basis: bench.basis }));
const enter = (bench: Bench, change: number): number => bench.add(enterDraft(bench.ledger, { change, approvers: [] }));
const close = (bench: Bench, change: number): number =>
  bench.add(closeDraft(bench.ledger, { change, verdict: "in goal", expected: {}, got: {} }));
const undo = (bench: Bench, change: number): number =>
  bench.add(undoDraft(bench.ledger, { change, reason: "worse", nowMs: bench.nowMs }));
const state = (bench: Bench, change: number) => bench.ledger.changes.get(change)?.state;
const code = (work: () => unknown): string => {
  try {
    work();
  } catch (error) {
    if (error instanceof Refusal) return error.code;
    throw error;
  }
  return "allowed";
};

function started(): { bench: Bench; change: number } {
  const bench = new Bench();
  bench.recipe(800);
  bench.run(800);
  return { bench, change: adopt(bench, bench.propose(800, 830)) };
}

describe("a change", () => {
  it("goes from proposed through adopted and entered to closed, with who and when at each", () => {
    const { bench, change } = started();
    expect(state(bench, change)).toBe("adopted");
    expect(recipeInForce(bench.ledger, "A2", "blue", bench.nowMs)?.steps).toEqual(steps(800));
    bench.add(
      enterDraft(bench.ledger, {
        change,
        readBack: [{ settings: { silane: { value: 829, unit: "sccm" } } }],
        approvers: [],
      }),
    );
    expect(recipeInForce(bench.ledger, "A2", "blue", bench.nowMs)?.steps).toEqual(steps(829));
    const run = bench.run(829);
    const end = close(bench, change);
    const record = bench.ledger.changes.get(change);
    expect(record).toMatchObject({
      state: "closed",
      id: changeId(change),
      closed: { seq: end, runs: [run], verdict: "in goal" },
    });
    expect(record?.predicted).toEqual({ index: { mean: 2.06 } });
    expect(openChange(bench.ledger, "A2")).toBe(null);
    expect(bench.ledger.problems).toEqual([]);
  });

  it("is refused what it cannot do, each with its code", () => {
    const { bench, change } = started();
    expect(code(() => close(bench, change))).toBe("not-entered");
    expect(code(() => enter(bench, 999))).toBe("no-such-change");
    expect(code(() => enter(bench, 0))).toBe("no-such-change");
    enter(bench, change);
    expect(code(() => enter(bench, change))).toBe("already-entered");
    expect(code(() => close(bench, change))).toBe("no-run-since");
    bench.run(830);
    close(bench, change);
    expect(code(() => close(bench, change))).toBe("already-closed");
    expect(code(() => enter(bench, change))).toBe("already-closed");
  });

  it("a run from before it was entered, entered late, does not close it", () => {
    const { bench, change } = started();
    enter(bench, change);
    bench.run(830, {}, -60);
    expect(code(() => runsToClose(bench.ledger, change))).toBe("no-run-since");
  });

  it("a stale, unknown, empty or used proposal is not adopted", () => {
    const bench = new Bench();
    bench.run(800);
    const proposal = bench.propose(800, 830);
    bench.run(801);
    expect(code(() => adopt(bench, proposal))).toBe("stale-proposal");
    expect(code(() => adopt(bench, 0))).toBe("no-such-proposal");
    for (const advice of ["keep", "measure", "fault"]) {
      expect(code(() => adopt(bench, bench.propose(800, 800, advice)))).toBe("nothing-to-adopt");
    }
    expect(code(() => adopt(bench, bench.propose(800, 840, "out_of_reach")))).toBe("allowed");
    const good = bench.propose(800, 830);
    adopt(bench, good);
    expect(code(() => adopt(bench, good))).toBe("already-adopted");
  });

  it("adopting while one is open ends that one as superseded", () => {
    const { bench, change } = started();
    const next = adopt(bench, bench.propose(800, 840));
    expect([state(bench, change), state(bench, next)]).toEqual(["superseded", "adopted"]);
    expect(bench.ledger.entries[next]).toMatchObject({ data: { supersedes: change } });
    expect(code(() => enter(bench, change))).toBe("superseded");
  });

  it("undone before it was entered, is cancelled; after, opens a change back", () => {
    const { bench, change } = started();
    undo(bench, change);
    expect(state(bench, change)).toBe("cancelled");
    expect(code(() => undo(bench, change))).toBe("already-cancelled");
    const second = adopt(bench, bench.propose(800, 840));
    enter(bench, second);
    bench.add({ kind: "clean", data: { chamber: "A2" } });
    expect(cameBetween(bench.ledger, bench.ledger.changes.get(second)!).map((event) => event.kind)).toEqual(["clean"]);
    const back = undo(bench, second);
    expect(bench.ledger.changes.get(back)).toMatchObject({
      state: "adopted",
      before: steps(840),
      after: steps(800),
      undoes: second,
    });
    expect(state(bench, second)).toBe("undone");
    enter(bench, back);
    expect(recipeInForce(bench.ledger, "A2", "blue", bench.nowMs)?.steps).toEqual(steps(800));
  });

  it("an undo that is itself cancelled leaves the change as it stood", () => {
    const { bench, change } = started();
    enter(bench, change);
    const back = undo(bench, change);
    undo(bench, back);
    expect([state(bench, change), state(bench, back)]).toEqual(["entered", "cancelled"]);
    bench.run(830);
    expect(code(() => close(bench, change))).toBe("allowed");
  });

  it("an undo that is superseded before it was typed in undid nothing: its change ends as superseded, or stays closed", () => {
    const { bench, change } = started();
    enter(bench, change);
    undo(bench, change);
    adopt(bench, bench.propose(830, 840));
    expect(state(bench, change)).toBe("superseded");
    const closed = openChange(bench.ledger, "A2")!.seq;
    enter(bench, closed);
    bench.run(840);
    close(bench, closed);
    undo(bench, closed);
    adopt(bench, bench.propose(840, 850));
    expect(state(bench, closed)).toBe("closed");
  });

  it("waits for one of the line's approvers where it names some", () => {
    const { bench, change } = started();
    const approvers = ["Ines", "Rui"];
    expect(code(() => enterDraft(bench.ledger, { change, approvers }))).toBe("needs-approval");
    expect(code(() => approveDraft(bench.ledger, { change, person: "Ana", approvers }))).toBe("not-an-approver");
    bench.add(approveDraft(bench.ledger, { change, person: "Rui", approvers }));
    expect(code(() => enterDraft(bench.ledger, { change, approvers }))).toBe("allowed");
  });

  it("refuses a read-back of a setting that it does not have", () => {
    const { bench, change } = started();
    const readBack = [{ settings: { argon: { value: 1, unit: "sccm" } } }];
    expect(code(() => enterDraft(bench.ledger, { change, readBack, approvers: [] }))).toBe("no-such-setting");
  });

  it("is marked when a reading it rested on was corrected", () => {
    const { bench, change } = started();
    bench.add(correctDraft(bench.ledger, { entry: 1, fields: { index: 2.2 }, reason: "misread" }));
    expect(changesOnCorrected(bench.ledger)).toEqual([{ change: bench.ledger.changes.get(change), entries: [1] }]);
  });

  it("a step that the book has where it is not allowed is told, and has no effect", () => {
    const { bench, change } = started();
    bench.add({ kind: "close", data: { change, verdict: "v", expected: {}, got: {}, runs: [] } });
    bench.add({ kind: "enter", data: { change: 77, read_back: steps(1) } });
    bench.add({
      kind: "adopt",
      data: {
        proposal: 1,
        chamber: "A2",
        recipe: "blue",
        reason: "r",
        before: steps(1),
        after: steps(2),
        predicted: {},
      },
    });
    bench.add({
      kind: "undo",
      data: { change, reason: "r", chamber: "A2", recipe: "blue", cancelled: false, before: steps(1), after: steps(2) },
    });
    expect(bench.ledger.problems.map((one) => one.code)).toEqual([
      "not-entered",
      "no-such-change",
      "no-such-proposal",
      "not-entered",
    ]);
    expect(state(bench, change)).toBe("adopted");
    expect(bench.ledger.changes.size).toBe(1);
  });
});

/** The model: what each change is, and what a step makes of it. */
interface Modelled {
  state: string;
  wasEntered: boolean;
  undoes: number | null;
  runs: number;
  /** Its state before it was undone. */
  held: string | null;
}
const STEP_CODES: Record<string, Record<string, string>> = {
  enter: {
    adopted: "allowed",
    entered: "already-entered",
    closed: "already-closed",
    superseded: "superseded",
    undone: "already-undone",
    cancelled: "already-cancelled",
  },
  close: {
    adopted: "not-entered",
    entered: "allowed",
    closed: "already-closed",
    superseded: "superseded",
    undone: "already-undone",
    cancelled: "already-cancelled",
  },
  undo: {
    adopted: "allowed",
    entered: "allowed",
    closed: "allowed",
    superseded: "superseded",
    undone: "already-undone",
    cancelled: "already-cancelled",
  },
};

class Model {
  readonly changes = new Map<number, Modelled>();
  open(): [number, Modelled] | null {
    return [...this.changes].find(([, one]) => one.state === "adopted" || one.state === "entered") ?? null;
  }
  begin(number: number, undoes: number | null): void {
    const other = this.open();
    this.changes.set(number, { state: "adopted", wasEntered: false, undoes, runs: 0, held: null });
    if (other) this.end(other[1], "superseded");
  }
  end(change: Modelled, how: string): void {
    const neverIn = change.state === "adopted";
    change.state = how;
    const target = neverIn && change.undoes !== null ? this.changes.get(change.undoes) : undefined;
    if (target?.state !== "undone") return;
    target.state = target.held === "entered" && this.open() ? "superseded" : (target.held ?? "");
    target.held = null;
  }
}

describe("a random walk over changes", () => {
  const move = fc.oneof(
    { weight: 3, arbitrary: fc.constant({ do: "adopt", pick: 0 }) },
    { weight: 3, arbitrary: fc.record({ do: fc.constant("enter"), pick: fc.nat(2) }) },
    { weight: 2, arbitrary: fc.record({ do: fc.constant("close"), pick: fc.nat(2) }) },
    { weight: 3, arbitrary: fc.record({ do: fc.constant("undo"), pick: fc.nat(2) }) },
    { weight: 2, arbitrary: fc.constant({ do: "run", pick: 0 }) },
  );

  it("agrees with a table of states at every step, keeps one open change, and replays to the same", () => {
    fc.assert(
      fc.property(fc.array(move, { minLength: 5, maxLength: 40 }), (moves) => {
        const bench = new Bench();
        bench.recipe(800);
        const model = new Model();
        for (const one of moves) {
          const number = [...model.changes.keys()].at(-1 - one.pick);
          if (one.do === "run") {
            bench.run(800);
            for (const change of model.changes.values()) if (change.wasEntered) change.runs++;
          } else if (one.do === "adopt") {
            model.begin(adopt(bench, bench.propose(800, 830)), null);
          } else if (number !== undefined) {
            const change = model.changes.get(number)!;
            let expected = STEP_CODES[one.do][change.state];
            if (one.do === "close" && expected === "allowed" && change.runs === 0) expected = "no-run-since";
            if (one.do === "undo" && change.state === "superseded" && change.wasEntered) expected = "allowed";
            const step = { enter, close, undo }[one.do as "enter" | "close" | "undo"];
            const next = bench.entries.length;
            expect(code(() => step(bench, number))).toBe(expected);
            if (expected !== "allowed") continue;
            if (one.do === "enter") Object.assign(change, { state: "entered", wasEntered: true });
            else if (one.do === "close") change.state = "closed";
            else if (change.state === "adopted") model.end(change, "cancelled");
            else {
              Object.assign(change, { held: change.state, state: "undone" });
              model.begin(next, number);
            }
          }
          const states = new Map([...bench.ledger.changes].map(([seq, change]) => [seq, change.state]));
          expect(states).toEqual(new Map([...model.changes].map(([seq, change]) => [seq, change.state])));
          expect([...states.values()].filter((it) => it === "adopted" || it === "entered").length).toBeLessThanOrEqual(
            1,
          );
        }
        expect(bench.ledger.problems).toEqual([]);
        expect(replay(bench.entries)).toEqual(bench.ledger);
      }),
      { numRuns: 300 },
    );
  });
});

describe("names of proposals and changes", () => {
  it("are entry numbers, and read back", () => {
    expect([proposalId(42), changeId(43), changeId(1_234_567)]).toEqual(["p-000042", "c-000043", "c-1234567"]);
    expect([parseProposalId("p-000042"), parseProposalId(" P42 "), parseChangeId("c-1234567")]).toEqual([
      42, 42, 1_234_567,
    ]);
  });
  it.each([
    ["42", "not-a-change"],
    ["p-000042", "not-a-change"],
    ["c-", "not-a-change"],
    ["c-1x", "not-a-change"],
    ["c--1", "not-a-change"],
  ])("refuse %s", (text, expected) => {
    expect(code(() => parseChangeId(text))).toBe(expected);
  });
});
