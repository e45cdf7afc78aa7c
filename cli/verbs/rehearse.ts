/**
 * The verb `rehearse`: this tool beside the usual practices, on virtual chambers or over the line's own book. Its --json
 * documents are those of `recipes/desk/rehearsing.ts` (scenarios[], each with practices[]) and of the replay.
 */
import { availableParallelism } from "node:os";
import { Refusal, refuse } from "../../engine/index.ts";
import { rehearsing } from "../../recipes/index.ts";
import type { Args } from "../args.ts";
import { rehearsalText } from "../text/rehearse.ts";
import { replayText } from "../text/replay.ts";
import { sealedText, sealText } from "../text/shadow.ts";
import { type Call, chamberFlag, flag, type Outcome, toggle, type Verb } from "./verb.ts";

const USUAL_WORLDS = 20;
/** Fewer worlds than this are played before anybody asks how far they are. */
const FEW = 10;
const USUAL_SEED = "rehearsal";

function count(args: Args, name: string, usual: number): number {
  const text = args.text(name);
  if (text === undefined) return usual;
  const number = Number(text);
  if (!(Number.isInteger(number) && number >= 1 && number <= 100_000))
    refuse("bad-argument", `--${name} is ${text}, a whole number from 1 on is needed`);
  return number;
}

const names = (text: string | undefined) =>
  (text ?? "")
    .split(",")
    .map((name) => name.trim())
    .filter((name) => name !== "");

/** On stderr, so that stdout holds the answer alone: in place on a terminal, now and then a line elsewhere. */
function progressOf(all: number): (back: number) => void {
  const every = Math.max(1, Math.round(all / 10));
  return (back) => {
    if (process.stderr.isTTY) process.stderr.write(`\r${back} of ${all} worlds${back === all ? "\n" : ""}`);
    else if (all >= FEW && (back % every === 0 || back === all)) process.stderr.write(`${back} of ${all} worlds\n`);
  };
}

async function onWorlds(args: Args): Promise<Outcome> {
  const desk = await rehearsing();
  for (const name of ["scenario", "practices"])
    if (args.has(name) && names(args.text(name)).length === 0) refuse("bad-argument", `--${name} names nothing`);
  const asked = desk.rehearsalOf({
    scenarios: args.text("scenario") === undefined ? ["base"] : names(args.text("scenario")),
    practices: names(args.text("practices")),
    seed: args.text("seed") ?? USUAL_SEED,
    worlds: count(args, "worlds", USUAL_WORLDS),
  });
  const worlds = desk.worldsOf(asked);
  const { playWorlds } = await import("../rehearse-workers.ts");
  const played = await playWorlds(worlds, count(args, "workers", availableParallelism()), progressOf(worlds.length));
  const board = desk.scoreboard(asked, played);
  return {
    document: { seed: asked.seed, worlds: asked.worlds, ...desk.scoreboardDocument(board) },
    text: rehearsalText(board, { ascii: args.switch("ascii") }),
  };
}

/** Seals what the next measured run will read, or counts what became of the seals. */
async function inShadow(call: Call): Promise<Outcome> {
  const desk = await rehearsing();
  const ws = call.workspace();
  if (call.args.switch("count")) {
    const seals = desk.countSeals(ws, call.args.text("chamber"));
    const count = desk.sealCount(seals);
    const broken = count.fates.altered + count.fates.missing > 0;
    return { document: desk.sealCountDocument(seals, count), text: sealText(count), exit: broken ? 3 : 0 };
  }
  const { dryRun, ...draft } = call.stamp();
  const chamber = call.args.need("chamber");
  const { hash, document, notices, receipts } = await desk.seal(ws, { chamber, dryRun, draft });
  const { schema: _, ...rest } = document;
  return { document: { hash, entry: receipts[0]?.seq ?? null, ...rest }, text: sealedText(hash, document), notices };
}

/** Over the line's own book: the chamber named, or every one with enough measured runs. */
async function onBook(call: Call): Promise<Outcome> {
  const desk = await rehearsing();
  const ws = call.workspace();
  if (ws.book.damage.length > 0) throw new Refusal(ws.book.problems());
  const named = call.args.text("chamber");
  const chambers = named === undefined ? desk.replayable(ws) : [named];
  const replays = chambers.map((chamber) => {
    const replay = desk.replayChamber(ws, chamber);
    return { replay, summary: desk.summaryOf(replay) };
  });
  return {
    document: { replays: replays.map(({ replay, summary }) => desk.replayDocument(replay, summary)) },
    text: replays.map(({ replay, summary }) => replayText(replay, summary)).join("\n\n"),
  };
}

export const rehearseVerbs: Verb[] = [
  {
    name: "rehearse",
    does: "closed-loop rehearsal on virtual chambers: this tool beside the usual practices",
    words: [],
    flags: [
      flag("scenario", "NAME,..", "what happens to the chamber: base when left out, all for every one"),
      flag("worlds", "N", `invented lines per scenario, ${USUAL_WORLDS} when left out`),
      flag("seed", "TEXT", "another seed draws other lines"),
      flag("practices", "NAME,..", "only these practices"),
      flag("workers", "N", "threads; as many as there are cores when left out"),
      toggle("replay", "over the line's own book instead: what was expected of each run before it was read"),
      toggle("shadow", "seal what the next measured run of --chamber will read, before it is made"),
      toggle("count", "with --shadow: what became of the sealed predictions"),
      chamberFlag(false),
    ],
    examples: [
      "coatwright rehearse",
      "coatwright rehearse --scenario base,tight --worlds 100",
      "coatwright rehearse --replay --chamber A2",
      "coatwright rehearse --shadow --chamber A2",
      "coatwright rehearse --shadow --count",
    ],
    writes: true,
    run: (call) => {
      const { args } = call;
      const [replay, shadow] = [args.switch("replay"), args.switch("shadow")];
      if (replay && shadow) refuse("bad-argument", "--replay and --shadow are two things; ask for one");
      if (args.switch("count") && !shadow) refuse("bad-argument", "--count goes with --shadow");
      if (!replay && !shadow) {
        if (args.has("chamber"))
          refuse("bad-argument", "--chamber goes with --replay and --shadow; virtual chambers have no names");
        return onWorlds(args);
      }
      for (const name of ["scenario", "worlds", "seed", "practices", "workers"])
        if (args.has(name)) refuse("bad-argument", `--${name} has no part in what the line's own book says`);
      return replay ? onBook(call) : inShadow(call);
    },
  },
];
