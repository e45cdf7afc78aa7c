/**
 * Stages on tube-like worlds, whose laws are not the calibration's: a chamber with a history that comes back from a clean,
 * or a new one beside sisters. Settings as the trade types them: silane 1 sccm, ammonia 10 sccm, time 1 s.
 */
import { random } from "../../engine/index.ts";
import { aim, TUBE_STEPS } from "./aim.ts";
import { typedValue } from "./practices/dials.ts";
import type { Brief, Logged, Stage, StageChamber, StageLever } from "./stage.ts";
import { lockstep, scattered, sisterLog } from "./stage-parts.ts";
import { type Traits, type VirtualChamber, virtualChamber } from "./virtual-chamber.ts";
import type { ChamberSettings, World } from "./worlds.ts";
import { drawWorld, TUBE_BOUNDS, TUBE_LIKE } from "./worlds.ts";

const lever = (name: string, low: number, high: number, smallest: number, tune = false): StageLever => ({
  name,
  low,
  high,
  smallest,
  tune,
});
const LEVERS: readonly StageLever[] = [
  lever("silane", 300, 1200, 1, true),
  lever("ammonia", 3000, 9000, 10, true),
  lever("time", 200, 900, 1, true),
  lever("power", 4000, 12000, 10),
  lever("pressure", 180, 260, 1),
  lever("temperature", 420, 480, 1),
];
/** Repeatability of the virtual gauge on polished witnesses, as the line states it. */
const GAUGE = { index: 0.002, thicknessNm: 0.3, correlation: 0, sites: 1 } as const;
const TOLERANCE = { index: 0.02, thicknessNm: 2 } as const;
const MEAN_CHAMBER: Partial<Traits> = { index: 0, lnRate: 0, controllers: { silane: 1, ammonia: 1, nitrogen: 1 } };
/** Depositions after which the transient of a clean has died away. */
const HALF_WAY = 12;
/** Sd of the moves in every other run of a chamber's history. */
const HISTORY_MOVES = 0.015;

export interface TubeOptions {
  /** Measured runs of the chamber's own history, cleaned after every `cleanEvery`; 0 for a new chamber. */
  history: number;
  cleanEvery: number;
  /** Does its tuning begin with a clean? */
  afterClean: boolean;
  sisters: number;
  /** Chance of a gross slip in a reading, in place of the world's own. */
  slips?: number;
  /** Share of the cleans that nobody writes down. */
  unwritten?: number;
  /** Index newly wanted, in place of the world's. */
  wantedIndex?: number;
  /** Which settings were ever moved in the history and in the sisters' logs; all three when left out. */
  moved?: readonly string[];
}

/** The stage of this seed. */
export function tubeStage(seed: string, options: TubeOptions): { stage: Stage; world: World } {
  const drawn = drawWorld(random(seed).fork("line"), TUBE_LIKE);
  const { slips, unwritten = 0 } = options;
  const world: World = { ...drawn, slips: { ...drawn.slips, reading: slips ?? drawn.slips.reading } };
  const luck = random(seed).fork("unwritten");
  const written = unwritten > 0 ? (clean: number) => !luck.fork(clean).chance(unwritten) : undefined;
  const chamberOf = (name: string): StageChamber => {
    const make = () => virtualChamber(world, `${seed}/${name}`);
    const lay = (chamber: VirtualChamber, settings: ChamberSettings) => {
      const film = chamber.deposit(settings);
      const { index, thicknessNm } = film;
      return { film: { index, thicknessNm }, reading: chamber.measure(film, { reads: "film on polished" }) };
    };
    return lockstep(make, lay, { startsWithStep: false, written });
  };
  const moves = random(seed).fork("moves");
  const kept = (about: ChamberSettings, moved: ChamberSettings): ChamberSettings =>
    options.moved
      ? new Map([...moved].map(([n, v]) => [n, options.moved?.includes(n) ? v : (about.get(n) ?? v)]))
      : moved;
  const usual = virtualChamber(world, "mean chamber", { given: MEAN_CHAMBER }).expected(world.start);
  const under = () => chamberOf("under tune");
  const settled = settledRecipe(under(), world);
  const lived = (chamber: StageChamber): Logged[] => {
    const log: Logged[] = [];
    const own = moves.fork("history");
    const clean = () => {
      if (chamber.clean().written) log.push({ kind: "clean" });
    };
    for (let i = 0; i < options.history; i++) {
      if (i > 0 && i % options.cleanEvery === 0) clean();
      const moved = scattered(settled, LEVERS, own, HISTORY_MOVES);
      const settings = i % 2 === 0 ? kept(settled, moved) : settled;
      log.push({ kind: "run", settings, reading: chamber.run(settings).reading });
    }
    if (options.afterClean) clean();
    return log;
  };
  const brief: Brief = {
    reference: world.start,
    aim: { index: Number(usual.index.toFixed(2)), thicknessNm: Math.round(usual.thicknessNm) },
    goal: { ...world.goal, index: options.wantedIndex ?? world.goal.index },
    tolerance: TOLERANCE,
    start: options.history > 0 ? settled : world.start,
    levers: LEVERS,
    ratio: TUBE_BOUNDS.ratio,
    gauge: GAUGE,
    sisters: Array.from({ length: options.sisters }, (_, i) => {
      const name = `sister ${i + 1}`;
      const source = moves.fork(i);
      const log = sisterLog(chamberOf(name), () => kept(world.start, scattered(world.start, LEVERS, source)));
      return { name, log };
    }),
    history: lived(under()),
  };
  const chamber = () => {
    const one = under();
    lived(one);
    return one;
  };
  return { stage: { brief, chamber }, world };
}

/** What the people of the line have come to run: about right for the chamber half-way from clean to clean, typed in. */
function settledRecipe(chamber: StageChamber, world: World): ChamberSettings {
  for (let i = 0; i < HALF_WAY; i++) chamber.run(world.start);
  const film = (settings: ChamberSettings) => chamber.usual(settings);
  const found = aim(film, world.start, world.goal, { bounds: TUBE_BOUNDS, steps: TUBE_STEPS }) ?? world.start;
  return new Map([...found].map(([name, value]) => [name, typedValue({ levers: LEVERS }, name, value)]));
}
