/** The verbs that ask: propose, predict, chamber. */

import { refuse } from "../../engine/index.ts";
import {
  asQuantities,
  chamberModel,
  chamberView,
  gaugeSentences,
  gaugesUntold,
  type Mode,
  overview,
  parseSet,
  predict,
  predictedDocument,
  propose,
  recordDocument,
} from "../../recipes/index.ts";
import { chamberText, predictedText, proposalText } from "../text/answers.ts";
import { chamberFlag, flag, type Outcome, settingsFlag, type Verb, word } from "./verb.ts";

function modeOf(text: string | undefined): Mode | null {
  if (text === undefined) return null;
  if (text === "tuning" || text === "production") return text;
  return refuse("bad-mode", `--for is tuning or production, not ${text}`);
}

export const askVerbs: Verb[] = [
  {
    name: "propose",
    does: "the next settings, or keep, or measure, or look for a fault, or out of reach",
    words: [],
    flags: [
      chamberFlag(),
      flag("recipe", "NAME", "the recipe"),
      flag("for", "tuning|production", "overrules the mode found from the record"),
      flag("fix", "silane,ammonia", "settings held as they are"),
      flag("only", "time", "the only settings that may move"),
      flag("limit-move", "3%", "how far each may move from the recipe in force: a share, or time=10s,silane=20sccm"),
    ],
    examples: ["coatwright propose --chamber A2", "coatwright propose --chamber A2 --only time --limit-move 3%"],
    writes: true,
    run: async (call): Promise<Outcome> => {
      const { dryRun, ...draft } = call.stamp();
      const ws = call.workspace();
      const done = await propose(ws, {
        chamber: call.args.need("chamber"),
        recipe: call.args.text("recipe"),
        forMode: modeOf(call.args.text("for")),
        steered: {
          fix: call.args.text("fix"),
          only: call.args.text("only"),
          limitMove: call.args.text("limit-move"),
        },
        dryRun,
        draft,
      });
      const { schema: _, ...document } = done.document;
      return {
        document,
        text: proposalText(ws, done),
        notices: done.notices?.length
          ? done.notices
          : done.repeated
            ? [`asked before on the same basis: ${done.proposal}`]
            : [],
        exit: done.document["advice"] === "out_of_reach" ? 3 : 0,
      };
    },
  },
  {
    name: "predict",
    does: "film and light expected for any settings",
    words: [],
    flags: [
      chamberFlag(),
      flag("recipe", "NAME", "the recipe"),
      settingsFlag("a setting to try; the others as in force"),
    ],
    examples: ["coatwright predict --chamber A2 --set time=575s"],
    writes: false,
    run: (call) => {
      const ws = call.workspace();
      const chamber = ws.chamber(call.args.need("chamber"));
      const recipe = ws.recipe(chamber.name, call.args.text("recipe"));
      const { settings, expected, outsideWindow } = predict(
        ws,
        chamber.name,
        recipe,
        parseSet(call.args.settings("set"), chamber, { allowOutside: true }),
      );
      const document = {
        chamber: chamber.name,
        recipe,
        settings: asQuantities(settings, chamber),
        predicted: predictedDocument(expected.predicted),
        chance_in_goal: expected.chanceInGoal === null ? null : Number(expected.chanceInGoal.toFixed(4)),
        outside_window: outsideWindow,
        cannot_tell: expected.cannotTell,
      };
      return { document, text: [predictedText(ws, chamber, settings, expected), ...outsideWindow].join("\n") };
    },
  },
  {
    name: "chamber",
    does: "the calibrated model: slopes, offsets, drift, what the data cannot tell, alarms; without a name the whole line",
    words: [word("name", "the chamber", false)],
    flags: [flag("recipe", "NAME", "the recipe to look at it with; that of its latest run when left out")],
    examples: ["coatwright chamber A2", "coatwright chamber A2 --recipe blue"],
    writes: false,
    run: async (call) => {
      const ws = call.workspace();
      const name = call.args.text("name");
      const recipe = call.args.text("recipe");
      if (name === undefined) {
        if (recipe !== undefined)
          refuse("missing-argument", "--recipe needs the chamber too", { hint: "coatwright chamber A2 --recipe blue" });
        const { overviewText } = await import("../text/overview.ts");
        const line = overview(ws);
        return { document: lineDocument(line), text: overviewText(line, { colour: false, ascii: false, width: 100 }) };
      }
      ws.chamber(name);
      const plain = chamberView(ws, name, recipe);
      const view = {
        ...plain,
        learned: [...plain.learned, ...gaugeSentences(ws.line, ws.ledger, ws.gaugeBiases, ws.ports.now())],
        cannotTell: [...plain.cannotTell, ...gaugesUntold(ws.line, ws.gaugeBiases)],
      };
      const model = chamberModel(ws, name);
      const document = {
        chamber: name,
        recipe: view.recipe,
        measured_runs: model.ownReadings,
        depositions_since_clean: model.k,
        coefficients: model.coefficients().map((c) => ({
          of: c.term.output === "index" ? "index" : "ln_thickness",
          term: c.term.name,
          mean: c.mean,
          sd: c.sd,
          prior_sd: c.priorSd,
          learned: c.active,
        })),
        learned: view.learned,
        ...recordDocument(model),
        cannot_tell: view.cannotTell,
        alarms: view.alarms,
        now: { predicted: predictedDocument(view.now.predicted), chance_in_goal: view.now.chanceInGoal },
      };
      return { document, text: chamberText(view, model.ownReadings, model.k) };
    },
  },
];

function lineDocument(line: ReturnType<typeof overview>): Record<string, unknown> {
  return {
    line: line.line,
    goal: line.goalText,
    entries: line.entries,
    head: line.head,
    chambers: line.chambers.map((c) => ({
      chamber: c.chamber,
      recipe: c.recipe,
      attention: c.attention,
      says: c.sentence,
      chance_in_goal: c.chanceInGoal,
      depositions_since_clean: c.depositionsSinceClean,
      open_change: c.openChange?.change ?? null,
    })),
    warnings: line.warnings,
  };
}
