/**
 * The demo line Saltmarsh 2: its record book, invented. The films come from the virtual chamber with fixed seeds, so the
 * book is the same on every machine; nothing in it was measured on a real tool.
 *
 * The story. A1 ran three cleaning cycles, was kept well and is in goal: it should be left alone. A2 came back from a
 * clean four runs ago and lays a film about 3 nm thin and a little low in index; the size of that clean's step is stated
 * below, not drawn. B1 is new: three runs at A1's recipe, which in B1 gives a film too thick and too low in index. About
 * every fifth measured run carries a reflectance minimum read on textured cells, which is what pins the facet factor
 * (0.85 in truth). One reading of A2 was taken on a textured wafer by mistake, and nothing in the book says so.
 */
import { random } from "../../engine/index.ts";
import type { Film } from "./aim.ts";
import { type DemoEntry, type Doing, keepDiary, offsetOfDay } from "./demo-diary.ts";
import { type Traits, type VirtualChamber, virtualChamber } from "./virtual-chamber.ts";
import type { CellLight } from "./virtual-gauge.ts";
import { type ChamberSettings, TUBE_LIKE, type World } from "./worlds.ts";

export const DEMO_RECIPE = "blue";
export const DEMO_GOAL: Film = { index: 2.06, thicknessNm: 88 };

const SEED = "saltmarsh 2";
const START: ChamberSettings = new Map([
  ["silane", 812],
  ["ammonia", 6900],
  ["time", 560],
  ["power", 8000],
  ["pressure", 213],
  ["temperature", 450],
]);

/** The tube-like world, laid out for a thicker film; slips are put in by the story, not drawn. */
const SALTMARSH: World = {
  ...TUBE_LIKE,
  start: START,
  goal: DEMO_GOAL,
  rateNmPerS: 88 / 556,
  cycle: 200,
  slips: { reading: 0, setting: 0 },
};

const EVEN = { silane: 1, ammonia: 1, nitrogen: 1 };
const AFTER_EVENT: Traits["transient"] = { index: 0.002, rate: -0.02, fade: 2 };

const A1: Partial<Traits> = {
  index: 0.006,
  lnRate: 0.008,
  ignitionS: 4,
  facetFactor: 0.85,
  transient: AFTER_EVENT,
  controllers: EVEN,
};
const A2: Partial<Traits> = { ...A1, index: -0.004, lnRate: -0.012, ignitionS: 5 };
const B1: Partial<Traits> = { ...A1, index: 0.0, lnRate: 0.052 };

const A1_DOINGS: readonly Doing[] = [
  { do: "clean", what: "plates and boats" },
  { do: "precoat", count: 2 },
  { do: "run", times: 1 },
  { do: "trial", ratio: 0.96 },
  { do: "trial", ratio: 1.04, time: 1.03 },
  { do: "trial", flow: 1.03 },
  { do: "production", times: 8, unmeasured: 18 },
  { do: "clean", what: "plates and boats" },
  { do: "precoat", count: 2 },
  { do: "run", times: 1 },
  { do: "trial", time: 0.97 },
  { do: "retune", reason: "back to goal after the clean" },
  { do: "run", times: 1 },
  { do: "production", times: 4, unmeasured: 20 },
  { do: "service", what: "ammonia flow controller replaced", gains: { silane: 1.001, ammonia: 1.006 } },
  { do: "run", times: 1 },
  { do: "trial", ratio: 1.03 },
  { do: "retune", reason: "back to goal with the new ammonia controller" },
  { do: "run", times: 1 },
  { do: "production", times: 4, unmeasured: 20 },
  { do: "clean", what: "plates and boats" },
  { do: "precoat", count: 2 },
  { do: "run", times: 1 },
  { do: "trial", flow: 0.97 },
  { do: "retune", reason: "back to goal after the clean" },
  { do: "run", times: 2 },
  { do: "production", times: 2, unmeasured: 14 },
  { do: "retune", reason: "trimmed once the chamber had settled" },
  { do: "production", times: 8, unmeasured: 14 },
];

const A2_DOINGS: readonly Doing[] = [
  { do: "clean", what: "plates and boats" },
  { do: "run", times: 1 },
  { do: "trial", ratio: 1.04 },
  { do: "trial", ratio: 0.97, time: 1.02 },
  { do: "trial", time: 0.96 },
  { do: "production", times: 9, unmeasured: 17 },
  { do: "clean", what: "plates and boats, two boats exchanged", step: { index: 0.002, lnRate: 0.006 } },
  { do: "precoat", count: 2 },
  { do: "run", times: 1 },
  { do: "trial", flow: 1.03 },
  { do: "retune", reason: "back to goal after the clean" },
  { do: "run", times: 1 },
  { do: "production", times: 5, unmeasured: 18, wrongWafer: 3 },
  { do: "trial", ratio: 0.98 },
  { do: "retune", reason: "trimmed halfway through the cycle" },
  { do: "production", times: 10, unmeasured: 12 },
  // The step the story is about. With the drift that the clean undid, it leaves the index 0.015 and the rate 3.5 % low.
  { do: "clean", what: "plates, boats and gas lances", step: { index: -0.009, lnRate: -0.013 } },
  { do: "run", times: 4 },
];

const B1_DOINGS: readonly Doing[] = [
  { do: "note", text: "B1 handed over by the installers; starts on A1's recipe" },
  { do: "run", times: 3 },
];

/** The demo as it was played: the book's entries and the chambers as they stand at its end. */
export interface Demo {
  entries: DemoEntry[];
  chambers: ReadonlyMap<string, { chamber: VirtualChamber; settings: ChamberSettings }>;
}

/** A wafer kept for checking the ellipsometer, and when it was read. */
const REFERENCE: Film = { index: 2.012, thicknessNm: 79.6 };
const REFERENCE_READ = ["2026-02-16", "2026-02-23", "2026-03-02", "2026-03-09"].map((day) => `${day}T06:40:00.000Z`);

function referenceReadings(): DemoEntry[] {
  const scatter = random(SEED).fork("reference wafer");
  return REFERENCE_READ.map((at) => {
    const offset = offsetOfDay(Date.parse(at), SEED);
    return {
      at,
      by: "Marta",
      kind: "gauge",
      data: {
        gauge: "ellipsometer",
        reference: true,
        index: Number((REFERENCE.index + offset.index + scatter.normal(0, 0.002)).toFixed(3)),
        thickness_nm: Number((REFERENCE.thicknessNm + offset.thicknessNm + scatter.normal(0, 0.3)).toFixed(1)),
      },
    };
  });
}

/** Plays the story. `cellLight` is the demo line's coated wafer; thicknesses are on its facet. */
export function playDemo(cellLight: CellLight): Demo {
  const chambers = new Map<string, { chamber: VirtualChamber; settings: ChamberSettings }>();
  const entries: DemoEntry[] = referenceReadings();
  const play = (
    name: string,
    given: Partial<Traits>,
    from: string,
    settings: ChamberSettings,
    doings: readonly Doing[],
  ) => {
    const chamber = virtualChamber(SALTMARSH, `${SEED}/${name}`, { cellLight, given });
    const diary = keepDiary(
      { name, recipe: DEMO_RECIPE, chamber, settings, goal: DEMO_GOAL, from: Date.parse(from), seed: SEED },
      doings,
    );
    entries.push(...diary.entries);
    chambers.set(name, { chamber, settings: diary.settings });
    return diary.settings;
  };
  const copied = play("A1", A1, "2026-02-15T04:25:00Z", START, A1_DOINGS);
  play("A2", A2, "2026-02-19T10:40:00Z", START, A2_DOINGS);
  play("B1", B1, "2026-03-12T07:35:00Z", copied, B1_DOINGS);
  // ISO 8601 in one zone sorts as text.
  entries.sort((a, b) => (a.at < b.at ? -1 : a.at > b.at ? 1 : 0));
  return { entries, chambers };
}

/** The demo's book in the order it was written: what `new --demo` puts into a fresh line folder. */
export function demoEntries(cellLight: CellLight): DemoEntry[] {
  return playDemo(cellLight).entries;
}
