/**
 * This program as one of the practices of a rehearsal: the real chamber model and the real advice over a book that is kept
 * in memory, with nothing else to go by than what such a book would say. The rehearsal itself knows neither.
 */
import {
  allMoved,
  type ChamberEvent,
  type LearnOptions,
  LineModel,
  readingMistakes,
  type Settings,
  slowShifts,
  suspicions,
  trackRecord,
} from "../../calibration/index.ts";
import type { CellLight } from "../advice/cell-light.ts";
import { cellLight } from "../advice/cell-light.ts";
import { type Answer, decide, type Question } from "../advice/decide.ts";
import { gaugeCovariance } from "../advice/expectation.ts";
import type { MeasuredRun } from "../advice/mode.ts";
import type { Chamber, Gauge, Line, Setting } from "../line/line.ts";
import { lineWafer } from "../line/line-wafer.ts";
import { sameSettings } from "../rehearsal/practices/dials.ts";
import type { Hand, Practice } from "../rehearsal/practices/practice.ts";
import type { Brief, Logged, Reading } from "../rehearsal/stage.ts";
import { leversOf } from "./learn.ts";

const UNDER_TUNE = "under tune";
const RECIPE = "blue";
const ELLIPSOMETER = "ellipsometer";
/** As the tool says: an overruled alarm stays so for five runs, or until the next clean. */
const OVERRULED_RUNS = 5;

const units: Record<string, { unit: string; dimension: Setting["dimension"] }> = {
  silane: { unit: "sccm", dimension: "flow" },
  ammonia: { unit: "sccm", dimension: "flow" },
  time: { unit: "s", dimension: "time" },
  power: { unit: "W", dimension: "power" },
  pressure: { unit: "Pa", dimension: "pressure" },
  temperature: { unit: "degC", dimension: "temperature" },
};

/** The line that a brief describes, as a line file would have it. */
export function lineOf(brief: Brief): Line {
  const settings = new Map(
    brief.levers.map(({ name, low, high, smallest, tune }): [string, Setting] => [
      name,
      { name, ...units[name], low, high, smallest, fullScale: null, tune, meaning: name, acts: null },
    ]),
  );
  const { index, thicknessNm, correlation } = brief.gauge;
  const gauge: Gauge = {
    name: ELLIPSOMETER,
    on: "polished",
    index,
    thicknessNm,
    correlation,
    dayToDay: { index: 0, thicknessNm: 0 },
  };
  const chambers = [UNDER_TUNE, ...brief.sisters.map((s) => s.name)].map((name): [string, Chamber] => [
    name,
    { name, settings },
  ]);
  return {
    name: "rehearsal",
    timeZone: "UTC",
    wafer: { surface: "polished", facetAngleDeg: 54.74, facetFactor: { mean: 1, sd: 0 }, seenFrom: "air" },
    goal: {
      index: { value: brief.goal.index, within: brief.tolerance.index },
      thicknessNm: { value: brief.goal.thicknessNm, within: brief.tolerance.thicknessNm },
    },
    light: { fromNm: 300, toNm: 1100, weight: "photons" },
    gauges: new Map([[ELLIPSOMETER, gauge]]),
    settings,
    window: [
      {
        text: "ammonia/silane",
        kind: "ratio",
        settings: ["ammonia", "silane"],
        low: brief.ratio[0],
        high: brief.ratio[1],
      },
    ],
    // A chamber that is being brought up has no qualified recipe of its own to be held near.
    anchor: [],
    recipes: new Map(),
    people: { approve: [], override: [] },
    chambers: new Map(chambers),
    hash: "rehearsal",
    implications: [],
  };
}

/** Film goals only: the light of the cell is not asked, which saves most of the time of a proposal. */
function noLight(line: Line): CellLight {
  const light = cellLight(line, lineWafer(line), { ...line.wafer.facetFactor, runs: 0, doubted: [] });
  return { ...light, weighted: () => null, minimum: () => null };
}

class OurHand implements Hand {
  private readonly line: Line;
  private readonly light: CellLight;
  private readonly options: LearnOptions;
  private readonly sisters: { chamber: string; events: ChamberEvent[] }[];
  private readonly events: ChamberEvent[] = [];
  private readonly covariance;
  private inForce: Settings;
  private entry = 0;
  private sinceClean: MeasuredRun[] = [];
  private sinceEvent: MeasuredRun[] = [];
  private awaiting = 0;
  private measured = 0;
  private overruled = new Map<string, number>();
  /** The last answer; null when something has happened since. */
  private answer: Answer | null = null;

  constructor(private readonly brief: Brief) {
    this.line = lineOf(brief);
    this.light = noLight(this.line);
    this.covariance = gaugeCovariance(this.line.gauges.get(ELLIPSOMETER) ?? null, brief.gauge.sites);
    this.options = {
      levers: leversOf(this.line),
      reference: brief.reference,
      aim: { index: brief.aim.index, thicknessNm: brief.aim.thicknessNm },
      facet: { mean: 1, sd: 0 },
      minimumOf: null,
    };
    this.sisters = brief.sisters.map(({ name, log }) => ({
      chamber: name,
      events: log.map((event) => this.eventOf(event)),
    }));
    this.inForce = brief.start;
    for (const event of brief.history) {
      if (event.kind === "clean") this.cleaned();
      else this.saw(event);
    }
  }

  private eventOf(event: Logged): ChamberEvent {
    const entry = this.entry++;
    if (event.kind === "clean") return { kind: "clean", entry };
    const { settings, reading } = event;
    const read = reading !== null && (reading.index !== null || reading.thicknessNm !== null);
    const film = read ? { ...reading, gauge: this.covariance } : null;
    return { kind: "run", entry, settings, count: 1, sinceClean: null, film, light: [] };
  }

  saw({ settings, reading }: { settings: Settings; reading: Reading | null }): void {
    const event = this.eventOf({ kind: "run", settings, reading });
    this.events.push(event);
    for (const [name, left] of this.overruled)
      if (left <= 1) this.overruled.delete(name);
      else this.overruled.set(name, left - 1);
    if (reading === null || (reading.index === null && reading.thicknessNm === null)) {
      this.awaiting++;
      return;
    }
    const { index, thicknessNm } = reading;
    const run = {
      entry: event.entry,
      index,
      thicknessNm,
      reflectanceMinimumNm: null,
      weightedReflectancePercent: null,
    };
    this.sinceClean.push(run);
    this.sinceEvent.push(run);
    this.awaiting = 0;
    this.measured++;
    this.answer = null;
  }

  cleaned(): void {
    this.events.push(this.eventOf({ kind: "clean" }));
    this.sinceClean = [];
    this.sinceEvent = [];
    this.overruled.clear();
    this.answer = null;
  }

  looked(found: boolean): void {
    const stopping = this.answer?.alarms.filter((a) => a.certain) ?? [];
    // What was found and mended is a service of the chamber.
    if (found) {
      this.events.push({ kind: "service", entry: this.entry++ });
      this.sinceEvent = [];
    } else for (const alarm of stopping) this.overruled.set(alarm.name, OVERRULED_RUNS);
    this.answer = null;
  }

  next(): Settings {
    if (this.answer) return this.inForce;
    this.answer = decide(this.question());
    const { advice, after } = this.answer;
    if ((advice === "change" || advice === "out_of_reach") && !sameSettings(after, this.inForce)) {
      this.inForce = after;
      this.sinceEvent = [];
    }
    return this.inForce;
  }

  says() {
    if (!this.answer) return { chance: null, advice: "none", mode: "none", done: false, alarms: [], cannotTell: [] };
    const { advice, mode, ahead, now, done, alarms } = this.answer;
    // The light of the cell is not asked here, so that it is not told is no news.
    const dark = [...now.cannotTell, ...ahead.cannotTell];
    const cannotTell = this.answer.cannotTell.filter((sentence) => !dark.includes(sentence));
    const chance = advice === "change" || advice === "out_of_reach" ? ahead.chanceInGoal : now.chanceInGoal;
    return { chance, advice, mode, done, alarms: alarms.filter((a) => a.certain).map((a) => a.name), cannotTell };
  }

  /**
   * Only the line's last dozen measured runs are asked whether all chambers moved (calibration/alarms): once they are all
   * this chamber's own, the answer is null and need not be worked out.
   */
  private sistersLately(): boolean {
    return this.brief.sisters.length > 0 && this.measured < 12;
  }

  /** The question as the desk would assemble it from a book. */
  private question(): Question {
    const logs = [{ chamber: UNDER_TUNE, events: this.events }, ...this.sisters];
    const line = new LineModel(logs, this.options);
    const model = line.chamber(UNDER_TUNE);
    const chamber = this.line.chambers.get(UNDER_TUNE) as Chamber;
    return {
      line: this.line,
      chamber,
      recipe: RECIPE,
      goal: this.line.goal,
      model,
      levers: this.options.levers,
      light: this.light,
      before: this.inForce,
      stated: true,
      anchor: null,
      anchorEntry: null,
      runsSinceEvent: this.sinceEvent,
      runsSinceClean: this.sinceClean,
      record: trackRecord(model, 8),
      found: {
        suspicions: suspicions(model),
        allMoved: this.sistersLately() ? allMoved(line, UNDER_TUNE) : null,
        slowShifts: slowShifts(model),
        mistakes: readingMistakes(line, UNDER_TUNE),
        falseAlarmsAMonth: null,
        typed: () => null,
      },
      overridden: new Set(this.overruled.keys()),
      openChange: null,
      awaitingReadings: this.awaiting,
      forMode: null,
      sites: this.brief.gauge.sites,
    };
  }
}

export const ours: Practice = {
  name: "coatwright",
  title: "coatwright",
  begin: (brief) => new OurHand(brief),
};
