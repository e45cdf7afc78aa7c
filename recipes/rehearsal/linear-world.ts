/**
 * Worlds whose chambers obey simple laws, linear in the logarithms of gas ratio and silane flow, for judging the
 * calibration where its form is nearly right, and, in the mis-specified variant, where it is wrong in known ways. The
 * tube-like worlds of `worlds.ts` obey other laws; a figure that holds on both kinds is worth something.
 *
 *     index     n    = b + step + drift(k) + a x + c x^2 + e s + (interactions) + leak + scatter
 *     ln rate   ln G = r + step + drift(k) + q x + p s + (interactions) + scatter
 *     witness   d    = G (t - t0)              x = ln(R/R0), R = NH3/SiH4, s = ln(SiH4/SiH4_0)
 *
 * with k depositions since the clean. The laws are written here anew: nothing may be taken from the model that is to be
 * judged. All sizes are assumptions about chambers in the trade, not plant data; flows and time of the reference recipe
 * are a choice, since the laws know ratios to them only.
 */
import { type Random, random, refuse } from "../../engine/index.ts";
import type { Film } from "./aim.ts";
import { need } from "./film-law.ts";
import type { ChamberSettings } from "./worlds.ts";

/** The coefficients of a chamber's laws. Drifts are per deposition since the clean. */
export interface LinearLaw {
  index: number;
  indexPerRatio: number;
  indexPerRatioSquared: number;
  indexPerSilane: number;
  indexDrift: number;
  lnRate: number;
  ratePerRatio: number;
  ratePerSilane: number;
  rateDrift: number;
  ignitionS: number;
}

/** Mean of the lines of the trade, sd from line to line, sd from chamber to chamber of one line. */
const LAWS: Readonly<Record<keyof LinearLaw, readonly [number, number, number]>> = {
  index: [2.05, 0.03, 0.018],
  indexPerRatio: [-0.25, 0.05, 0.025],
  indexPerRatioSquared: [0.06, 0.03, 0.015],
  indexPerSilane: [0.02, 0.02, 0.01],
  indexDrift: [3e-4, 2e-4, 3e-4],
  lnRate: [Math.log(0.65), 0.1, 0.05],
  ratePerRatio: [-0.08, 0.06, 0.03],
  ratePerSilane: [0.75, 0.08, 0.05],
  rateDrift: [-4e-4, 3e-4, 4e-4],
  ignitionS: [3, 1.5, 0.7],
};
const TERMS = Object.keys(LAWS) as (keyof LinearLaw)[];

/**
 * base: as the sizes above say; tight: a goal half as wide; cold: a line without sisters; wide: chambers twice as far
 * apart; fifth: production measured every fifth deposition; misfit: scatter of Student's t with 3 degrees of freedom, a gauge 1.5 times
 * as inexact as stated, 30 % of the cleans not written down, a drift that comes to an end, interactions.
 */
export type LinearVariant = "base" | "tight" | "cold" | "wide" | "fifth" | "misfit";

export interface LinearWorld {
  variant: LinearVariant;
  /** Recipe of the first day: silane and ammonia in sccm, time in s. */
  reference: ChamberSettings;
  /** What the line takes that recipe to give; no chamber gives just that. */
  aim: Film;
  /** The film newly wanted, and how far off it may be. */
  goal: Film;
  tolerance: Film;
  /** The mean chamber of this line, and the sd of its chambers about it. */
  law: LinearLaw;
  spread: LinearLaw;
  /** Index per (x s), ln rate per (x s), index drift per (x k): zero but in the misfit variant. */
  interactions: { index: number; lnRate: number; indexDrift: number };
  /** Depositions over which the drift comes to its end; infinite for one that does not. */
  driftEnds: number;
  /** Depositions from clean to clean. */
  cycle: number;
  /** Standard deviations: of the offset left by a clean, of its walk per deposition, of the deposition itself. */
  step: { index: number; lnRate: number };
  walk: { index: number; lnRate: number };
  scatter: { index: number; lnRate: number; heavy: boolean };
  /** Gauge as stated, for one site; the true one is `inexact` times as wide. A reading is the mean of the sites. */
  gauge: { index: number; thicknessNm: number; correlation: number; sites: number; inexact: number };
  /** Chance of a gross slip in a reading. */
  slips: number;
  /** Chance that a clean is not written down. */
  unwrittenCleans: number;
  /** Other chambers of the line with a history. */
  sisters: number;
  /** In production every so manieth deposition is measured. */
  measuredEvery: number;
}

/** Draws a line of the variant. The same source gives the same line in every variant but for what the variant changes. */
export function drawLinearWorld(source: Random, variant: LinearVariant = "base"): LinearWorld {
  const law = {} as LinearLaw;
  const spread = {} as LinearLaw;
  for (const term of TERMS) {
    const [mean, betweenLines, betweenChambers] = LAWS[term];
    law[term] = source.normal(mean, betweenLines);
    spread[term] = betweenChambers * (variant === "wide" ? 2 : 1);
  }
  law.ignitionS = Math.max(law.ignitionS, 0);
  const stepScale = Math.exp(0.4 * source.normal());
  const scatterScale = Math.exp(0.3 * source.normal());
  const goal = { index: source.uniform(1.98, 2.14), thicknessNm: source.uniform(68, 92) };
  // Drawn in every variant, so that what follows does not shift. Sizes invented: at x = 0.2 some 0.004 and 1 %.
  const interactions = {
    index: source.normal(0, 0.1),
    lnRate: source.normal(0, 0.3),
    indexDrift: source.normal(0, 0.001),
  };
  const misfit = variant === "misfit";
  return {
    variant,
    reference: new Map([
      ["silane", 300],
      ["ammonia", 1800],
      ["time", 126],
    ]),
    aim: { index: 2.05, thicknessNm: 80 },
    goal: { index: Number(goal.index.toFixed(2)), thicknessNm: Math.round(goal.thicknessNm) },
    tolerance: variant === "tight" ? { index: 0.01, thicknessNm: 1 } : { index: 0.02, thicknessNm: 2 },
    law,
    spread,
    interactions: misfit ? interactions : { index: 0, lnRate: 0, indexDrift: 0 },
    driftEnds: misfit ? 8 : Number.POSITIVE_INFINITY,
    cycle: 25,
    step: { index: 0.007 * stepScale, lnRate: 0.015 * stepScale },
    walk: { index: 0.0008, lnRate: 0.0015 },
    scatter: { index: 0.003 * scatterScale, lnRate: 0.005 * scatterScale, heavy: misfit },
    gauge: { index: 0.004, thicknessNm: 0.5, correlation: -0.5, sites: 5, inexact: misfit ? 1.5 : 1 },
    slips: 0.03,
    unwrittenCleans: misfit ? 0.3 : 0,
    sisters: variant === "cold" ? 0 : 3,
    measuredEvery: variant === "fifth" ? 5 : 1,
  };
}

/** Covariance of (index, thickness nm) that the line states for one reading, sites averaged: [var index, cov, var thickness]. */
export function statedGauge({ gauge }: LinearWorld): [number, number, number] {
  const { index, thicknessNm, correlation, sites } = gauge;
  return [index ** 2 / sites, (correlation * index * thicknessNm) / sites, thicknessNm ** 2 / sites];
}

export interface LinearDeposited extends Film {
  /** Depositions since the clean before this one. */
  sinceClean: number;
}

export interface LinearReading {
  index: number;
  thicknessNm: number;
  /** What went wrong with this reading, which nobody wrote down. For the score, never for the advice. */
  slip: "gross" | null;
}

export interface LinearChamber {
  readonly law: LinearLaw;
  /** Lays one film and ages the chamber by one deposition. Refuses missing or impossible settings. */
  deposit(settings: ChamberSettings): LinearDeposited;
  /** Reads a film on a polished witness, with the gauge's scatter and now and then a gross slip. */
  measure(film: Film): LinearReading;
  /** The film that the next deposition would give without scatter: what an oracle knows. */
  expected(settings: ChamberSettings): Film;
  /** A clean; the step it leaves may be stated, else it is drawn. Says whether anybody wrote it down. */
  clean(step?: { index: number; lnRate: number }): { written: boolean };
  /** An air leak: index lower by 0.05 to 0.1 (drawn unless stated) until mended. */
  leak(index?: number): void;
  mend(): void;
  readonly depositionsSinceClean: number;
}

/**
 * A chamber of the world, drawn from its seed; `given` states coefficients instead of drawing them. Depositions and gauge
 * have streams of their own, so that measuring more or less, or slipping more often, never changes what is deposited.
 */
export function linearChamber(
  world: LinearWorld,
  chamberSeed: number | string,
  { given = {} }: { given?: Partial<LinearLaw> } = {},
): LinearChamber {
  const weather = random(chamberSeed).fork("weather");
  const eye = random(chamberSeed).fork("gauge");
  const law = {} as LinearLaw;
  for (const term of TERMS) law[term] = weather.normal(world.law[term], world.spread[term]);
  law.ignitionS = Math.max(law.ignitionS, 0);
  Object.assign(law, given);
  const { reference } = world;

  const drawStep = () => ({
    index: world.step.index * weather.normal(),
    lnRate: world.step.lnRate * weather.normal(),
  });
  // A chamber's book begins some time after a clean like any other.
  let offset = drawStep();
  let leakIndex = 0;
  let sinceClean = 0;

  /** Index and thickness without scatter; ln thickness too, because the scatter is on that scale. */
  function steady(settings: ChamberSettings): { index: number; lnThickness: number } {
    const s = Math.log(need(settings, "silane") / need(reference, "silane"));
    const x = Math.log(need(settings, "ammonia") / need(reference, "ammonia")) - s;
    const time = need(settings, "time");
    const growingS = time - law.ignitionS;
    if (growingS <= 0) refuse("out-of-range", `time ${time} s is over before the plasma catches`);
    const { driftEnds, interactions } = world;
    const age = Number.isFinite(driftEnds) ? driftEnds * (1 - Math.exp(-sinceClean / driftEnds)) : sinceClean;
    const index =
      law.index +
      offset.index +
      (law.indexDrift + interactions.indexDrift * x) * age +
      law.indexPerRatio * x +
      law.indexPerRatioSquared * x * x +
      law.indexPerSilane * s +
      interactions.index * x * s +
      leakIndex;
    const lnRate =
      law.lnRate +
      offset.lnRate +
      law.rateDrift * age +
      law.ratePerRatio * x +
      law.ratePerSilane * s +
      interactions.lnRate * x * s;
    return { index, lnThickness: lnRate + Math.log(growingS) };
  }

  /** One standard number: normal, or Student's t with 3 degrees of freedom scaled to the same variance (3 before scaling). */
  function noise(): number {
    const z = weather.normal();
    if (!world.scatter.heavy) return z;
    const chiSquare = weather.normal() ** 2 + weather.normal() ** 2 + weather.normal() ** 2;
    return z / Math.sqrt(chiSquare);
  }

  return {
    law,
    deposit(settings) {
      const at = steady(settings);
      const film: LinearDeposited = {
        index: at.index + world.scatter.index * noise(),
        thicknessNm: Math.exp(at.lnThickness + world.scatter.lnRate * noise()),
        sinceClean,
      };
      sinceClean += 1;
      offset = {
        index: offset.index + world.walk.index * weather.normal(),
        lnRate: offset.lnRate + world.walk.lnRate * weather.normal(),
      };
      return film;
    },
    measure(film) {
      const { index, thicknessNm, correlation, sites, inexact } = world.gauge;
      const scale = inexact / Math.sqrt(sites);
      const a = eye.normal();
      const b = correlation * a + Math.sqrt(1 - correlation ** 2) * eye.normal();
      // All drawn every time, so that the rate of slips does not shift the scatter of the readings that follow.
      const slipped = eye.chance(world.slips);
      const sign = () => (eye.chance(0.5) ? 1 : -1);
      const grossIndex = sign() * eye.uniform(0.015, 0.045);
      const grossNm = sign() * eye.uniform(2, 6);
      return {
        index: film.index + scale * index * a + (slipped ? grossIndex : 0),
        thicknessNm: film.thicknessNm + scale * thicknessNm * b + (slipped ? grossNm : 0),
        slip: slipped ? "gross" : null,
      };
    },
    expected(settings) {
      const { index, lnThickness } = steady(settings);
      return { index, thicknessNm: Math.exp(lnThickness) };
    },
    clean(stated) {
      // Drawn whether or not a step is stated, so that stating one does not shift the weather that follows.
      const drawn = drawStep();
      const written = !weather.chance(world.unwrittenCleans);
      offset = { ...(stated ?? drawn) };
      sinceClean = 0;
      return { written };
    },
    leak(stated) {
      leakIndex = stated ?? -weather.uniform(0.05, 0.1);
    },
    mend() {
      leakIndex = 0;
    },
    get depositionsSinceClean() {
      return sinceClean;
    },
  };
}
