/** One verb performed: arguments to outcome, and every Refusal to words, JSON and an exit code. The only place that maps codes. */
import { type Problem, Refusal, refuse } from "../engine/index.ts";
import {
  fileRefusal,
  formatWhen,
  holdsLine,
  LINE_FILE,
  type Ports,
  parseWhen,
  safeText,
  Workspace,
} from "../recipes/index.ts";
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
  if (world.ports.files.isFolder(`${folder}/${LINE_FILE}`))
    refuse("not-a-file", `${LINE_FILE} is a folder, a file is needed`, {
      file: LINE_FILE,
      hint: "move the folder away",
    });
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
      const { book, line } = call.workspace();
      // Nothing can be written to it, so nothing is tried on half of it either.
      if (book.damage.length > 0) throw new Refusal(book.problems());
      const at = args.text("at");
      const ms = at === undefined ? undefined : whenOf(at, line.timeZone, world.ports.now());
      return {
        at: ms === undefined ? undefined : new Date(ms).toISOString(),
        by: personNamed(args.text("by")),
        dryRun: args.switch("dry-run"),
      };
    },
    readFile: world.readFile,
    resolve: world.resolve,
  };
  try {
    return await verb.run(call);
  } catch (error) {
    throw asRefusal(error);
  }
}

/** Clocks of two machines differ by so much. */
const aheadMs = 5 * 60_000;
/** A time without a date is yesterday's only where that is nearer than today's: a night shift after midnight. */
const halfDayMs = 12 * 3_600_000;

/** --at as ms since 1970. Refuses `future-time`, and what `parseWhen` refuses. */
function whenOf(at: string, timeZone: string, nowMs: number): number {
  const ms = parseWhen(at, { timeZone, nowMs });
  const day = (one: number) => formatWhen(one, timeZone).slice(0, 10);
  const hint = "the book holds what happened";
  if (ms > nowMs + aheadMs) refuse("future-time", `--at ${at} lies in the future`, { hint });
  if (!/\d-\d/.test(at) && day(ms) !== day(nowMs) && ms < nowMs - halfDayMs)
    refuse("future-time", `--at ${at} lies in the future`, {
      hint: `${hint}; write ${formatWhen(ms, timeZone).replace(" ", "T")} for yesterday`,
    });
  return ms;
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

/** What the file system answered where nobody expected it is no fault of the program: a folder for a file, say. */
export function asRefusal(error: unknown): unknown {
  if (!(error instanceof Error && "syscall" in error && "code" in error)) return error;
  if ("path" in error && typeof error.path === "string") return fileRefusal(error, `use ${error.path}`, error.path);
  // a read, unlike an opening, does not say of what
  return new Refusal(fileRefusal(error, "read a file", "").problems.map(({ file: _, ...problem }) => problem));
}

export function errorText(error: unknown): string {
  if (error instanceof Refusal) return error.problems.map(problemText).join("\n");
  return `a fault of the program: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}`;
}
