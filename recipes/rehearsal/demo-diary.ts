/**
 * A chamber's diary: plays one virtual chamber through a list of doings and writes down what its crew would have entered
 * in the record book, with their gauges' readings. The story of the demo line is told in `demo.ts`; this file only knows
 * how a day at a chamber becomes entries.
 */
import { type Random, random, refuse } from "../../engine/index.ts";
import type { EntryData, Kind, Reading, StepSettings } from "../record/entries.ts";
import { aim, type Film, TUBE_STEPS, typed } from "./aim.ts";
import { need, shiftRatio } from "./film-law.ts";
import type { VirtualChamber } from "./virtual-chamber.ts";
import { type ChamberSettings, TUBE_BOUNDS } from "./worlds.ts";

/** An entry before the book has given it a number and a hash. `at` is ISO 8601 with offset Z. */
export type DemoEntry = { [K in Kind]: { at: string; by: string; kind: K; data: EntryData[K] } }[Kind];

/** What a crew did, in order. Factors are on the recipe in force. */
export type Doing =
  | { do: "clean"; what: string; step?: { index: number; lnRate: number } }
  | { do: "precoat"; count: number }
  | { do: "service"; what: string; gains: { silane?: number; ammonia?: number } }
  | { do: "run"; times: number; note?: string }
  /** A test run with the gas ratio, the time or both gases together changed for this run only. */
  | { do: "trial"; ratio?: number; time?: number; flow?: number }
  /** So many times: depositions that nobody measured, then one that somebody did. */
  | { do: "production"; times: number; unmeasured: number; wrongWafer?: number }
  /** The crew brings the recipe back to goal and states it. */
  | { do: "retune"; reason: string }
  | { do: "note"; text: string };

/** The unit each setting is declared in on the demo line, and how many canonical units it is. */
const DECLARED: ReadonlyMap<string, { unit: string; size: number }> = new Map([
  ["silane", { unit: "sccm", size: 1 }],
  ["ammonia", { unit: "sccm", size: 1 }],
  ["time", { unit: "s", size: 1 }],
  ["power", { unit: "kW", size: 1000 }],
  ["pressure", { unit: "Pa", size: 1 }],
  ["temperature", { unit: "degC", size: 1 }],
]);

/** Settings as an entry holds them. */
export function asSteps(settings: ChamberSettings): StepSettings[] {
  const quantities: StepSettings["settings"] = {};
  for (const [name, value] of settings) {
    const declared = DECLARED.get(name);
    if (!declared) refuse("unknown-setting", `the demo line has no setting ${name}`);
    quantities[name] = { value: value / declared.size, unit: declared.unit };
  }
  return [{ settings: quantities }];
}

/** Rounded as the gauge's display shows it. */
const shown = (value: number, decimals: number) => Number(value.toFixed(decimals));

const MINUTE = 60_000;
const HOUR = 60 * MINUTE;
/** Boat in to boat out, and how long a clean and a service keep the chamber down. Invented. */
const DEPOSITION = 70 * MINUTE;
const CLEAN = 7 * HOUR;
const SERVICE = 5 * HOUR;

/** Who is on shift: early from 6, late from 14, night from 22 (Lisbon keeps Greenwich time in winter). Two crews take turns. */
function onShift(at: number): string {
  const hour = new Date(at).getUTCHours();
  const crew = Math.floor(at / (24 * HOUR)) % 2;
  if (hour >= 6 && hour < 14) return ["Marta", "Duarte"][crew];
  if (hour >= 14 && hour < 22) return ["Joana", "Rui"][crew];
  return "Helena";
}

/** The ellipsometer's offset of the day, the same for every chamber: what `day_to_day` declares. */
export function offsetOfDay(at: number, seed: string): Film {
  const day: Random = random(seed).fork(new Date(at).toISOString().slice(0, 10));
  return { index: day.normal(0, 0.002), thicknessNm: day.normal(0, 0.25) };
}

export interface DiaryOptions {
  name: string;
  recipe: string;
  chamber: VirtualChamber;
  /** Recipe at the beginning. */
  settings: ChamberSettings;
  goal: Film;
  /** Milliseconds since 1970. */
  from: number;
  seed: string;
}

/** Plays the doings and returns the entries, the recipe in force at the end and the time then. */
export function keepDiary(
  options: DiaryOptions,
  doings: readonly Doing[],
): { entries: DemoEntry[]; settings: ChamberSettings; until: number } {
  const { name, recipe, chamber, goal, seed } = options;
  // Nobody starts on the minute: a few minutes of scatter, from a stream of its own.
  const minutes = random(seed).fork(`${name}/minutes`);
  const entries: DemoEntry[] = [];
  let settings = options.settings;
  let now = options.from;
  let measured = 0;

  function pass(ms: number): void {
    now += ms + Math.round(minutes.uniform(0, 12)) * MINUTE;
  }
  function write<K extends Kind>(kind: K, data: EntryData[K]): void {
    entries.push({ at: new Date(now).toISOString(), by: onShift(now), kind, data } as DemoEntry);
  }
  function state(reason: string): void {
    write("recipe", { chamber: name, recipe, steps: asSteps(settings), reason });
  }

  function read(film: ReturnType<VirtualChamber["deposit"]>, wrongWafer: boolean): Reading[] {
    const offset = offsetOfDay(now, seed);
    const onWafer = chamber.measure(film, { reads: wrongWafer ? "film on textured" : "film on polished", offset });
    const readings: Reading[] = [{ gauge: "ellipsometer", on: "polished" }];
    if (onWafer.index !== null) readings[0].index = shown(onWafer.index, 3);
    if (onWafer.thicknessNm !== null) readings[0].thickness_nm = shown(onWafer.thicknessNm, 1);
    if (measured % 5 === 3) {
      const { reflectanceMinimumNm } = chamber.measure(film, { reads: "light on cell" });
      if (reflectanceMinimumNm !== null) {
        readings.push({
          gauge: "reflectometer",
          on: "cell",
          reflectance_minimum_nm: shown(reflectanceMinimumNm, 1),
        });
      }
    }
    measured += 1;
    return readings;
  }

  function run(
    used: ChamberSettings,
    kind: "tuning" | "production",
    more: { wrongWafer?: boolean; note?: string } = {},
  ) {
    pass(DEPOSITION);
    const film = chamber.deposit(used);
    const given = [...used].filter(([setting, value]) => value !== settings.get(setting)).map(([setting]) => setting);
    write("run", {
      chamber: name,
      recipe,
      settings_from: given.length > 0 ? `in force, with ${given.join(", ")} given` : "in force",
      steps: asSteps(used),
      count: 1,
      kind,
      readings: read(film, more.wrongWafer ?? false),
      ...(more.note === undefined ? {} : { note: more.note }),
    });
  }

  function depositUnmeasured(count: number): void {
    for (let i = 0; i < count; i++) chamber.deposit(settings);
    pass(count * DEPOSITION);
    write("run", {
      chamber: name,
      recipe,
      settings_from: "in force",
      steps: asSteps(settings),
      count,
      kind: "production",
      readings: [],
    });
  }

  function play(doing: Doing): void {
    switch (doing.do) {
      case "clean":
        pass(CLEAN);
        chamber.clean(doing.step);
        write("clean", { chamber: name, what: doing.what });
        break;
      case "precoat":
        for (let i = 0; i < doing.count; i++) chamber.deposit(settings);
        pass(doing.count * DEPOSITION);
        write("precoat", { chamber: name, count: doing.count });
        break;
      case "service":
        pass(SERVICE);
        chamber.swapControllers(doing.gains);
        write("service", { chamber: name, what: doing.what });
        break;
      case "run":
        for (let i = 0; i < doing.times; i++) run(settings, "tuning", i === 0 ? { note: doing.note } : {});
        break;
      case "trial": {
        const mixed = shiftRatio(settings, doing.ratio ?? 1);
        const flow = doing.flow ?? 1;
        const changed: [string, number][] = [
          ["silane", need(mixed, "silane") * flow],
          ["ammonia", need(mixed, "ammonia") * flow],
          ["time", need(mixed, "time") * (doing.time ?? 1)],
        ];
        run(typed(new Map([...settings, ...changed])), "tuning");
        break;
      }
      case "production":
        for (let i = 0; i < doing.times; i++) {
          depositUnmeasured(doing.unmeasured);
          run(settings, "production", { wrongWafer: doing.wrongWafer === i });
        }
        break;
      case "retune": {
        // The crew is given the truth here, which no crew has: the story needs chambers that were kept well.
        const aimed = aim(chamber.expected, settings, goal, { bounds: TUBE_BOUNDS, steps: TUBE_STEPS });
        if (!aimed) refuse("out-of-range", `the demo's ${name} cannot reach its goal`);
        settings = aimed;
        pass(10 * MINUTE);
        state(doing.reason);
        break;
      }
      case "note":
        write("note", { chamber: name, text: doing.text });
        break;
    }
  }

  state("first recipe in the book");
  for (const doing of doings) play(doing);
  return { entries, settings, until: now };
}
