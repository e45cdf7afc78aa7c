/** Looking: the line at a glance, one chamber in full, and the live what-if. Plain data for verbs and screens; writes nothing. */
import { type Settings, trackRecord } from "../../calibration/index.ts";
import { nitrideIndexRange, Refusal } from "../../engine/index.ts";
import type { Alarm } from "../advice/alarms.ts";
import { untoldHere } from "../advice/cannot-tell.ts";
import { decide } from "../advice/decide.ts";
import { chancesAlone, type Expectation, expectation } from "../advice/expectation.ts";
import { asPercent, missWords, runsWord } from "../advice/reasons.ts";
import type { Goal } from "../line/line.ts";
import { outside } from "../line/window.ts";
import type { ChamberRow, ChamberView, LineOverview, OpenChange, Outlook, ProposalView, RunSeen } from "../outlook.ts";
import { documentSettings, runsSince } from "../record/change-steps.ts";
import { openChange as openChangeOf } from "../record/changes.ts";
import { proposalId } from "../record/ids.ts";
import { chamberRecord, type ProposalRecord, proposalOn } from "../record/ledger.ts";
import { runsOf, wasMeasured } from "../record/timeline.ts";
import { recipesOf } from "../record/versions.ts";
import { alarmsNow } from "./alarming.ts";
import { chamberModel, inForce, type Proposed, proposalBasis, question } from "./asking.ts";
import { sheetOf } from "./changing.ts";
import { canonicalSettings, filmReading, leversOf, lightReadings } from "./learn.ts";
import { learned } from "./learned.ts";
import { goalText, lightText } from "./words.ts";
import type { Workspace } from "./workspace.ts";

const order: ChamberRow["attention"][] = ["fault", "enter", "propose", "measure", "close", "no data", "keep"];

/**
 * The recipe a chamber is looked at with where none is named: its only one, else that of its latest run or stated version.
 * Throws as `Workspace.recipe`, but for `which-recipe`.
 */
export function currentRecipe(ws: Workspace, chamber: string): string {
  if (recipesOf(ws.ledger, chamber).length < 2) return ws.recipe(chamber);
  const now = ws.ports.now();
  const latest = chamberRecord(ws.ledger, chamber).timeline.findLast(
    (e) => (e.kind === "run" || e.kind === "version") && e.atMs <= now,
  );
  return ws.recipe(chamber, latest?.kind === "run" || latest?.kind === "version" ? latest.recipe : undefined);
}

export function overview(ws: Workspace): LineOverview {
  const chambers = [...ws.line.chambers.keys()].map((name) => chamberRow(ws, name));
  chambers.sort(
    (a, b) => order.indexOf(a.attention) - order.indexOf(b.attention) || (a.chanceInGoal ?? 2) - (b.chanceInGoal ?? 2),
  );
  const warnings = ws.book.problems().map((p) => p.message);
  if (ws.ledger.lineFile !== null && ws.ledger.lineFile !== new TextDecoder().decode(ws.readBeside("line.yaml")))
    warnings.push("line.yaml has changed since the last entry; the next entry records the difference.");
  return {
    line: ws.line.name,
    folder: ws.folder,
    demo: ws.demo,
    goal: ws.line.goal,
    goalText: goalText(ws.line.goal),
    lightText: lightText(ws.line),
    chambers,
    warnings,
    entries: ws.ledger.entries.length,
    head: ws.book.hash,
  };
}

function chamberRow(ws: Workspace, name: string): ChamberRow {
  const { timeline } = chamberRecord(ws.ledger, name);
  const runs = runsOf(timeline).length;
  const cleaned = timeline.some((e) => e.kind === "clean");
  try {
    const recipe = currentRecipe(ws, name);
    const q = question(ws, name, recipe, null);
    const answer = decide(q);
    const open = openChange(ws, name, recipe);
    const chance = answer.now.chanceInGoal ?? answer.now.chanceJudged;
    let attention: ChamberRow["attention"] = "keep";
    let call = "leave it alone";
    const certain = answer.alarms.find((a) => a.certain);
    if (certain) {
      attention = "fault";
      call = alarmCall(certain);
    } else if (open?.state === "adopted") {
      attention = "enter";
      call = `${open.change} is adopted: enter it at the tool`;
    } else if (open?.state === "entered" && q.openChange && q.openChange.runsSince > 0) {
      attention = "close";
      call = `${open.change} has ${runsWord(q.openChange.runsSince)} since it was entered: close it`;
    } else if (answer.advice === "change" || answer.advice === "out_of_reach") {
      attention = "propose";
      call = answer.advice === "change" ? "ask for a proposal" : "goal out of reach: ask for the nearest point";
    } else if (answer.advice === "measure") {
      attention = "measure";
      call = open ? `run and measure ${open.change}` : "measure once more";
    }
    const few = runs < 10 ? "new" : "no clean logged";
    const when = cleaned ? `${runsWord(q.runsSinceClean.length)} since clean` : `${few}, ${runsWord(runs)}`;
    const state = aheadWords(answer.now, q.goal);
    return {
      chamber: name,
      recipe,
      goal: q.goal,
      attention,
      alarm: certain?.name ?? null,
      sentence: `${when}, ${state}, ${asPercent(chance)} in goal: ${call}`,
      chanceInGoal: chance,
      depositionsSinceClean: q.model.k,
      cleaned,
      runs,
      lastRuns: runsSeen(ws, name, 12, recipe),
      awaitingReadings: q.awaitingReadings,
      openChange: open,
    };
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    const { message, hint } = error.problems[0];
    return {
      chamber: name,
      recipe: "",
      goal: ws.line.goal,
      attention: "no data",
      alarm: null,
      sentence: `${message}${hint ? `: ${hint}` : ""}`,
      chanceInGoal: null,
      depositionsSinceClean: 0,
      cleaned,
      runs,
      lastRuns: runsSeen(ws, name, 12),
      awaitingReadings: 0,
      openChange: null,
    };
  }
}

function alarmCall({ name }: Alarm): string {
  if (name === "past_anchor") return "past the anchor: a person must look before more is corrected";
  if (name === "all_moved") return "all chambers moved: look at gauge and gas supply first, do not tune";
  return `${name.replaceAll("_", " ")}: look for a fault, do not tune`;
}

/** What the next film is expected to be beside its goal: "expected 2.3 nm thin, index 0.011 low". */
function aheadWords(ahead: Expectation, goal: Goal): string {
  const misses = missWords(ahead.film, goal).map((words) =>
    words.replace(/^thickness (.+) (low|high)$/, (_, off, side) => `${off} ${side === "low" ? "thin" : "thick"}`),
  );
  const { weighted_reflectance_percent: weighted, reflectance_minimum_nm: minimum } = ahead.predicted;
  const most = goal.weightedReflectancePercent?.atMost;
  if (most !== undefined && weighted && weighted.mean > most)
    misses.push(`weighted R ${(weighted.mean - most).toFixed(2)} % high`);
  const off = goal.reflectanceMinimumNm && minimum ? minimum.mean - goal.reflectanceMinimumNm.value : 0;
  // The same share of the tolerance as missWords goes by.
  if (goal.reflectanceMinimumNm && Math.abs(off) > 0.6 * goal.reflectanceMinimumNm.within)
    misses.push(`minimum ${Math.abs(off).toFixed(0)} nm ${off < 0 ? "low" : "high"}`);
  return `expected ${misses.length > 0 ? misses.join(", ") : "on goal"}`;
}

function openChange(ws: Workspace, chamber: string, recipe: string): OpenChange | null {
  const open = openChangeOf(ws.ledger, chamber, recipe);
  if (!open) return null;
  return {
    change: open.id,
    state: open.state as OpenChange["state"],
    at: open.at,
    by: open.by,
    reason: open.reason,
    before: canonicalSettings(ws.line, open.before),
    after: canonicalSettings(ws.line, open.after),
    sheet: sheetOf(ws, open.before, open.after),
    runsSince: runsSince(ws.ledger, open).length,
  };
}

/** The last measured runs of a chamber, of one recipe or of all, beside what had been expected of them. */
export function runsSeen(ws: Workspace, chamber: string, last: number, recipe?: string): RunSeen[] {
  const measured = runsOf(chamberRecord(ws.ledger, chamber).timeline).filter(wasMeasured);
  const runs = measured.filter((run) => recipe === undefined || run.recipe === recipe).slice(-last);
  if (runs.length === 0 || !ws.model) return [];
  const reach = measured.length - measured.indexOf(runs[0]);
  const record = new Map(trackRecord(ws.model.chamber(chamber), reach).map((r) => [r.entry, r]));
  return runs.map((run): RunSeen => {
    const film = filmReading(ws.line, run.readings);
    const light = lightReadings(ws.line, run.readings);
    const tracked = record.get(run.seq);
    return {
      entry: run.seq,
      at: run.at,
      sinceClean: tracked?.k ?? 0,
      index: film?.index ?? null,
      thicknessNm: film?.thicknessNm ?? null,
      reflectanceMinimumNm: light.find((l) => l.kind === "reflectance_minimum_nm")?.value ?? null,
      weightedReflectancePercent: light.find((l) => l.kind === "weighted_reflectance_percent")?.value ?? null,
      expected: tracked
        ? {
            index: tracked.expectedIndex.mean,
            indexHalf: 1.96 * tracked.expectedIndex.sd,
            thicknessNm: tracked.expectedThickness.mean,
            thicknessHalf: 1.96 * tracked.expectedThickness.sd,
          }
        : null,
      suspect: tracked?.suspect ?? 0,
      step: tracked?.step ?? 0,
    };
  });
}

/** The outlook at settings from an expectation: adds spectrum, current and colour of the mean film. */
function outlookOf(ws: Workspace, chamber: string, recipe: string, settings: Settings, e: Expectation): Outlook {
  const light = ws.light;
  const lit = sceneOf(light, e.film);
  return {
    settings,
    film: e.film,
    predicted: e.predicted,
    chanceInGoal: e.chanceInGoal,
    chances: chancesAlone(chamberModel(ws, chamber), settings, { goal: ws.goal(recipe), light: ws.light }),
    spectrum: lit?.spectrum ?? null,
    current: lit?.current ?? null,
    colour: lit?.colour ?? null,
    outsideWindow: outside(settings, ws.chamber(chamber), ws.line).map((f) => f.sentence),
    cannotTell: e.cannotTell,
  };
}

/** Spectrum with its 95 % band (over the thickness the film may have), current and colour of a film on the cell. */
function sceneOf(
  light: Workspace["light"],
  film: Expectation["film"],
): Pick<Outlook, "spectrum" | "current" | "colour"> | null {
  const d = film.thicknessNm * light.facet.mean;
  if (light.weighted(film.index, d) === null) return null;
  const { wafer } = light;
  const middle = wafer.nitride(film.index, d).reflectance;
  const half = 1.96 * Math.hypot(Math.sqrt(film.covariance[2]) * light.facet.mean, film.thicknessNm * light.facet.sd);
  const edges = [d - half, d + half].map((edge) => wafer.nitride(film.index, Math.max(edge, 1)).reflectance);
  const { available, reflected, absorbedInFilm, intoSilicon } = wafer.currents(film.index, d);
  const { hex, words, lab } = wafer.colour(film.index, d);
  return {
    spectrum: {
      wavelengthNm: Array.from(wafer.wavelengthNm),
      reflectance: Array.from(middle),
      low: Array.from(middle, (v, i) => Math.min(v, edges[0][i], edges[1][i])),
      high: Array.from(middle, (v, i) => Math.max(v, edges[0][i], edges[1][i])),
    },
    current: { available, reflected, absorbedInFilm, intoSilicon },
    colour: { hex, words, lab: [lab[0], lab[1], lab[2]] },
  };
}

/** What to expect at any settings of a chamber (all of them given), held against the goal of a recipe. Writes nothing. */
export function whatIf(
  ws: Workspace,
  chamber: string,
  settings: Settings,
  recipe = currentRecipe(ws, chamber),
): Outlook {
  const e = expectation(chamberModel(ws, chamber), settings, { line: ws.line, goal: ws.goal(recipe), light: ws.light });
  return outlookOf(ws, chamber, recipe, settings, e);
}

/** One chamber in full, with the recipe named or else the current one. */
export function chamberView(ws: Workspace, name: string, named?: string): ChamberView {
  const chamber = ws.chamber(name);
  const recipe = named === undefined ? currentRecipe(ws, name) : ws.recipe(name, named);
  const goal = ws.goal(recipe);
  const model = chamberModel(ws, name);
  const before = inForce(ws, name, recipe).settings;
  const now = whatIf(ws, name, before, recipe);
  const kept = proposalOn(ws.ledger, proposalBasis(ws, name, recipe, null));
  return {
    chamber: name,
    recipe,
    goal,
    goalText: goalText(goal),
    lightText: lightText(ws.line),
    surface: ws.line.wafer.surface,
    settings: [...chamber.settings.values()].filter((s) => before.has(s.name)),
    now,
    proposal: kept ? keptProposal(ws, name, recipe, kept) : null,
    runs: runsSeen(ws, name, 20, recipe),
    openChange: openChange(ws, name, recipe),
    learned: learned(ws, model, before, trackRecord(model)),
    cannotTell: [
      ...new Set([
        ...now.cannotTell,
        ...untoldHere(model, leversOf(ws.line), { line: ws.line, chamber, before }).map((u) => u.sentence),
      ]),
    ],
    alarms: alarmsNow(ws, model).map((a) => a.sentence),
    plane: plane(ws, goal, now),
  };
}

/** A proposal made earlier whose basis still holds, as it was kept in the book. */
function keptProposal(ws: Workspace, name: string, recipe: string, kept: ProposalRecord): ProposalView {
  const { document } = kept.data;
  const list = (key: string) => (Array.isArray(document[key]) ? (document[key] as unknown[]).map(String) : []);
  return {
    proposal: proposalId(kept.seq),
    advice: document["advice"] as ProposalView["advice"],
    after: whatIf(ws, name, canonicalSettings(ws.line, documentSettings(document, "after")), recipe),
    because: list("because"),
    cannotTell: list("cannot_tell"),
    alarms: list("alarms"),
    cautions: list("cautions"),
    done: document["done"] === true,
  };
}

/** Weighted reflectance over the film plane about goal and present film. */
function plane(ws: Workspace, goal: ChamberView["goal"], now: Outlook): ChamberView["plane"] {
  const light = ws.light;
  const centreN = goal.index?.value ?? now.film?.index ?? 2.05;
  const centreD = goal.thicknessNm?.value ?? now.film?.thicknessNm ?? 85;
  const halfN = Math.max(
    0.08,
    3 * (goal.index?.within ?? 0.02),
    1.3 * Math.abs((now.film?.index ?? centreN) - centreN),
  );
  const halfD = Math.max(
    10,
    4 * (goal.thicknessNm?.within ?? 2),
    1.3 * Math.abs((now.film?.thicknessNm ?? centreD) - centreD),
  );
  const even = (low: number, high: number) =>
    Array.from({ length: planeSteps + 1 }, (_, i) => low + ((high - low) * i) / planeSteps);
  // Never beyond the films the optics know, whatever the goal says.
  const lowN = Math.min(Math.max(centreN - halfN, nitrideIndexRange[0]), nitrideIndexRange[1] - 0.02);
  const index = even(lowN, Math.max(Math.min(centreN + halfN, nitrideIndexRange[1]), lowN + 0.02));
  const thicknessNm = even(Math.max(centreD - halfD, 1), centreD + halfD);
  const columns = thicknessNm.length;
  const map = light.wafer.weightedReflectanceMap(index, {
    fromNm: thicknessNm[0] * light.facet.mean,
    stepNm: (thicknessNm[1] - thicknessNm[0]) * light.facet.mean,
    columns,
  });
  return {
    index,
    thicknessNm,
    weightedReflectancePercent: thicknessNm.map((_, column) => index.map((__, row) => map[row * columns + column])),
  };
}

/** Steps of the film plane each way: finer than a wide terminal shows. */
const planeSteps = 40;

/** A proposal as the screens show it. */
export function proposalView(ws: Workspace, proposed: Proposed): ProposalView {
  const { answer } = proposed;
  const chamber = String(proposed.document["chamber"]);
  return {
    proposal: proposed.proposal,
    advice: answer.advice,
    after: outlookOf(ws, chamber, String(proposed.document["recipe"]), answer.after, answer.ahead),
    because: answer.because,
    cannotTell: answer.cannotTell,
    alarms: answer.alarms.map((a) => a.sentence),
    cautions: answer.cautions,
    done: answer.done,
  };
}
