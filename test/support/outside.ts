/**
 * Runs programs for the slow tests, as a person would from a shell: in a folder of its own, with a home and a scratch
 * folder of its own, so that nothing of the machine's user is read or touched.
 */
import { spawnSync } from "node:child_process";
import { mkdirSync, mkdtempSync, realpathSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";

export interface Ran {
  status: number | null;
  stdout: string;
  stderr: string;
}

/** An empty folder and how to remove it. */
export function emptyFolder(): { path: string; remove(): void } {
  // Resolved, because the system's scratch folder may be a link, and programs report where they really are.
  const path = realpathSync(mkdtempSync(join(tmpdir(), "coatwright-")));
  return { path, remove: () => rmSync(path, { recursive: true, force: true }) };
}

/** The environment of a person who has just got the machine: home and scratch inside `folder`, no colour or CI settings. */
export function freshEnvironment(folder: string): NodeJS.ProcessEnv {
  const home = join(folder, "home");
  const scratch = join(folder, "scratch");
  for (const path of [home, scratch]) mkdirSync(path, { recursive: true });
  const left = ["CI", "DEV", "NODE_ENV", "NODE_OPTIONS", "NO_COLOR", "FORCE_COLOR", "INIT_CWD"];
  const kept = Object.entries(process.env).filter(
    ([name]) => !left.includes(name) && !/^(XDG_|npm_|VITEST|COATWRIGHT)/.test(name),
  );
  return { ...Object.fromEntries(kept), HOME: home, USERPROFILE: home, TMPDIR: scratch };
}

/** Runs a program without a terminal, its input empty, and waits. Throws when it cannot be started or takes over `seconds`. */
export function outside(
  program: string,
  words: readonly string[],
  { cwd, env, seconds = 300 }: { cwd: string; env?: NodeJS.ProcessEnv; seconds?: number },
): Ran {
  const ran = spawnSync(program, words, { cwd, env, encoding: "utf8", input: "", timeout: seconds * 1000 });
  if (ran.error) throw ran.error;
  return { status: ran.status, stdout: ran.stdout, stderr: ran.stderr };
}

/** As `outside`, and throws with what the program said unless it ends well. Returns its output. */
export function mustRun(program: string, words: readonly string[], options: Parameters<typeof outside>[2]): string {
  const { status, stdout, stderr } = outside(program, words, options);
  if (status !== 0) throw new Error(`${program} ${words.join(" ")} ended with ${status}:\n${stdout}\n${stderr}`);
  return stdout;
}
