/**
 * Stages on linear worlds: a new chamber, a newly wanted film, and sisters with ten logged runs each. The line declares
 * silane, ammonia and time, typed to 1 sccm and 1 s.
 */
import { random } from "../../engine/index.ts";
import {
  drawLinearWorld,
  type LinearChamber,
  type LinearVariant,
  type LinearWorld,
  linearChamber,
} from "./linear-world.ts";
import type { Brief, Stage, StageLever } from "./stage.ts";
import { lockstep, scattered, sisterLog } from "./stage-parts.ts";
import type { ChamberSettings } from "./worlds.ts";

const LEVERS: readonly StageLever[] = [
  { name: "silane", low: 150, high: 500, smallest: 1, tune: true },
  { name: "ammonia", low: 900, high: 3000, smallest: 1, tune: true },
  { name: "time", low: 60, high: 240, smallest: 1, tune: true },
];
/** Half to twice the reference's ammonia/silane of 6. */
const RATIO = [3, 12] as const;

/** The stage of this seed; the same world, weather and sisters in every variant but for what the variant changes. */
export function linearStage(seed: string, variant: LinearVariant): { stage: Stage; world: LinearWorld } {
  const world = drawLinearWorld(random(seed).fork("line"), variant);
  const chamberOf = (name: string) => {
    const make = () => linearChamber(world, `${seed}/${name}`);
    const lay = (chamber: LinearChamber, settings: ChamberSettings) => {
      const { index, thicknessNm } = chamber.deposit(settings);
      const film = { index, thicknessNm };
      return { film, reading: chamber.measure(film) };
    };
    return lockstep(make, lay, { startsWithStep: true });
  };
  const moves = random(seed).fork("moves");
  const { index, thicknessNm, correlation, sites } = world.gauge;
  const brief: Brief = {
    reference: world.reference,
    aim: world.aim,
    goal: world.goal,
    tolerance: world.tolerance,
    start: world.reference,
    levers: LEVERS,
    ratio: RATIO,
    gauge: { index, thicknessNm, correlation, sites },
    sisters: Array.from({ length: world.sisters }, (_, i) => {
      const name = `sister ${i + 1}`;
      const source = moves.fork(i);
      return { name, log: sisterLog(chamberOf(name), () => scattered(world.reference, LEVERS, source)) };
    }),
    history: [],
  };
  return { stage: { brief, chamber: () => chamberOf("under tune") }, world };
}
