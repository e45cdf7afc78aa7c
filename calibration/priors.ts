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

/** Prior weights of the three readings of a run: ordinary, bad measurement, unlogged step. */
export const hypothesisWeights = [0.94, 0.04, 0.02] as const;

/** Multipliers of (process, step and walk, chamber spread) and the sd of their logarithms: 4 x 3 x 2 nodes. */
export const hyperGrid = {
  process: [0.55, 0.8, 1.2, 1.75],
  step: [0.45, 1, 2.2],
  spread: [0.8, 1.8],
  logSd: [0.5, 0.7, 0.5],
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
