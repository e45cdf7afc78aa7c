/**
 * Refusals as data: every input the program cannot honour becomes one or more Problems, with a stable code, the place
 * and what would be right. Thrown as a Refusal; turned into words and exit codes in one place only, `cli/`.
 */

/** One thing that is wrong. `code` is stable (people script against it); row and column count from 1. */
export interface Problem {
  code: string;
  message: string;
  file?: string;
  row?: number;
  column?: number;
  hint?: string;
}

/** The only error the rooms throw on purpose. Holds at least one Problem; the first one gives code and message. */
export class Refusal extends Error {
  readonly problems: readonly Problem[];
  constructor(problems: readonly [Problem, ...Problem[]] | readonly Problem[]) {
    super(problems[0]?.message ?? "refused");
    this.name = "Refusal";
    this.problems = problems;
  }
  get code(): string {
    return this.problems[0]?.code ?? "refused";
  }
}

/** Throws a Refusal with a single problem. */
export function refuse(code: string, message: string, more: Omit<Problem, "code" | "message"> = {}): never {
  throw new Refusal([{ code, message, ...more }]);
}

/** Returns the value if it is a finite number, else refuses, naming it. */
export function finite(value: number, name: string): number {
  if (!Number.isFinite(value)) refuse("not-a-number", `${name} is ${value}, a finite number is needed`);
  return value;
}
