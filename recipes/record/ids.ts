/**
 * Names of proposals and changes as people type them: "p-000042" is the proposal in entry 42, "c-000043" the change
 * opened by entry 43. More than six digits when the book has more than a million entries.
 */
import { refuse } from "../../engine/index.ts";

/** "p-000042" */
export function proposalId(entry: number): string {
  return `p-${String(entry).padStart(6, "0")}`;
}

/** "c-000043" */
export function changeId(entry: number): string {
  return `c-${String(entry).padStart(6, "0")}`;
}

const WORDS = { p: "proposal", c: "change" } as const;

function parseId(text: string, letter: "p" | "c"): number {
  const match = /^([pc])-?(\d{1,12})$/i.exec(text.trim());
  const word = WORDS[letter];
  const example = letter === "p" ? proposalId(42) : changeId(43);
  if (!match) return refuse(`not-a-${word}`, `"${text}" is not a ${word}`, { hint: `a ${word} looks like ${example}` });
  const given = match[1].toLowerCase() as "p" | "c";
  if (given !== letter) {
    return refuse(`not-a-${word}`, `"${text}" is a ${WORDS[given]}, a ${word} is needed`, {
      hint: `a ${word} looks like ${example}`,
    });
  }
  return Number(match[2]);
}

/** Entry number of a proposal ("p-000042", "p-42", "p42"). Throws `not-a-proposal`. */
export function parseProposalId(text: string): number {
  return parseId(text, "p");
}

/** Entry number of a change ("c-000043"). Throws `not-a-change`. */
export function parseChangeId(text: string): number {
  return parseId(text, "c");
}
