/** A line of virtual chambers with logged histories, for judging the chamber model on a truth that is not its own. */
import {
  type ChamberEvent,
  type ChamberLog,
  type LearnOptions,
  type Lever,
  LineModel,
} from "../../calibration/index.ts";
import { random } from "../../engine/index.ts";
import { type VirtualChamber, virtualChamber } from "../../recipes/rehearsal/virtual-chamber.ts";
import type { World } from "../../recipes/rehearsal/worlds.ts";
import { drawWorld } from "../../recipes/rehearsal/worlds.ts";

/** Repeatability of the virtual polished-witness gauge. */
const gauge = { index: 0.002, thicknessNm: 0.3 };

export const levers: Lever[] = [
  ["silane", 300, 1200],
  ["ammonia", 3000, 9000],
  ["time", 200, 900],
  ["power", 4000, 12000],
  ["pressure", 180, 260],
  ["temperature", 420, 480],
].map(([setting, low, high]) => ({
  setting: String(setting),
  meaning: String(setting),
  acts: null,
  low: Number(low),
  high: Number(high),
}));

export interface VirtualLine {
  world: World;
  chambers: { name: string; virtual: VirtualChamber; events: ChamberEvent[] }[];
  options: LearnOptions;
  model(): LineModel;
}

let entry = 0;

/** Runs a chamber at settings and appends the reading to its log. */
export function runAndLog(
  chamber: VirtualLine["chambers"][number],
  settings: ReadonlyMap<string, number>,
): { index: number; thicknessNm: number } {
  const film = chamber.virtual.deposit(settings);
  const read = chamber.virtual.measure(film, { reads: "film on polished" });
  chamber.events.push({
    kind: "run",
    entry: entry++,
    settings,
    count: 1,
    sinceClean: null,
    film:
      read.index === null && read.thicknessNm === null
        ? null
        : { index: read.index, thicknessNm: read.thicknessNm, gauge: [gauge.index ** 2, 0, gauge.thicknessNm ** 2] },
    light: [],
  });
  return film;
}

export function logClean(chamber: VirtualLine["chambers"][number]): void {
  chamber.virtual.clean();
  chamber.events.push({ kind: "clean", entry: entry++ });
}

/** Settings moved at random about the world's start by a few per cent, typed to the grid: real histories have such moves. */
export function scattered(world: World, source: { normal(): number }, size = 0.02): Map<string, number> {
  const out = new Map(world.start);
  for (const name of ["silane", "ammonia", "time"])
    out.set(name, Math.round((world.start.get(name) as number) * (1 + size * source.normal())));
  return out;
}

/** A line whose named chambers have `runs` runs each, cleaned every `cycle` runs. Slips (bad readings) as the world has them unless `clean`. */
export function virtualLine(
  seed: string,
  plan: { name: string; runs: number }[],
  { cycle = 25, slips = false } = {},
): VirtualLine {
  const source = random(seed);
  const drawn = drawWorld(source.fork("world"));
  const world: World = slips ? drawn : { ...drawn, slips: { reading: 0, setting: 0 } };
  const chambers = plan.map(({ name }) => ({
    name,
    virtual: virtualChamber(world, `${seed} ${name}`),
    events: [] as ChamberEvent[],
  }));
  plan.forEach(({ runs }, c) => {
    for (let i = 0; i < runs; i++) {
      if (i > 0 && i % cycle === 0) logClean(chambers[c]);
      runAndLog(chambers[c], scattered(world, source));
    }
  });
  const start = virtualChamber(world, "reference", { given: { index: 0, lnRate: 0 } }).expected(world.start);
  const options: LearnOptions = {
    levers,
    reference: world.start,
    aim: { index: Number(start.index.toFixed(2)), thicknessNm: Math.round(start.thicknessNm) },
    facet: { mean: 1, sd: 0 },
    minimumOf: null,
  };
  const logs = (): ChamberLog[] => chambers.map((c) => ({ chamber: c.name, events: c.events }));
  return { world, chambers, options, model: () => new LineModel(logs(), options) };
}
