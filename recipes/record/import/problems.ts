/** All that is wrong with a file to be imported, each thing by row and column; many at once, since files have many rows. */
import { type Problem, Refusal } from "../../../engine/index.ts";

/** More than a person reads; the rest is counted. */
export const MOST_PROBLEMS = 50;

export class Problems {
  private readonly list: Problem[] = [];
  private more = 0;
  readonly file: string;

  constructor(file: string) {
    this.file = file;
  }

  get any(): boolean {
    return this.list.length > 0;
  }

  /** All of them, those not kept included. */
  get count(): number {
    return this.list.length + this.more;
  }

  /** `row` and `column` count from 1, the heading's row included. */
  add(code: string, message: string, place: { row?: number; column?: number; hint?: string } = {}): void {
    if (this.list.length >= MOST_PROBLEMS) this.more++;
    else this.list.push({ code, message, file: this.file, ...place });
  }

  /** Takes over the problems of a refusal, giving them a place. Other errors are thrown on. */
  take(error: unknown, place: { row?: number; column?: number }): void {
    if (!(error instanceof Refusal)) throw error;
    for (const { code, message, hint } of error.problems)
      this.add(code, message, { ...place, ...(hint ? { hint } : {}) });
  }

  /** True when `check` refuses nothing; what it refuses is taken over with this place. */
  tried(place: { row?: number; column?: number }, check: () => unknown): boolean {
    try {
      check();
      return true;
    } catch (error) {
      this.take(error, place);
      return false;
    }
  }

  /** Throws a Refusal with all of it, if there is any. */
  throwIfAny(): void {
    if (!this.any) return;
    const rest = { code: "more-problems", message: `and ${this.more} more problems`, file: this.file };
    throw new Refusal(this.more > 0 ? [...this.list, rest] : this.list);
  }
}
