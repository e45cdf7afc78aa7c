/**
 * Worlds: what is common to the chambers of one invented line, and how such a line is drawn at random. Used by the demo
 * line, the rehearsal and the closed-loop tests. Nothing here may know the calibration model: a rehearsal on chambers
 * that obey the model's own equations would only show that the model agrees with itself.
 *
 * The laws are in `film-law.ts`; the ranges below are assumptions about chambers in the trade, not plant data. Where a
 * published law stands behind one it is named there.
 */
import { type Random, refuse } from "../../engine/index.ts";
import { aim } from "./aim.ts";
import { filmLaw, indexSlopePerLogRatio } from "./film-law.ts";

/** Settings by name in canonical units: sccm, s, W, Pa, degC. */
export type ChamberSettings = ReadonlyMap<string, number>;

export interface World {
  /** The recipe of the first day; powers and slopes are taken around it. Needs silane, ammonia, time, power, pressure, temperature. */
  start: ChamberSettings;
  /** Film wanted on a polished witness. */
  goal: { index: number; thicknessNm: number };
  /** Weight of nitrogen gas beside ammonia in the gas ratio. */
  nitrogenWeight: number;
  /** Composition [N]/[Si] = xMost / (1 + (ratioHalf / ratio)^steepness). */
  xMost: number;
  ratioHalf: number;
  steepness: number;
  indexPerDegC: number;
  indexPerLnPower: number;
  indexPerLnPressure: number;
  indexPerLnFlow: number;
  /** Growth at the start recipe in a chamber without offset, nm/s. */
  rateNmPerS: number;
  silaneExponent: number;
  ammoniaExponent: number;
  powerExponent: number;
  pressureExponent: number;
  lnRatePerDegC: number;
  /** Depositions from clean to clean, over which the two drifts below build up. */
  cycle: number;
  rateDriftPerCycle: number;
  indexDriftPerCycle: number;
  /** Scatter of the moment the plasma catches, s. */
  ignitionJitterS: number;
  /** Standard deviations of the deposition itself; the index scatter is AR(1) with the given memory. */
  scatter: { index: number; memory: number; lnRate: number };
  /** Spread of the chambers of this line. */
  spread: { index: number; lnRate: number; controller: number };
  /** Random walk of a controller's gain, per deposition. */
  controllerWalk: number;
  /** Offsets drawn at each clean. */
  cleanStep: { index: number; lnRate: number };
  /** Thickness falls along the boat by this fraction from end to end, bends by `bend`, and the index moves by `index`. */
  boat: { tilt: number; bend: number; index: number };
  /** Chance of a gross slip in a reading, and of a setting that was changed without being written down. */
  slips: { reading: number; setting: number };
  /** Does each clean draw the transient after it anew? */
  redrawTransients: boolean;
}

/** The default recipe of a tube-like tool (common practice, no source). */
export const TUBE_START: ChamberSettings = new Map([
  ["silane", 780],
  ["ammonia", 7020],
  ["time", 560],
  ["power", 8000],
  ["pressure", 213],
  ["temperature", 450],
]);

/**
 * A tube-like line without surprises: index 2.04 and 73 nm at `TUBE_START`. Chosen so that one per cent more silane gives
 * +0.0022 in index and +0.62 nm, ammonia -0.0018, time +0.73 nm, power +0.25 nm, pressure +0.29 nm.
 */
export const TUBE_LIKE: World = {
  start: TUBE_START,
  goal: { index: 2.06, thicknessNm: 73 },
  nitrogenWeight: 0,
  xMost: 1.585,
  ratioHalf: 4.08,
  steepness: 1,
  indexPerDegC: 0.0003,
  indexPerLnPower: 0,
  indexPerLnPressure: 0,
  indexPerLnFlow: 0.04,
  rateNmPerS: 73 / 556,
  silaneExponent: 0.85,
  ammoniaExponent: -0.05,
  powerExponent: 0.34,
  pressureExponent: 0.4,
  lnRatePerDegC: 0,
  cycle: 120,
  rateDriftPerCycle: 0.01,
  indexDriftPerCycle: 0.002,
  ignitionJitterS: 0.5,
  scatter: { index: 0.005, memory: 0.3, lnRate: 0.009 },
  spread: { index: 0.015, lnRate: 0.03, controller: 0.005 },
  controllerWalk: 0.0005,
  cleanStep: { index: 0.006, lnRate: 0.015 },
  boat: { tilt: 0.04, bend: 0.02, index: 0.01 },
  slips: { reading: 0.03, setting: 0.01 },
  redrawTransients: false,
};

/** Bounds inside which a world's goal must be reachable. */
export interface Bounds {
  ratio: readonly [number, number];
  timeS: readonly [number, number];
}

export const TUBE_BOUNDS: Bounds = { ratio: [5, 14], timeS: [200, 900] };

/** Slopes of index against ln(gas ratio) that chambers of the trade show; worlds outside are drawn again. */
export const CREDIBLE_SLOPE: readonly [number, number] = [-0.28, -0.14];

function drawOnce(source: Random, base: World): World {
  return {
    ...base,
    nitrogenWeight: source.uniform(0, 0.03),
    xMost: source.uniform(1.4, 1.7),
    ratioHalf: source.uniform(0.7, 5),
    steepness: source.uniform(0.8, 1.2),
    indexPerDegC: source.uniform(0, 0.001),
    indexPerLnPower: source.uniform(-0.03, 0.03),
    indexPerLnPressure: source.uniform(-0.05, 0.05),
    indexPerLnFlow: source.uniform(0, 0.07),
    silaneExponent: source.uniform(0.6, 1),
    ammoniaExponent: source.uniform(-0.2, 0.1),
    powerExponent: source.uniform(0, 0.6),
    pressureExponent: source.uniform(0.2, 0.8),
    lnRatePerDegC: source.uniform(-0.001, 0.001),
    cycle: Math.round(source.uniform(60, 200)),
    rateDriftPerCycle: source.uniform(-0.03, 0.05),
    indexDriftPerCycle: source.uniform(-0.01, 0.01),
    ignitionJitterS: source.uniform(0.3, 1),
    boat: { tilt: source.uniform(0.02, 0.06), bend: source.uniform(0, 0.04), index: source.uniform(-0.01, 0.01) },
  };
}

/**
 * Is the world one that a line could be? The index must react to the gas ratio as chambers do, and the goal must lie
 * inside the bounds, with room for a chamber two standard deviations off on either side.
 */
export function credible(world: World, bounds: Bounds = TUBE_BOUNDS): boolean {
  const slope = indexSlopePerLogRatio(world, world.start);
  if (slope < CREDIBLE_SLOPE[0] || slope > CREDIBLE_SLOPE[1]) return false;
  const off = 2 * world.spread.index;
  return [-off, off].every((offset) => {
    const film = (settings: ChamberSettings) => {
      const { index, rateNmPerS } = filmLaw(world, settings);
      return { index: index + offset, thicknessNm: rateNmPerS * ((settings.get("time") ?? 0) - 4) };
    };
    return aim(film, world.start, world.goal, { bounds }) !== null;
  });
}

/**
 * Draws a world from the ranges. `base` gives what is not drawn (start recipe, goal, sizes of the scatter). Refuses with
 * `no-world` when a thousand draws give none, which means that the base's goal is out of reach.
 */
export function drawWorld(source: Random, base: World = TUBE_LIKE, bounds: Bounds = TUBE_BOUNDS): World {
  for (let attempt = 0; attempt < 1000; attempt++) {
    const world = drawOnce(source, base);
    if (credible(world, bounds)) return world;
  }
  return refuse("no-world", "a thousand draws gave no world whose goal the window reaches", {
    hint: "bring the goal nearer to what the start recipe gives, or widen the bounds",
  });
}
