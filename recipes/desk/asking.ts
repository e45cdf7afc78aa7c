/** Asking: what film and light to expect at any settings, and what to do next. Assembles the question, writes the answer. */

import type { Settings } from "../../calibration/index.ts";
import { type ChamberModel, trackRecord } from "../../calibration/index.ts";
import { refuse } from "../../engine/index.ts";
import { type Answer, decide, type Question } from "../advice/decide.ts";
import { type Expectation, expectation } from "../advice/expectation.ts";
import type { MeasuredRun, Mode } from "../advice/mode.ts";
import { readSteering } from "../advice/steering.ts";
import type { Chamber } from "../line/line.ts";
import { asQuantities } from "../line/settings.ts";
import { outside } from "../line/window.ts";
import type { Predicted } from "../outlook.ts";
import { runsSince } from "../record/change-steps.ts";
import { openChange } from "../record/changes.ts";
import type { Draft } from "../record/entries.ts";
import { proposalId } from "../record/ids.ts";
import { basisHash, chamberRecord, proposalOn } from "../record/ledger.ts";
import { type RunRecord, wasMeasured } from "../record/timeline.ts";
import { lastQualified, recipeInForce } from "../record/versions.ts";
import { alarmEvidence, overruled } from "./alarming.ts";
import { canonicalSettings, leversOf, lightReadings } from "./learn.ts";
import { opticsAlone } from "./optics-alone.ts";
import { goalWords } from "./words.ts";
import type { Workspace } from "./workspace.ts";
import { write } from "./writing.ts";

/** The recipe in force now; refuses `no-recipe`, and `many-steps` for recipes of several layers. */
export function inForce(ws: Workspace, chamber: string, recipe: string, atMs = ws.ports.now()) {
  const found = recipeInForce(ws.ledger, chamber, recipe, atMs);
  if (!found)
    return refuse("no-recipe", `nothing is known to be in force on ${chamber} under ${recipe}`, {
      hint: `coatwright record recipe --chamber ${chamber} --recipe ${recipe} --set ...`,
    });
  if (found.steps.length > 1)
    return refuse("many-steps", `${recipe} has ${found.steps.length} steps; recipes of one layer are handled so far`);
  return { ...found, settings: canonicalSettings(ws.line, found.steps) };
}

export function chamberModel(ws: Workspace, chamber: string): ChamberModel {
  ws.chamber(chamber);
  const model = ws.model;
  if (!model)
    return refuse("nothing-known", `the book holds no recipe and no run yet`, {
      hint: `coatwright record recipe --chamber ${chamber} --recipe NAME --set silane=812sccm --set ...`,
    });
  return model.chamber(chamber);
}

const measuredRun = (ws: Workspace, run: RunRecord): MeasuredRun => {
  const film = ws.filmOf(run);
  const light = lightReadings(ws.line, run.readings);
  const of = (kind: string) => light.find((l) => l.kind === kind)?.value ?? null;
  return {
    entry: run.seq,
    index: film?.index ?? null,
    thicknessNm: film?.thicknessNm ?? null,
    reflectanceMinimumNm: of("reflectance_minimum_nm"),
    weightedReflectancePercent: of("weighted_reflectance_percent"),
  };
};

/** Measured runs since the last clean, since the last event that starts tuning, and how many since the last reading are unread. */
export function recentRuns(ws: Workspace, chamber: string, recipe: string) {
  const sinceClean: MeasuredRun[] = [];
  const sinceEvent: MeasuredRun[] = [];
  let clean = true;
  let event = true;
  let awaiting = 0;
  for (const e of [...chamberRecord(ws.ledger, chamber).timeline].reverse()) {
    if (e.kind === "clean" || e.kind === "service") {
      if (e.kind === "clean") clean = false;
      event = false;
    } else if (e.kind === "version") {
      if (e.recipe === recipe) event = false;
    } else if (e.kind === "run" && e.recipe === recipe) {
      if (!wasMeasured(e)) awaiting += sinceClean.length + sinceEvent.length === 0 ? 1 : 0;
      else {
        if (clean) sinceClean.unshift(measuredRun(ws, e));
        if (event) sinceEvent.unshift(measuredRun(ws, e));
      }
    }
    if (!clean && !event) break;
  }
  return { sinceClean, sinceEvent, awaiting };
}

/** Sites usually averaged in a reading of this chamber: those of its last reading with sites. */
function usualSites(ws: Workspace, chamber: string): number {
  const run = chamberRecord(ws.ledger, chamber).timeline.findLast(
    (e) => e.kind === "run" && e.readings.some((r) => r.sites),
  );
  return run?.kind === "run" ? (run.readings.find((r) => r.sites)?.sites ?? 1) : 1;
}

/** Flags of `propose` that steer it, as written. */
export interface Steered {
  fix?: string;
  only?: string;
  limitMove?: string;
}

export function question(
  ws: Workspace,
  name: string,
  recipe: string,
  forMode: Mode | null,
  steered: Steered = {},
): Question {
  const chamber = ws.chamber(name);
  const steering = readSteering(chamber, steered);
  const model = chamberModel(ws, name);
  const force = inForce(ws, name, recipe);
  const anchor = lastQualified(ws.ledger, name, recipe);
  const open = openChange(ws.ledger, name, recipe);
  const recent = recentRuns(ws, name, recipe);
  return {
    line: ws.line,
    chamber,
    recipe,
    goal: ws.goal(recipe),
    model,
    levers: leversOf(ws.line),
    light: ws.light,
    before: force.settings,
    stated: force.stated,
    anchor: anchor ? canonicalSettings(ws.line, anchor.steps) : null,
    anchorEntry: anchor?.entry ?? null,
    runsSinceEvent: recent.sinceEvent,
    runsSinceClean: recent.sinceClean,
    record: trackRecord(model, 8),
    found: alarmEvidence(ws, model),
    overridden: overruled(ws, name),
    openChange: open
      ? {
          change: open.id,
          state: open.state as "adopted" | "entered",
          after: canonicalSettings(ws.line, open.after),
          runsSince: runsSince(ws.ledger, open).filter(wasMeasured).length,
        }
      : null,
    awaitingReadings: recent.awaiting,
    forMode,
    steering,
    sites: usualSites(ws, name),
  };
}

/** `predicted` of the contract from an expectation, rounded to what is meaningful. */
export function predictedDocument(predicted: Predicted): Record<string, unknown> {
  const digits: Record<keyof Predicted, number> = {
    index: 4,
    thickness_nm: 2,
    weighted_reflectance_percent: 3,
    reflectance_minimum_nm: 1,
  };
  return Object.fromEntries(
    (Object.keys(digits) as (keyof Predicted)[]).map((key) => {
      const interval = predicted[key];
      const r = (v: number) => Number(v.toFixed(digits[key]));
      return [key, interval ? { mean: r(interval.mean), low: r(interval.low), high: r(interval.high) } : null];
    }),
  );
}

const chance = (v: number | null) => (v === null ? null : Number(v.toFixed(4)));

export interface Proposed {
  answer: Answer;
  document: Record<string, unknown>;
  /** Null with --dry-run. */
  proposal: string | null;
  /** The same question had been asked before on the same basis. */
  repeated: boolean;
  /** What a person should be told, as of other writing acts. */
  notices?: readonly string[];
}

/** What a proposal of this kind rests on now. */
export function proposalBasis(
  ws: Workspace,
  chamber: string,
  recipe: string,
  forMode: Mode | null,
  steering = "",
): string {
  const change = openChange(ws.ledger, chamber, recipe);
  return basisHash(
    ws.ledger,
    chamber,
    recipe,
    `${forMode ?? ""}${steering === "" ? "" : ` steered: ${steering}`}`,
    ws.line.hash,
    change ? `${change.id} ${change.state}` : "",
  );
}

export function answerDocument(ws: Workspace, q: Question, answer: Answer): Record<string, unknown> {
  return {
    schema: 1,
    chamber: q.chamber.name,
    recipe: q.recipe,
    mode: answer.mode,
    ...(q.forMode ? { mode_asked: q.forMode } : {}),
    ...(q.steering?.words ? { steered: q.steering.words } : {}),
    advice: answer.advice,
    before: asQuantities(answer.before, q.chamber),
    after: asQuantities(answer.after, q.chamber),
    predicted: predictedDocument(answer.ahead.predicted),
    without_change: predictedDocument(answer.now.predicted),
    chance_in_goal: chance(answer.ahead.chanceInGoal),
    chance_in_goal_without_change: chance(answer.now.chanceInGoal),
    done: answer.done,
    because: answer.because,
    cannot_tell: answer.cannotTell,
    alarms: answer.alarms.map((a) => a.sentence),
    cautions: answer.cautions,
    rests_on: { book: ws.book.hash, line_file: ws.line.hash },
  };
}

/** Proposes and, unless `dryRun`, keeps the proposal in the book. The same basis gives the same proposal back. */
export async function propose(
  ws: Workspace,
  how: {
    chamber: string;
    recipe?: string;
    forMode: Mode | null;
    steered?: Steered;
    dryRun: boolean;
    draft?: { at?: string; by?: string };
  },
): Promise<Proposed> {
  const recipe = ws.recipe(ws.chamber(how.chamber).name, how.recipe);
  const q = question(ws, how.chamber, recipe, how.forMode, how.steered);
  const answer = decide(q);
  const optics = opticsAlone(q, answer);
  if (optics) answer.because.push(optics);
  const document = answerDocument(ws, q, answer);
  if (how.dryRun) return { answer, document: { ...document, proposal: null }, proposal: null, repeated: false };
  const basis = proposalBasis(ws, how.chamber, recipe, how.forMode, q.steering?.words);
  const earlier = proposalOn(ws.ledger, basis);
  if (earlier) {
    const proposal = proposalId(earlier.seq);
    return { answer, document: { ...earlier.data.document, proposal }, proposal, repeated: true };
  }
  const draft: Draft<"proposal"> = {
    kind: "proposal",
    ...how.draft,
    data: {
      chamber: how.chamber,
      recipe,
      basis,
      document,
      goal: goalWords(q.goal),
      window: ws.line.window.map((limit) => limit.text),
    },
  };
  const { receipts, notices } = await write(ws, () => [draft]);
  const proposal = proposalId(receipts[0].seq);
  return { answer, document: { ...document, proposal }, proposal, repeated: false, notices };
}

/** What to expect at any settings: the recipe in force with some of them replaced. */
export function predict(
  ws: Workspace,
  name: string,
  recipe: string,
  over: Settings,
): { settings: Settings; chamber: Chamber; expected: Expectation; outsideWindow: string[] } {
  const chamber = ws.chamber(name);
  const settings = new Map([...inForce(ws, name, recipe).settings, ...over]);
  const expected = expectation(chamberModel(ws, name), settings, {
    line: ws.line,
    goal: ws.goal(recipe),
    light: ws.light,
    sites: usualSites(ws, name),
  });
  const outsideWindow = outside(settings, chamber, ws.line).map((f) => f.sentence);
  return { settings, chamber, expected, outsideWindow };
}
