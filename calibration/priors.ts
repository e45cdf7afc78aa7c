/**
 * Every prior of the chamber model with its reason, in one place. All of them are there to be overruled by the chamber's
 * own runs; they decide only what is said while data are few. Fleet means are N(mean, sd); a chamber differs from the
 * fleet by N(0, spread). Figures without a source are common practice, no source.
 */

export interface Prior {
  mean: number;
  sd: number;
  /** Standard deviation from chamber to chamber, before the spread multiplier. */
  spread: number;
}

/** Terms of the index, per unit of their regressor (see film-response.ts). */
export const indexPriors = {
  /** Index at the reference recipe: mean is the goal's index when declared. Chamber offsets of 0.01-0.03 are usual. */
  offset: { mean: 2.05, sd: 0.08, spread: 0.02 },
  /** Per deposition since the clean. Sign differs from tool to tool, so it is barely signed. */
  drift: { mean: 1e-4, sd: 4e-4, spread: 3e-4 },
  /** Just after a clean, dying away as exp(-k/4): conditioning of the walls. */
  transient: { mean: 0, sd: 0.006, spread: 0.006 },
  /** Per unit of the ratio lever (ln of ammonia/silane to first order): dn/dlnR is -0.17 to -0.27 in most reactors. */
  ratio: { mean: -0.22, sd: 0.07, spread: 0.03 },
  /** Curvature left after the silane share has taken most of it. */
  ratioSquared: { mean: 0, sd: 0.03, spread: 0.015 },
  /** Per unit of ln(silane) at constant ratio, that is, of total flow. */
  silane: { mean: 0, sd: 0.03, spread: 0.015 },
  power: { mean: 0, sd: 0.03, spread: 0.015 },
  pressure: { mean: 0, sd: 0.04, spread: 0.015 },
  /** Per degree. */
  temperature: { mean: 0.0003, sd: 0.0005, spread: 0.0002 },
  nitrogen: { mean: 0, sd: 0.05, spread: 0.02 },
  duty: { mean: 0, sd: 0.05, spread: 0.02 },
  belt: { mean: 0, sd: 0.02, spread: 0.01 },
  ownLog: { mean: 0, sd: 0.2, spread: 0.05 },
  /** Per full declared range of the setting. */
  ownLinear: { mean: 0, sd: 0.1, spread: 0.03 },
} as const satisfies Record<string, Prior>;

/** Terms of ln(deposition rate). */
export const ratePriors = {
  /** Mean comes from the line's own reference recipe: its goal thickness over its time. */
  offset: { mean: 0, sd: 0.25, spread: 0.06 },
  drift: { mean: 0, sd: 5e-4, spread: 4e-4 },
  /** A freshly cleaned chamber often deposits a few per cent slower for 2-10 runs. */
  transient: { mean: -0.01, sd: 0.02, spread: 0.015 },
  ratio: { mean: -0.05, sd: 0.1, spread: 0.04 },
  /** Rate follows silane as a power of 0.6 to 1.0. */
  silane: { mean: 0.8, sd: 0.12, spread: 0.06 },
  power: { mean: 0.3, sd: 0.3, spread: 0.08 },
  pressure: { mean: 0.4, sd: 0.3, spread: 0.08 },
  temperature: { mean: 0, sd: 0.001, spread: 0.0003 },
  nitrogen: { mean: 0, sd: 0.3, spread: 0.05 },
  duty: { mean: 0.5, sd: 0.5, spread: 0.1 },
  /** Ignition: seconds during which nothing grows. */
  deadTime: { mean: 3, sd: 2, spread: 1 },
  ownLog: { mean: 0, sd: 0.7, spread: 0.1 },
  ownLinear: { mean: 0, sd: 0.3, spread: 0.05 },
} as const satisfies Record<string, Prior>;

export type IndexPriorName = keyof typeof indexPriors;
export type RatePriorName = keyof typeof ratePriors;
/** A standard deviation each of index and of ln thickness (or ln rate). */
export type Pair = readonly [index: number, lnThickness: number];

export interface Scatter {
  process: Pair;
  step: Pair;
  service: Pair;
  walk: Pair;
  badMeasurement: Pair;
}

/** Scatter, before the multipliers of the hyper-parameter nodes. */
export const scatter: Scatter = {
  /** True film from run to run at unchanged settings: index, ln thickness. */
  process: [0.003, 0.005],
  /** Step of the chamber's offset at a clean: index, ln rate. */
  step: [0.008, 0.018],
  /** A change of hardware moves the chamber like a new one of its kind would, short of a new slope. */
  service: [0.015, 0.04],
  /** Random walk of the offset per deposition. */
  walk: [0.0008, 0.0012],
  /** Extra scatter of a bad measurement: index, ln thickness. */
  badMeasurement: [0.03, 0.05],
};

/** All that a line file may overrule. */
export interface Priors {
  index: Readonly<Record<IndexPriorName, Prior>>;
  rate: Readonly<Record<RatePriorName, Prior>>;
  scatter: Scatter;
}

export const standardPriors: Priors = { index: indexPriors, rate: ratePriors, scatter };

/** What a line states of its own: any field of any prior, any pair of the scatter. */
export interface PriorOverrides {
  index?: Partial<Record<IndexPriorName, Partial<Prior>>>;
  rate?: Partial<Record<RatePriorName, Partial<Prior>>>;
  scatter?: Partial<Scatter>;
}

/** The standard priors with a line's own in their place. */
export function priorsWith(own: PriorOverrides = {}): Priors {
  const merged = <Name extends string>(
    table: Readonly<Record<Name, Prior>>,
    over: Partial<Record<Name, Partial<Prior>>> = {},
  ): Record<Name, Prior> => {
    const out: Record<Name, Prior> = { ...table };
    for (const name in over) out[name] = { ...table[name], ...over[name] };
    return out;
  };
  return {
    index: merged<IndexPriorName>(indexPriors, own.index),
    rate: merged<RatePriorName>(ratePriors, own.rate),
    scatter: { ...scatter, ...own.scatter },
  };
}

/** Prior weights of the three readings of a run: ordinary, bad measurement (2 to 5 in 100 are gross slips), unlogged step. */
export const hypothesisWeights = [0.945, 0.035, 0.02] as const;

/**
 * Multipliers of (process, step and walk, chamber spread) and the sd of their logarithms. `balance` splits the process scatter:
 * the index's is multiplied by it and the thickness's divided, because a reactor steady in rate need not be steady in index.
 */
export const hyperGrid = {
  process: [0.55, 0.8, 1.2, 1.75],
  balance: [0.8, 1, 1.25],
  step: [0.45, 1, 2.2],
  spread: [0.8, 1.8],
  logSd: { process: 0.5, balance: 0.25, step: 0.7, spread: 0.5 },
} as const;

/** Assumed ignition time about which the dead time enters linearly, s. */
export const assumedDeadTimeS = 3;
/** Depositions over which the transient after a clean dies away to 1/e. */
export const transientDepositions = 4;
/** A fault moves the index by this much at once and leaves the rate alone: an air leak, a wet boat, starved ammonia. */
export const faultShift = { index: 0.075, sd: 0.02, perEvent: 0.01, perRun: 0.002 } as const;
/** What witness-to-cell comparison itself cannot do better than, relative. */
export const facetFloor = 0.006;
/**
 * What the optics of the coated cell cannot do better than, whatever the reflectometer says: the texture of real wafers moves
 * weighted reflectance by some tenths of a per cent and the minimum by about a nanometre (common practice, no source).
 */
export const opticsFloor = { minimumNm: 1, weightedPercent: 0.3 } as const;
/** Chance that a reflectance reading has nothing to do with the film (wrong wafer, another order), and the range it then falls in. */
export const strayLight = { chance: 0.04, minimumNm: 300, weightedPercent: 10 } as const;
/**
 * Sizes a fault comes in, each of either sign, with what share of faults; and the chance that one begins at a clean or
 * service (perEvent) or at any measured run (perRun). Index: as above, or a large one (a valve left open). Rate (ln): power
 * or generator, pressure gauge, time base, boat position move it by some 10 %; a generator at half power or a boat in the
 * wrong place by 25 %. Sizes and shares are common practice, no source; the chances were set by the false alarms of 200
 * virtual chambers.
 */
export const shiftFaults = {
  index: {
    sizes: [
      { by: faultShift.index, sd: faultShift.sd, share: 0.85 },
      { by: 0.16, sd: 0.05, share: 0.15 },
    ],
    perEvent: 0.02,
    perRun: faultShift.perRun,
  },
  rate: {
    sizes: [
      { by: 0.1, sd: 0.03, share: 0.7 },
      { by: 0.25, sd: 0.08, share: 0.3 },
    ],
    perEvent: 0.005,
    perRun: 0.0003,
  },
} as const;

/**
 * What a lying controller or gauge is thought to do, before the readings are asked. Weights need not add up to one; they
 * are chances relative to each other, and decide only where the readings do not. Common practice, no source.
 */
export const causePriors = {
  /** Relative error of a controller that has gone wrong: most are found at a few per cent, 10 % would be seen at the tool. */
  controller: 0.03,
  /** A thermocouple or zone that has gone wrong, degrees. */
  temperature: 8,
  /** A gauge that has gone wrong: offset of the index, factor of the thickness. About twice a usual day-to-day offset. */
  gaugeIndex: 0.01,
  gaugeThickness: 0.015,
  weights: {
    /** Nothing has changed: the misses are scatter. Most questions are asked on a bad day. */
    ordinary: 0.4,
    /** The chamber moved as it does at a clean, and nobody wrote it down. */
    step: 0.12,
    /** A service that moved the chamber itself, as another chamber of its kind would differ. */
    serviceStep: 0.2,
    /** Flow controllers drift and are swapped more than anything else that sets a film. */
    silane: 0.08,
    ammonia: 0.08,
    nitrogen: 0.05,
    power: 0.06,
    pressure: 0.06,
    temperature: 0.04,
    /** A clock does not drift; a late ignition or an early end does happen. */
    time: 0.04,
    belt_speed: 0.05,
    other: 0.04,
    gaugeIndex: 0.03,
    gaugeThickness: 0.03,
    leak: 0.03,
  },
  /** How likely it began at a clean, service or entered change rather than at one of the latest runs, each. */
  onsetEvent: 0.25,
  onsetRun: 0.1,
  /**
   * Chance that what was done at the tool also brought back the transient that follows a clean: at a service written down
   * as often as not, at a run only if somebody opened the tool and said nothing. A step is a clean nobody wrote down, or
   * no clean at all.
   */
  restartAtService: 0.5,
  restartAtRun: 0.1,
  restartAtStep: 0.5,
} as const;
/**
 * A shift that all chambers share (a gauge, the gas supply): sd of index and ln thickness; the chance that one begins at a
 * measured run of the line, and that instead a chamber has moved so on its own. Common practice, no source; the chances were
 * set by the false alarms of virtual lines.
 */
export const commonShift = { sd: [0.02, 0.04] as Pair, perRun: 0.003, own: 0.02 } as const;
/**
 * How a gauge wanders beside its reference wafer, in (index, thickness nm): lamp, alignment and temperature move an
 * ellipsometer by some 0.0001 and 0.01 nm a day, in one direction for a month or two (0.007 over two months, 0.02 over a
 * year). How fast this one does the readings decide, through the multipliers `paceTimes`. A certified wafer finds the gauge
 * within `start` of the truth. Where no reference was read for long, no more than `unseen` is feared: a gauge further out
 * moves all chambers at once and is noticed. A reference read further than `farOff` from the others is another wafer or a
 * slip. Common practice, no source.
 */
export const gaugeDrift = {
  pacePerDay: [0.00013, 0.013],
  memoryDays: 60,
  paceTimes: [0.5, 1, 2],
  logSdOfPace: 1,
  start: [0.02, 2],
  unseen: [0.006, 0.6],
  farOff: [0.1, 10],
  /** Chance that a reference reading is none (a slip, dust, another spot), and squared surprise from which that is asked. */
  slip: 0.02,
  surprise: 25,
} as const;
/**
 * Mistakes of reading, each as a share of all readings, within the 4 % that are bad in one way or another (common practice,
 * no source): units slipped, a wafer of the wrong kind, exchanged with one other given run. The index read of a wrong wafer
 * is off by waferIndexSd. A facet factor whose logarithm is under leastFacet tells no wafers apart. No film has a minimum
 * of light under leastMinimumNm.
 */
export const readingSlips = {
  unit: 0.004,
  wafer: 0.012,
  waferIndexSd: 0.03,
  leastFacet: 0.03,
  exchanged: 0.001,
  leastMinimumNm: 20,
} as const;
