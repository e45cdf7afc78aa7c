/**
 * The program: builds the real ports, finds the verb, performs it, prints. No verb opens the screens, or prints the
 * overview where there is no terminal.
 */
import "./tiering.ts";
import { mkdtempSync, readFileSync, rmSync, writeSync } from "node:fs";
import { tmpdir } from "node:os";
import { join, resolve } from "node:path";
import { Refusal, refuse } from "../engine/index.ts";
import { creating, holdsLine, overview, type Workspace } from "../recipes/index.ts";
import { argsFromWords } from "./args.ts";
import { converse } from "./converse.ts";
import { asRefusal, errorDocument, errorText, exitOf, perform, type World, workspaceFor } from "./perform.ts";
import { realPorts } from "./ports.ts";
import { generalHelp, verbHelp } from "./text/help.ts";
import { findVerb } from "./verbs/table.ts";

declare const COATWRIGHT_VERSION: string;

const world: World = {
  ports: realPorts(),
  cwd: process.cwd(),
  resolve: (path) => resolve(process.cwd(), path),
  readFile: (path) => {
    if (path.trim() === "") refuse("no-file", "no file is named");
    try {
      return readFileSync(resolve(process.cwd(), path));
    } catch (error) {
      const code = (error as NodeJS.ErrnoException).code;
      return refuse(
        "no-file",
        code === "ENOENT"
          ? `there is no file ${path}`
          : code === "EISDIR"
            ? `${path} is a folder, a file is needed`
            : `${path} cannot be read (${code})`,
        {
          file: path,
        },
      );
    }
  },
  open: new Map(),
};

/** --line DIR, wherever it stands; the other words stay. */
function lineFlag(argv: readonly string[]): string | undefined {
  const at = argv.findIndex((w) => w === "--line" || w.startsWith("--line="));
  if (at < 0) return undefined;
  const word = argv[at];
  return word === "--line" ? argv[at + 1] : word.slice("--line=".length);
}

async function main(argv: string[]): Promise<number> {
  const json = argv.includes("--json");
  try {
    const first = argv.findIndex((w, i) => !w.startsWith("-") && argv[i - 1] !== "--line");
    if (first < 0) return await bare(argv);
    if (argv[first] === "help") return help(argv.slice(first + 1).filter((w) => !w.startsWith("-")));
    const words = [...argv.slice(first), ...argv.slice(0, first)];
    if (argv[first] === "converse") {
      if (argv.includes("--help")) return help([]);
      await converse(process.stdin, process.stdout, world, lineFlag(argv));
      return 0;
    }
    const { verb, rest } = findVerb(words);
    if (argv.includes("--help") || argv.includes("-h")) return say(verbHelp(verb));
    const args = argsFromWords(verb, rest);
    const outcome = await perform(verb, args, world, args.text("line"));
    for (const notice of outcome.notices ?? []) process.stderr.write(`${notice}\n`);
    process.stdout.write(
      json
        ? `${JSON.stringify({ schema: 1, ...outcome.document }, null, 2)}\n`
        : `${outcome.text.replace(/\n$/, "")}\n`,
    );
    return outcome.exit ?? 0;
  } catch (caught) {
    const error = asRefusal(caught);
    if (json) process.stdout.write(`${JSON.stringify({ schema: 1, ...errorDocument(error) }, null, 2)}\n`);
    process.stderr.write(`${errorText(error)}\n`);
    return error instanceof Refusal ? exitOf(error) : 1;
  }
}

function say(text: string): number {
  process.stdout.write(`${text}\n`);
  return 0;
}

function help(words: readonly string[]): number {
  return say(words.length === 0 ? generalHelp() : verbHelp(findVerb(words).verb));
}

/** No verb: the screens on a terminal, the overview as text otherwise. */
async function bare(argv: readonly string[]): Promise<number> {
  if (argv.includes("--version")) return say(COATWRIGHT_VERSION);
  if (argv.includes("--help") || argv.includes("-h")) return help([]);
  const known = ["--json", "--line", "--ascii", "--no-color"];
  const stranger = argv.find((w) => w.startsWith("-") && !known.includes(w.split("=")[0]));
  if (stranger !== undefined) refuse("unknown-flag", `${stranger} is not a flag`, { hint: "coatwright --help" });
  const named = lineFlag(argv);
  const scratch =
    named === undefined && !holdsLine(process.cwd(), world.ports)
      ? mkdtempSync(join(tmpdir(), "coatwright-demo-"))
      : null;
  const forget = () => {
    if (scratch !== null) rmSync(scratch, { recursive: true, force: true });
  };
  process.on("exit", forget);
  const ws: Workspace =
    scratch === null
      ? workspaceFor(world, named)
      : await (await creating()).createLine(scratch, world.ports, { demo: true, timeZone: "UTC", scratch: true });
  const terminal =
    process.stdout.isTTY && process.stdin.isTTY && process.env["TERM"] !== "dumb" && !argv.includes("--json");
  if (terminal) {
    const { openOn } = await import("./screens/open-on.ts");
    process.off("uncaughtException", fault); // the screens have their own, which gives the terminal back first
    return openOn(ws, { env: process.env, noColour: argv.includes("--no-color"), ascii: argv.includes("--ascii") });
  }
  const line = overview(ws);
  if (argv.includes("--json"))
    return say(
      JSON.stringify(
        {
          schema: 1,
          line: line.line,
          chambers: line.chambers.map((c) => ({ chamber: c.chamber, attention: c.attention, says: c.sentence })),
        },
        null,
        2,
      ),
    );
  // Loaded only here: measuring the width of text costs every other verb 50 ms at start.
  const { overviewText } = await import("./text/overview.ts");
  process.stdout.write(
    overviewText(line, { colour: false, ascii: argv.includes("--ascii"), width: process.stdout.columns ?? 100 }),
  );
  if (scratch !== null)
    process.stdout.write(
      "\nThis is the demo line; its data are invented. coatwright new DIR makes your own. In a terminal the same command opens the screens.\n",
    );
  return 0;
}

for (const stream of [process.stdout, process.stderr])
  stream.on("error", (error: NodeJS.ErrnoException) => {
    if (error.code === "EPIPE") process.exit(0); // closed early: the reader has seen enough
    try {
      writeSync(2, `could not print (${error.code}); what was recorded stays recorded\n`);
    } finally {
      process.exit(1);
    }
  });

/** What nobody caught: said in short, for Node would print the bundle's line, which is half a megabyte long. */
function fault(error: unknown): void {
  process.stderr.write(`${errorText(error)}\n`);
  process.exit(1);
}
process.on("uncaughtException", fault);

process.exitCode = await main(process.argv.slice(2));
