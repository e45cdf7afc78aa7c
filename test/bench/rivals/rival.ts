/**
 * Outside competitors of the benches: processes written in another language that read a problem, then do it as often as they
 * are told and say how long it took by their own clock, so that neither starting nor the pipe counts. One process a bench,
 * started when first asked and waiting between rounds, ended with the bench. What the machine lacks is a reason to skip.
 */
import { type ChildProcess, spawn, spawnSync } from "node:child_process";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { createInterface } from "node:readline";
import type { Way } from "../harness.ts";

/** How to start a competitor, or why it cannot be started here. */
export type Program = CanStart | { skip: string };

interface CanStart {
  command: string;
  args: readonly string[];
  skip?: undefined;
  /** Takes what was compiled away again; done when this process exits by itself, too. */
  remove?(): void;
}

/** Flags a C programmer after speed would use: this machine's instructions, vectors through the library's sine and cosine. */
export const FASTEST_C: readonly string[] = ["-O3", "-march=native", "-ffast-math"];

/** Compiles a C file into a folder of its own that goes when this process does. Throws when gcc is there and refuses. */
export function compiledC(file: string, flags: readonly string[] = FASTEST_C): Program {
  if (spawnSync("gcc", ["--version"]).error) return { skip: "gcc is not installed (Debian package gcc)" };
  const folder = mkdtempSync(join(tmpdir(), "coatwright-rival-"));
  const remove = () => rmSync(folder, { recursive: true, force: true });
  process.on("exit", remove);
  const command = join(folder, "rival");
  const { status, stderr } = spawnSync("gcc", ["-std=gnu11", ...flags, "-o", command, file, "-lm"], {
    encoding: "utf8",
  });
  if (status !== 0) throw new Error(`gcc ended with ${status}: ${stderr}`);
  return { command, args: [], remove };
}

/** A Python file that needs numpy. */
export function numpyProgram(file: string): Program {
  const asked = spawnSync("python3", ["-c", "import numpy"]);
  if (asked.error) return { skip: "python3 is not installed (Debian packages python3, python3-numpy)" };
  if (asked.status !== 0) return { skip: "numpy is not installed for python3 (Debian package python3-numpy)" };
  return { command: "python3", args: [file] };
}

/** A competitor at work: answers lines with lines. */
export interface Rival extends Way {
  /** Every result of the problem. */
  answer(): Promise<number[]>;
  close(): void;
}

/**
 * `program` on `problem` as a way that does the work `goes` times a run; one go is `each` pieces of work, for instance as
 * many spectra as the problem has stacks. The problem is written when the way is first asked.
 */
export function rival(name: string, program: Program, problem: () => string, goes: number, each = 1): Rival {
  let child: ChildProcess | undefined;
  let answers: AsyncIterator<string> | undefined;
  let complaint = "";

  function start(): ChildProcess {
    if (program.skip !== undefined) throw new Error(`${name}: ${program.skip}`);
    const started = spawn(program.command, program.args, { stdio: ["pipe", "pipe", "pipe"] });
    complaint = "";
    started.on("error", (error) => {
      complaint += error.message;
    });
    // A process that is gone closes its pipe; what it said on standard error tells why, not the broken pipe.
    started.stdin.on("error", () => undefined);
    started.stderr.on("data", (text) => {
      complaint += text;
    });
    answers = createInterface({ input: started.stdout })[Symbol.asyncIterator]();
    started.stdin.write(problem());
    child = started;
    return started;
  }

  async function ask(line: string): Promise<string> {
    const asked = child ?? start();
    asked.stdin?.write(`${line}\n`);
    const reply = await answers?.next();
    if (!reply || reply.done) {
      child = undefined;
      throw new Error(`${name} ended without an answer to "${line}": ${complaint.trim() || "it said nothing"}`);
    }
    return reply.value;
  }

  return {
    name,
    repeats: goes * each,
    async run() {
      const [nanoseconds, result] = (await ask(`go ${goes}`)).split(" ").map(Number);
      return { ms: nanoseconds / 1e6, result };
    },
    async answer() {
      await ask("go 1");
      return (await ask("answer")).trim().split(" ").map(Number);
    },
    close() {
      child?.stdin?.end();
      child = undefined;
    },
  };
}

/** Throws at the first place where two lists of results are further apart than `tolerance`, or of different length. */
export function agree(ours: ArrayLike<number>, theirs: ArrayLike<number>, tolerance: number, who: string): void {
  if (ours.length !== theirs.length) throw new Error(`${who}: ${theirs.length} results for ${ours.length}`);
  for (let i = 0; i < ours.length; i++) {
    if (!(Math.abs(ours[i] - theirs[i]) < tolerance)) throw new Error(`${who} at ${i}: ${theirs[i]} for ${ours[i]}`);
  }
}
