/** What the tests of `recipes/line` share: the example line file, ways to change it, and ways to look at a refusal. */
import { readFileSync } from "node:fs";
import { type Problem, Refusal } from "../../../engine/index.ts";
import type { Line } from "../../../recipes/line/line.ts";
import { type LineDoors, readLine } from "../../../recipes/line/read-line.ts";

/** The example of the published contract, numbers unchanged. */
export const EXAMPLE = readFileSync(new URL("../../fixtures/line/contract.yaml", import.meta.url), "utf8");

/** The example with one passage replaced; fails when the passage is not there, so that a test cannot miss its point. */
export function changed(from: string, to: string, text = EXAMPLE): string {
  if (!text.includes(from)) throw new Error(`the example does not hold ${JSON.stringify(from)}`);
  return text.replace(from, () => to);
}

export function lineOf(text = EXAMPLE, doors: LineDoors = {}): Line {
  return readLine(text, "line.yaml", doors);
}

/** The problems of an act that refuses; empty when it does not refuse. */
export function problemsOf(act: () => unknown): readonly Problem[] {
  try {
    act();
  } catch (error) {
    if (error instanceof Refusal) return error.problems;
    throw error;
  }
  return [];
}

/** "code row:column" of every problem of a line file. */
export function placesOf(text: string, doors: LineDoors = {}): string[] {
  return problemsOf(() => lineOf(text, doors)).map(({ code, row, column }) => `${code} ${row}:${column}`);
}
