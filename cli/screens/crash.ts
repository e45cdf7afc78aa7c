/**
 * What is left of a crash: a short id for the person, the trace in a file of the user's state folder.
 */
import { mkdirSync, writeFileSync } from "node:fs";
import { isAbsolute, join } from "node:path";

type Environment = Readonly<Record<string, string | undefined>>;

/** The folder for state by the XDG base directory rules; null when no home is known. Relative paths are ignored. */
export function stateFolder(env: Environment): string | null {
  const declared = env["XDG_STATE_HOME"];
  if (declared !== undefined && isAbsolute(declared)) return join(declared, "coatwright");
  const home = env["HOME"];
  return home !== undefined && isAbsolute(home) ? join(home, ".local", "state", "coatwright") : null;
}

/** Writes the trace; returns the sentence for the person. Never throws. */
export function noteCrash(error: unknown, env: Environment, at: Date): string {
  const id = at.getTime().toString(36).slice(-6);
  const trace = error instanceof Error ? (error.stack ?? error.message) : String(error);
  const message = error instanceof Error ? error.message : String(error);
  const folder = stateFolder(env);
  try {
    if (folder === null) throw new Error("no state folder");
    mkdirSync(folder, { recursive: true, mode: 0o700 });
    const file = join(folder, `crash-${id}.txt`);
    writeFileSync(file, `${at.toISOString()}\n${trace}\n`, { mode: 0o600 });
    return `coatwright stopped on a fault of its own (${id}): ${message}\nThe book is untouched. The trace is in ${file}`;
  } catch {
    return `coatwright stopped on a fault of its own (${id}): ${message}\nThe book is untouched.\n${trace}`;
  }
}
