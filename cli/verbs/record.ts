/** The verbs that write down what happened: run, record run, reading, recipe, clean, precoat, service, gauge, note. */
import { refuse } from "../../engine/index.ts";
import {
  correcting,
  type ReadingGiven,
  type Recorded,
  type RunGiven,
  recordEvent,
  recordGauge,
  recordNote,
  recordReading,
  recordRecipe,
  recordRun,
} from "../../recipes/index.ts";
import { draftWords } from "./draft-words.ts";
import { readSites } from "./sites.ts";
import { type Call, chamberFlag, flag, type Outcome, settingsFlag, toggle, type Verb, word } from "./verb.ts";

const filmFlags = [flag("index", "2.043", "index at 632.8 nm"), flag("thickness", "84.1nm", "thickness")];
const readFlags = [
  flag("weighted-reflectance", "2.3%", "weighted reflectance read"),
  flag("reflectance-minimum", "604nm", "reflectance minimum read"),
  flag("on", "polished|cell", "what was measured on; a polished witness when left out"),
  flag("gauge", "NAME", "the gauge; the line's only one for it when left out"),
  flag("sites", "FILE.csv", "position,site,index,thickness_nm of each site"),
  flag("spectrum", "FILE.csv", "wavelength_nm,reflectance (or reflectance_percent): kept with the reading"),
];
const runFlags = [
  settingsFlag("a setting the run was made with; those not given come from the recipe in force"),
  ...readFlags,
  flag("recipe", "NAME", "the recipe; may be left out where the chamber runs one"),
  flag("step", "NAME", "the layer, of a recipe with several"),
  flag("boat", "TEXT", "boat or carrier"),
  flag("position", "TEXT", "position in it"),
  flag("since-clean", "37", "the tool's own counter of depositions since the clean"),
  flag("count", "24", "depositions this entry stands for"),
  flag("kind", "tuning|production", "a label, never used by the model"),
  flag("note", "TEXT", "anything worth keeping"),
];

/** What was measured, with the files it names read. */
function readingGiven(call: Call): ReadingGiven {
  const { args } = call;
  const sites = args.text("sites");
  const spectrum = args.text("spectrum");
  return {
    index: args.given("index"),
    thickness: args.given("thickness"),
    weightedReflectance: args.given("weighted-reflectance"),
    reflectanceMinimum: args.given("reflectance-minimum"),
    on: args.text("on"),
    gauge: args.text("gauge"),
    ...(sites ? { sites: readSites(call.readFile(sites), sites) } : {}),
    ...(spectrum ? { spectrum: { file: spectrum, bytes: call.readFile(spectrum) } } : {}),
  };
}

function runGiven(call: Call): RunGiven {
  const { args } = call;
  return {
    ...readingGiven(call),
    chamber: args.need("chamber"),
    set: args.settings("set"),
    recipe: args.text("recipe"),
    step: args.text("step"),
    boat: args.text("boat"),
    position: args.text("position"),
    sinceClean: args.given("since-clean"),
    count: args.given("count"),
    kind: args.text("kind"),
    note: args.text("note"),
  };
}

/** Entry and hash, or what would be written. */
export function recorded(done: Recorded): Outcome {
  const { entry, hash, sentence, notices, drafts, receipts, madeBefore } = done;
  if (entry === null)
    return {
      document: { would_record: drafts },
      text: [...drafts.flatMap(draftWords), sentence].join("\n"),
      notices,
    };
  const entries = receipts.map(({ seq }) => seq);
  const document = {
    entry,
    hash,
    said: sentence,
    ...(entries.length > 1 ? { entries } : {}),
    ...(madeBefore.length > 0 ? { made_before: madeBefore } : {}),
  };
  return { document, text: `recorded #${entries.join(", #")}. ${sentence}`, notices };
}

const run = async (call: Call) => recorded(await recordRun(call.workspace(), runGiven(call), call.stamp()));

export const recordVerbs: Verb[] = [
  {
    name: "run",
    does: "records a measured run: the one typed twenty times a day",
    words: [
      word("chamber", "the chamber"),
      word("index", "index at 632.8 nm on a polished witness, or -", false),
      word("thickness", "thickness in nm, or -", false),
    ],
    flags: runFlags,
    examples: ["coatwright run A2 2.043 84.1", "coatwright run A2 - 84.1 --set time=575s"],
    writes: true,
    run,
  },
  {
    name: "record run",
    does: "records a run with any of its settings and readings",
    words: [],
    flags: [chamberFlag(), ...filmFlags, ...runFlags],
    examples: [
      "coatwright record run --chamber A2 --set time=560s --index 2.043 --thickness 84.1nm --reflectance-minimum 604nm",
      "coatwright record run --chamber A2 --count 24",
    ],
    writes: true,
    run,
  },
  {
    name: "record reading",
    does: "adds a reading that came later to its run; a film read twice counts as the mean of both",
    words: [],
    flags: [
      flag("run", "ENTRY", "number of the entry of the run", true),
      ...filmFlags,
      ...readFlags,
      flag("note", "TEXT", "anything worth keeping"),
    ],
    examples: [
      "coatwright record reading --run 118 --thickness 84.1nm",
      "coatwright record reading --run 118 --reflectance-minimum 604nm --at 23:40",
    ],
    writes: true,
    run: async (call) =>
      recorded(
        await recordReading(
          call.workspace(),
          { ...readingGiven(call), run: call.args.given("run") ?? "", note: call.args.text("note") },
          call.stamp(),
        ),
      ),
  },
  {
    name: "record recipe",
    does: "states what is in force: the first version, or what somebody changed at the tool; corrections add up from here",
    words: [],
    flags: [
      chamberFlag(),
      flag("recipe", "NAME", "the recipe"),
      settingsFlag("its settings", true),
      flag("reason", "TEXT", "why"),
    ],
    examples: [
      "coatwright record recipe --chamber A2 --recipe blue --set silane=812sccm --set ammonia=6900sccm --set time=560s",
    ],
    writes: true,
    run: async (call) => {
      const ws = call.workspace();
      const chamber = call.args.need("chamber");
      const recipe = call.args.text("recipe") ?? ws.recipe(ws.chamber(chamber).name);
      return recorded(
        await recordRecipe(
          ws,
          { chamber, recipe, set: call.args.settings("set"), reason: call.args.text("reason") },
          call.stamp(),
        ),
      );
    },
  },
  {
    name: "record clean",
    does: "starts a new cycle after a chamber clean",
    words: [],
    flags: [chamberFlag(), flag("what", "TEXT", "what was done")],
    examples: ["coatwright record clean --chamber A2 --what 'NF3 clean, new showerhead gasket'"],
    writes: true,
    run: async (call) =>
      recorded(
        await recordEvent(
          call.workspace(),
          { kind: "clean", chamber: call.args.need("chamber"), what: call.args.text("what") },
          call.stamp(),
        ),
      ),
  },
  {
    name: "record precoat",
    does: "records depositions that conditioned the chamber without product",
    words: [],
    flags: [chamberFlag(), flag("count", "N", "how many", true)],
    examples: ["coatwright record precoat --chamber A2 --count 2"],
    writes: true,
    run: async (call) =>
      recorded(
        await recordEvent(
          call.workspace(),
          { kind: "precoat", chamber: call.args.need("chamber"), count: call.args.given("count") ?? 1 },
          call.stamp(),
        ),
      ),
  },
  {
    name: "record service",
    does: "starts a new hardware epoch: a controller swapped, a part replaced",
    words: [],
    flags: [chamberFlag(), flag("what", "TEXT", "what was done", true)],
    examples: ["coatwright record service --chamber A2 --what 'silane controller swapped'"],
    writes: true,
    run: async (call) =>
      recorded(
        await recordEvent(
          call.workspace(),
          { kind: "service", chamber: call.args.need("chamber"), what: call.args.text("what") },
          call.stamp(),
        ),
      ),
  },
  {
    name: "record gauge",
    does: "a reading of a gauge's reference wafer: what the gauge reads too high is taken out of every chamber's readings",
    words: [],
    flags: [
      flag("gauge", "NAME", "the gauge", true),
      toggle("reference", "it is the reference wafer that was read"),
      ...filmFlags,
    ],
    examples: ["coatwright record gauge --gauge ellipsometer --reference --index 2.041 --thickness 84.9nm"],
    writes: true,
    run: async (call) => {
      const { args } = call;
      const given = {
        gauge: args.need("gauge"),
        reference: args.switch("reference"),
        index: args.given("index"),
        thickness: args.given("thickness"),
      };
      return recorded(await recordGauge(call.workspace(), given, call.stamp()));
    },
  },
  {
    name: "record note",
    does: "keeps a note; with --override it overrules one named alarm for some runs, with the evidence as its text",
    words: [],
    flags: [
      flag("text", "TEXT", "the note, or the evidence", true),
      chamberFlag(false),
      flag("override", "ALARM", "the alarm to overrule"),
      flag("runs", "N", "for how many runs"),
    ],
    examples: [
      "coatwright record note --chamber A2 --override index_low --runs 5 --text 'leak check passed at 2e-4 mbar l/s'",
    ],
    writes: true,
    run: async (call) => {
      const alarm = call.args.text("override");
      const override = alarm === undefined ? undefined : { alarm, runs: call.args.given("runs") ?? 5 };
      return recorded(
        await recordNote(
          call.workspace(),
          { chamber: call.args.text("chamber"), text: call.args.need("text"), override },
          call.stamp(),
        ),
      );
    },
  },
  {
    name: "correct",
    does: "a new entry that supersedes a wrong one; what was decided on the old value is marked",
    words: [word("entry", "number of the wrong entry")],
    rest: word(
      "fields",
      "what is right: index=2.043 thickness=84.1nm silane=812sccm count=2 chamber=A1 at=TIME; - takes a value away",
    ),
    flags: [flag("reason", "TEXT", "why", true)],
    examples: ["coatwright correct 118 thickness=84.1nm --reason 'digits swapped'"],
    writes: true,
    run: async (call) => {
      const stamp = call.stamp();
      const entryGiven = call.args.need("entry").trim();
      if (!/^#?\d{1,9}$/.test(entryGiven))
        refuse("no-such-entry", `"${entryGiven}" is not the number of an entry`, { hint: "as in 118, or #118" });
      const number = Number(entryGiven.replace("#", ""));
      const typed = call.args.settings("fields");
      const pairs = Array.isArray(typed)
        ? (typed as readonly string[]).map((one): [string, string] => {
            const at = one.indexOf("=");
            return at > 0
              ? [one.slice(0, at).trim(), one.slice(at + 1)]
              : refuse("not-a-field", `"${one}" corrects nothing`, { hint: "write field=value, as index=2.043" });
          })
        : Object.entries(typed).map(([k, v]): [string, string] => [
            k,
            typeof v === "object" ? `${v.value} ${v.unit}` : String(v),
          ]);
      const { correctEntry } = await correcting();
      const done = await correctEntry(call.workspace(), {
        entry: number,
        given: pairs,
        reason: call.args.need("reason"),
        ...stamp,
      });
      const { entry, hash, rests, notices, drafts } = done;
      const rest =
        rests.length > 0 ? ` ${rests.join(", ")} rest${rests.length === 1 ? "s" : ""} on what was corrected.` : "";
      if (entry === null)
        return { document: { would_record: drafts }, text: drafts.flatMap(draftWords).join("\n"), notices };
      return {
        document: { entry, hash, corrects: number, rests },
        text: `recorded #${entry}: entry ${number} is corrected.${rest}`,
        notices,
      };
    },
  },
];
