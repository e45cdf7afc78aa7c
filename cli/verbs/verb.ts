/** What a verb is: one row of the table that feeds parsing, help and the JSON conversation. */
import type { Ports, Workspace } from "../../recipes/index.ts";
import type { Args } from "../args.ts";

export interface Word {
  name: string;
  needed: boolean;
  what: string;
}

export interface Flag {
  name: string;
  kind: "text" | "switch" | "settings";
  /** Placeholder in the help: "NAME", "84.1nm". */
  shows: string;
  what: string;
  needed?: boolean;
}

/** When it happened and who did it, from --at and --by. */
export interface Stamped {
  at?: string;
  by?: string;
  dryRun: boolean;
}

export interface Call {
  args: Args;
  ports: Ports;
  /** The line folder named or found; refuses when there is none. */
  workspace(): Workspace;
  stamp(): Stamped;
  /** A file the caller named, relative to where the program was started. */
  readFile(path: string): Uint8Array;
  /** A path the caller named, made absolute. */
  resolve(path: string): string;
}

export interface Outcome {
  /** The --json document, without `schema`. */
  document: Record<string, unknown>;
  /** For people, on stdout. */
  text: string;
  /** For people, on stderr. */
  notices?: readonly string[];
  /** 3: done, and the answer is no. */
  exit?: 0 | 3;
}

export interface Verb {
  name: string;
  does: string;
  words: readonly Word[];
  /** Words that may follow, as many as there are. */
  rest?: Word;
  flags: readonly Flag[];
  examples: readonly string[];
  writes: boolean;
  run(call: Call): Promise<Outcome> | Outcome;
}

export const word = (name: string, what: string, needed = true): Word => ({ name, what, needed });
export const flag = (name: string, shows: string, what: string, needed = false): Flag => ({
  name,
  kind: "text",
  shows,
  what,
  needed,
});
export const toggle = (name: string, what: string): Flag => ({ name, kind: "switch", shows: "", what });
export const settingsFlag = (what: string, needed = false): Flag => ({
  name: "set",
  kind: "settings",
  shows: "k=v",
  what,
  needed,
});
export const chamberFlag = (needed = true): Flag => flag("chamber", "NAME", "the chamber", needed);
