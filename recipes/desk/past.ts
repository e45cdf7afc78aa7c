/**
 * The line as it was known at an earlier moment: today's line file over the first entries of the book, in the order they
 * were entered, whenever they happened. What a reading that came late or a correction would have changed is not known yet.
 */
import type { CoatedWafer } from "../../engine/index.ts";
import type { Line } from "../line/line.ts";
import type { AnyEntry } from "../record/entries.ts";
import { emptyLedger, extend, type Ledger } from "../record/ledger.ts";
import { Workspace } from "./workspace.ts";

export class Past extends Workspace {
  private readonly known: Ledger = emptyLedger();
  private readonly clock: { ms: number };

  constructor(private readonly today: Workspace) {
    const clock = { ms: 0 };
    super(today.folder, { ...today.ports, now: () => clock.ms });
    this.clock = clock;
  }

  override get line(): Line {
    return this.today.line;
  }

  override get wafer(): CoatedWafer {
    return this.today.wafer;
  }

  override get ledger(): Ledger {
    return this.known;
  }

  /** The next entry is entered; entries come in the order of the book. */
  enter(entry: AnyEntry): void {
    extend(this.known, entry);
  }

  /** It is now this moment, ms since 1970. */
  at(ms: number): void {
    this.clock.ms = ms;
  }
}
