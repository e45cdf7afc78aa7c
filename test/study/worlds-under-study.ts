/**
 * The worlds a study draws, behind one face: the linear ones (six variants) and the tube-like ones. Says what the line
 * declares (levers, reference recipe, gauge) and gives chambers that deposit, are read and are cleaned.
 */
import type { GaugeCovariance, LearnOptions, Settings } from "../../calibration/index.ts";
import { random } from "../../engine/index.ts";
import type { Film } from "../../recipes/rehearsal/aim.ts";
import {
  drawLinearWorld,
  type LinearVariant,
  type LinearWorld,
  linearChamber,
  statedGauge,
} from "../../recipes/rehearsal/linear-world.ts";
import { type Traits, virtualChamber } from "../../recipes/rehearsal/virtual-chamber.ts";
import { drawWorld, type World } from "../../recipes/rehearsal/worlds.ts";

export interface StudyReading {
  index: number | null;
  thicknessNm: number | null;
  /** A gross slip, or a setting that was not what the book says. */
  spoilt: boolean;
}

export interface StudyChamber {
  /** Lays a film, to be read or not. Reading never changes what is laid afterwards. */
  run(settings: Settings): { film: Film; read(): StudyReading };
  clean(): { written: boolean };
  leak(index: number): void;
  readonly sinceClean: number;
}

export interface StudyWorld {
  /** What the line file would say. */
  options: LearnOptions;
  gauge: GaugeCovariance;
  goal: Film;
  tolerance: Film;
  /** Depositions from clean to clean; in production every so manieth is measured; sisters with a history. */
  cycle: number;
  measuredEvery: number;
  sisters: number;
  chamber(name: string): StudyChamber;
}

export interface WorldOptions {
  kind: LinearVariant | "tube";
  /** Chance of a gross slip in a reading, in place of the world's own. */
  slips?: number;
  /** Cleans leave steps so many times as large as the world draws them. */
  stepScale?: number;
}

const lever = (setting: string, low: number, high: number): LearnOptions["levers"][number] => ({
  setting,
  meaning: setting,
  acts: null,
  low,
  high,
});

/** The world of this seed. The same seed gives the same laws and the same weather whatever the other options. */
export function studyWorld(seed: string, options: WorldOptions): StudyWorld {
  return options.kind === "tube" ? tubeLine(seed, options) : linearLine(seed, options.kind, options);
}

function linearLine(seed: string, variant: LinearVariant, { slips, stepScale = 1 }: WorldOptions): StudyWorld {
  const drawn = drawLinearWorld(random(seed).fork("line"), variant);
  const world: LinearWorld = {
    ...drawn,
    slips: slips ?? drawn.slips,
    step: { index: drawn.step.index * stepScale, lnRate: drawn.step.lnRate * stepScale },
  };
  return {
    options: {
      levers: [lever("silane", 150, 500), lever("ammonia", 900, 3000), lever("time", 60, 240)],
      reference: world.reference,
      aim: world.aim,
      facet: { mean: 1, sd: 0 },
      minimumOf: null,
    },
    gauge: statedGauge(world),
    goal: world.goal,
    tolerance: world.tolerance,
    cycle: world.cycle,
    measuredEvery: world.measuredEvery,
    sisters: world.sisters,
    chamber(name) {
      const chamber = linearChamber(world, `${seed}/${name}`);
      return {
        run(settings) {
          const film = chamber.deposit(settings);
          const read = () => {
            const { index, thicknessNm, slip } = chamber.measure(film);
            return { index, thicknessNm, spoilt: slip !== null };
          };
          return { film: { index: film.index, thicknessNm: film.thicknessNm }, read };
        },
        clean: () => chamber.clean(),
        leak: (index) => chamber.leak(index),
        get sinceClean() {
          return chamber.depositionsSinceClean;
        },
      };
    },
  };
}

/** Repeatability of the virtual ellipsometer on polished wafers: what the line declares and what the virtual gauge has. */
const TUBE_GAUGE = { index: 0.002, thicknessNm: 0.3 };
/** A cycle of a tube holds 60 to 200 depositions, of which a shift measures about so many. */
const MEASURED_A_CYCLE = 25;
const MEAN_CHAMBER: Partial<Traits> = { index: 0, lnRate: 0, controllers: { silane: 1, ammonia: 1, nitrogen: 1 } };

function tubeLine(seed: string, { slips, stepScale = 1 }: WorldOptions): StudyWorld {
  const drawn = drawWorld(random(seed).fork("line"));
  const world: World = {
    ...drawn,
    // With the rate of slips stated, nothing else may go wrong: twins must lay the same films.
    slips: slips === undefined ? drawn.slips : { reading: slips, setting: 0 },
    cleanStep: { index: drawn.cleanStep.index * stepScale, lnRate: drawn.cleanStep.lnRate * stepScale },
  };
  // The line's reference recipe is meant to lay about what it lays in a chamber like the others.
  const usual = virtualChamber(world, "mean chamber", { given: MEAN_CHAMBER }).expected(world.start);
  return {
    options: {
      levers: [
        lever("silane", 300, 1200),
        lever("ammonia", 3000, 9000),
        lever("time", 200, 900),
        lever("power", 4000, 12000),
        lever("pressure", 180, 260),
        lever("temperature", 420, 480),
      ],
      reference: world.start,
      aim: { index: Number(usual.index.toFixed(2)), thicknessNm: Math.round(usual.thicknessNm) },
      facet: { mean: 1, sd: 0 },
      minimumOf: null,
    },
    gauge: [TUBE_GAUGE.index ** 2, 0, TUBE_GAUGE.thicknessNm ** 2],
    goal: world.goal,
    tolerance: { index: 0.02, thicknessNm: 2 },
    cycle: world.cycle,
    measuredEvery: Math.max(1, Math.round(world.cycle / MEASURED_A_CYCLE)),
    sisters: 3,
    chamber(name) {
      const chamber = virtualChamber(world, `${seed}/${name}`);
      return {
        run(settings) {
          const film = chamber.deposit(settings);
          const read = () => {
            const { index, thicknessNm, slip } = chamber.measure(film, { reads: "film on polished" });
            return { index, thicknessNm, spoilt: slip !== null || film.settings !== settings };
          };
          return { film: { index: film.index, thicknessNm: film.thicknessNm }, read };
        },
        clean() {
          chamber.clean();
          return { written: true };
        },
        leak: (index) => chamber.leak(index),
        get sinceClean() {
          return chamber.depositionsSinceClean;
        },
      };
    },
  };
}
