/** A ledger that grows entry by entry without files: drafts become entries as the book would make them. */
import type { AnyDraft, AnyEntry, EntryData, Quantity, StepSettings } from "../../recipes/record/entries.ts";
import { encodeEntry } from "../../recipes/record/format.ts";
import { basisHash, emptyLedger, extend, type Ledger } from "../../recipes/record/ledger.ts";

export const NOON = Date.UTC(2026, 2, 1, 12);
const MINUTE = 60_000;

export function steps(silane: number, time = 560): StepSettings[] {
  return [{ settings: { silane: { value: silane, unit: "sccm" }, time: { value: time, unit: "s" } } }];
}
const flat = (list: StepSettings[]): Record<string, Quantity> => list[0].settings;

export class Bench {
  readonly ledger: Ledger = emptyLedger();
  readonly entries: AnyEntry[] = [];
  private minute = 0;

  /** Adds an entry a minute after the one before, or at `at` (minutes after noon). Returns its number. */
  add(draft: AnyDraft, at?: number): number {
    this.minute++;
    const entered = new Date(NOON + this.minute * MINUTE).toISOString();
    const when = at === undefined ? {} : { at: new Date(NOON + at * MINUTE).toISOString() };
    const { entry } = encodeEntry(
      { ...draft, ...when },
      { seq: this.entries.length, entered, by: "Ana", prev: this.ledger.head },
    );
    this.entries.push(entry);
    extend(this.ledger, entry);
    return entry.seq;
  }
  get nowMs(): number {
    return NOON + this.minute * MINUTE;
  }
  get basis(): string {
    return basisHash(this.ledger, "A2", "blue", "tuning", "line");
  }

  run(silane: number, more: Partial<EntryData["run"]> = {}, at?: number): number {
    const readings = [{ gauge: "ellipsometer", on: "polished" as const, index: 2.04, thickness_nm: 84 }];
    const data = { chamber: "A2", recipe: "blue", settings_from: "given", steps: steps(silane), count: 1, readings };
    return this.add({ kind: "run", data: { ...data, ...more } }, at);
  }
  recipe(silane: number, at?: number, chamber = "A2"): number {
    return this.add({ kind: "recipe", data: { chamber, recipe: "blue", steps: steps(silane) } }, at);
  }
  propose(before: number, after: number, advice = "change"): number {
    const document = {
      advice,
      before: flat(steps(before)),
      after: flat(steps(after)),
      predicted: { index: { mean: 2.06 } },
    };
    const data = { chamber: "A2", recipe: "blue", basis: this.basis, document, goal: {}, window: [] };
    return this.add({ kind: "proposal", data });
  }
}
