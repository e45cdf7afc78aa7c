/** One verb performed: arguments to outcome, and every Refusal to words, JSON and an exit code. The only place that maps codes. */
import { type Problem, Refusal, refuse } from "../engine/index.ts";
import { holdsLine, type Ports, parseWhen, safeText, Workspace } from "../recipes/index.ts";
import type { Args } from "./args.ts";
import type { Call, Outcome, Stamped, Verb } from "./verbs/verb.ts";

export interface World {
  ports: Ports;
  /** Where the program was started. */
  cwd: string;
  resolve(path: string): string;
  readFile(path: string): Uint8Array;
  /** Workspaces already open, by folder; kept over a conversation. */
  open: Map<string, Workspace>;
}

export function workspaceFor(world: World, line: string | undefined): Workspace {
  const folder = world.resolve(line ?? ".");
  let ws = world.open.get(folder);
  if (ws) ws.refresh();
  else {
    ws = new Workspace(folder, world.ports);
    if (!holdsLine(folder, world.ports)) void ws.line; // refuses with what would be right
    world.open.set(folder, ws);
  }
  return ws;
}

export async function perform(verb: Verb, args: Args, world: World, line: string | undefined): Promise<Outcome> {
  let workspace: Workspace | null = null;
  const call: Call = {
    args,
    ports: world.ports,
    workspace: () => {
      workspace ??= workspaceFor(world, line);
      return workspace;
    },
    stamp: (): Stamped => {
      const at = args.text("at");
      const ms =
        at === undefined
          ? undefined
          : parseWhen(at, { timeZone: call.workspace().line.timeZone, nowMs: world.ports.now() });
      if (ms !== undefined && ms > world.ports.now() + 5 * 60_000)
        refuse("future-time", `--at ${at} lies in the future`, {
          hint: "the book holds what happened; write the date for a time of yesterday, as 2026-03-11T23:40",
        });
      return {
        at: ms === undefined ? undefined : new Date(ms).toISOString(),
        by: personNamed(args.text("by")),
        dryRun: args.switch("dry-run"),
      };
    },
    readFile: world.readFile,
    resolve: world.resolve,
  };
  return verb.run(call);
}

/** --by: a name people can read, or nothing. */
function personNamed(by: string | undefined): string | undefined {
  if (by === undefined) return undefined;
  const name = by.trim();
  if (name === "" || name.length > 100 || safeText(name) !== name)
    refuse("bad-name", `--by "${safeText(by)}" is not a name`, { hint: "1 to 100 printable characters" });
  return name;
}

const exits: Record<string, number> = {
  locked: 4,
  "damaged-book": 3,
  "unsafe-after-fsync": 1,
};

export const exitOf = (refusal: Refusal): number => exits[refusal.code] ?? 2;

/** The JSON of a failure, as the contract has it; more than one problem are listed beside. */
export function errorDocument(error: unknown): Record<string, unknown> {
  if (!(error instanceof Refusal))
    return {
      error: {
        code: "fault",
        message: `a fault of the program: ${error instanceof Error ? error.message : String(error)}`,
      },
    };
  const [first] = error.problems;
  return { error: { ...first, ...(error.problems.length > 1 ? { problems: error.problems } : {}) } };
}

export function problemText(p: Problem): string {
  const where = [p.file, p.row, p.column].filter((v) => v !== undefined).join(":");
  const lines = [`${where ? `${where}: ` : ""}${p.message}`, ...(p.hint ? [`  ${p.hint}`] : [])];
  return lines.map(safeText).join("\n");
}

export function errorText(error: unknown): string {
  if (error instanceof Refusal) return error.problems.map(problemText).join("\n");
  return `a fault of the program: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}`;
}
