/**
 * Watching all chambers: where each drifts and how long it stays in goal, what is due, its alarms, its capability, and the
 * chambers side by side at the recipe in force. The most urgent first. Plain data; writes nothing.
 */
import {
  type Bounds,
  type ChamberModel,
  falseAlarmsPerMonth,
  indexBounds,
  type Settings,
  thicknessBounds,
} from "../../calibration/index.ts";
import { type Problem, Refusal } from "../../engine/index.ts";
import type { Alarm } from "../advice/alarms.ts";
import { chanceAt } from "../advice/expectation.ts";
import { type Forecast, forecast } from "../advice/forecast.ts";
import { runsWord } from "../advice/reasons.ts";
import { runsSince } from "../record/change-steps.ts";
import { openChange } from "../record/changes.ts";
import { chamberRecord } from "../record/ledger.ts";
import { recipesOf } from "../record/versions.ts";
import { alarmsNow, measuredPerMonth } from "./alarming.ts";
import { chamberModel, inForce, recentRuns } from "./asking.ts";
import { type CapabilityHere, capabilityOf } from "./watching-capability.ts";
import { type CleanHabit, cleanHabit } from "./watching-cleans.ts";
import type { Workspace } from "./workspace.ts";

/** A mean with half its middle 95 %. */
export interface Half {
  mean: number;
  half: number;
}

export interface WatchedRecipe {
  recipe: string;
  settings: Settings;
  /** Over the next ten depositions with nothing changed. */
  drift: { index: Half; thicknessNm: Half };
  forecast: Forecast | null;
  /** The true film of the next deposition, middle 95 %, and its chance to be in goal; null where no goal can be judged. */
  next: { index: Bounds; thicknessNm: Bounds; chance: number | null };
  capability: CapabilityHere;
  due: string[];
  /** An open change that is not typed in yet; one that has been and has runs since. */
  toEnter: boolean;
  toClose: boolean;
  awaiting: number;
}

/** How urgent a chamber is, the most first. */
export const urgencies = ["fault", "out", "enter", "ask", "leaving", "read", "close", "fine", "unknown"] as const;
export type Urgency = (typeof urgencies)[number];

export interface WatchedChamber {
  chamber: string;
  urgency: Urgency;
  /** Depositions since the last clean, and whether one was ever logged. */
  k: number;
  cleaned: boolean;
  habit: CleanHabit | null;
  alarms: Alarm[];
  recipes: WatchedRecipe[];
  /** False alarms a month that the slow-shift alarm promises here; null where the rate of runs is not known. */
  falseAlarmsAMonth: number | null;
  /** Why there is nothing, or part of it missing. */
  trouble: Problem[];
}

export interface Watched {
  chambers: WatchedChamber[];
  /** Recipes that more than one chamber runs. */
  shared: string[];
}

/** A chamber that leaves its goal within so many depositions likelier than not is urgent (common practice, no source). */
const soon = 24;

/** Looks at every chamber. Throws only where the folder itself cannot be read; a chamber's trouble is told beside it. */
export function watch(ws: Workspace): Watched {
  if (ws.book.damage.length > 0) throw new Refusal(ws.book.problems());
  const chambers = [...ws.line.chambers.keys()].map((name) => watched(ws, name));
  const half = (c: WatchedChamber) => Math.min(...c.recipes.map((r) => r.forecast?.outBy.half ?? 1e9), 1e9);
  chambers.sort((a, b) => urgencies.indexOf(a.urgency) - urgencies.indexOf(b.urgency) || half(a) - half(b));
  const names = [...new Set(chambers.flatMap((c) => c.recipes.map((r) => r.recipe)))];
  const runBy = (recipe: string) => chambers.filter((c) => c.recipes.some((r) => r.recipe === recipe)).length;
  return { chambers, shared: names.filter((name) => runBy(name) > 1) };
}

function watched(ws: Workspace, name: string): WatchedChamber {
  const { timeline } = chamberRecord(ws.ledger, name);
  const aMonth = measuredPerMonth(ws, name);
  const out: WatchedChamber = {
    chamber: name,
    urgency: "unknown",
    k: 0,
    cleaned: timeline.some((e) => e.kind === "clean"),
    habit: cleanHabit(timeline),
    alarms: [],
    recipes: [],
    falseAlarmsAMonth: aMonth === null ? null : falseAlarmsPerMonth(aMonth),
    trouble: [],
  };
  const known = recipesOf(ws.ledger, name);
  const guarded = (act: () => void) => {
    try {
      act();
    } catch (error) {
      if (!(error instanceof Refusal)) throw error;
      out.trouble.push(...error.problems);
    }
  };
  // With no recipe this says so, with the hint of what to enter.
  if (known.length === 0) guarded(() => void ws.recipe(name));
  else
    guarded(() => {
      const model = chamberModel(ws, name);
      out.k = model.k;
      out.alarms = alarmsNow(ws, model);
      for (const recipe of known) guarded(() => void out.recipes.push(watchedRecipe(ws, model, recipe)));
    });
  out.urgency = urgencyOf(out);
  return out;
}

function watchedRecipe(ws: Workspace, model: ChamberModel, recipe: string): WatchedRecipe {
  const { chamber } = model;
  const { settings } = inForce(ws, chamber, recipe);
  const goal = ws.goal(recipe);
  const { light } = ws;
  const law = model.law(settings);
  const chance = chanceAt(model, settings, { goal, light });
  const open = openChange(ws.ledger, chamber, recipe);
  const since = open?.state === "entered" ? runsSince(ws.ledger, open).length : 0;
  const { awaiting } = recentRuns(ws, chamber, recipe);
  const due: string[] = [];
  if (open?.state === "adopted") {
    const { approve } = ws.line.people;
    const waits = approve.length > 0 && open.approved.length === 0;
    due.push(
      waits
        ? `${open.id} is adopted and waits for ${approve.join(" or ")}`
        : `${open.id} is adopted, not entered: type it in at the tool, then coatwright enter ${open.id}`,
    );
  }
  if (since > 0 && open)
    due.push(`${open.id} has ${runsWord(since)} since it was entered: coatwright close ${open.id}`);
  if (open?.state === "entered" && since === 0) due.push(`${open.id} is entered and waits for its first run`);
  if (awaiting > 0) due.push(`${runsWord(awaiting)} not read since the last reading`);
  return {
    recipe,
    settings,
    drift: driftOf(model, settings),
    forecast: forecast(model, settings, { goal, light }),
    next: {
      index: indexBounds(law),
      thicknessNm: thicknessBounds(law),
      chance: Number.isFinite(chance) ? chance : null,
    },
    capability: capabilityOf(ws, chamber, recipe, goal),
    due,
    toEnter: open?.state === "adopted",
    toClose: since > 0,
    awaiting,
  };
}

/** What ten more depositions do to the film, as the drift and the dying transient have it. */
function driftOf(model: ChamberModel, settings: Settings): WatchedRecipe["drift"] {
  const { layout, k } = model;
  const h = { index: new Float64Array(layout.n), rate: new Float64Array(layout.n) };
  layout.active.forEach((term, i) => {
    h[term.output][i] = term.value(settings, k + 10) - term.value(settings, k);
  });
  const nm = Math.exp(model.quick(settings).lnThickness);
  const half = (row: Float64Array, scale: number): Half => {
    const { mean, sd } = model.combination(row);
    return { mean: scale * mean, half: scale * 1.96 * sd };
  };
  return { index: half(h.index, 1), thicknessNm: half(h.rate, nm) };
}

function urgencyOf({ alarms, recipes, trouble }: WatchedChamber): Urgency {
  if (alarms.some((a) => a.certain)) return "fault";
  if (recipes.length === 0 || (trouble.length > 0 && recipes.every((r) => r.forecast === null))) return "unknown";
  if (recipes.some((r) => r.forecast && r.forecast.outNow >= 0.5)) return "out";
  if (recipes.some((r) => r.toEnter)) return "enter";
  if (alarms.some((a) => a.calls === "ask")) return "ask";
  if (recipes.some((r) => (r.forecast?.outBy.half ?? Number.POSITIVE_INFINITY) <= soon)) return "leaving";
  if (recipes.some((r) => r.awaiting > 0)) return "read";
  return recipes.some((r) => r.toClose) ? "close" : "fine";
}
