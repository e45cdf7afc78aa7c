/**
 * The virtual chamber: a seeded simulator of one deposition chamber, with controllers that lie a little and wander, an
 * offset of its own, drift over a cleaning cycle, a transient after each event, scatter, cleans, swapped controllers and
 * leaks. For the demo line, the rehearsal and the closed-loop tests.
 *
 * Per deposition, with m depositions since the clean and j since the last event (clean or swap):
 *
 *     flow       Q = g q,   g ~ N(1, 0.005) per hardware epoch, then a random walk of 0.0005 a deposition
 *     index      n = law(Q, settings) + b + step + aN e^(-j/tau) + drift m/M + leak + scatter (AR(1))
 *     rate       G = law(Q, settings) e^(c + step) (1 + rho m/M) (1 + aG e^(-j/tau)) e^scatter
 *     witness    d = G (t - t0 - jitter);   on a facet: psi d
 *
 * Two streams come from the chamber's seed, one for the depositions and one for the gauge, so that measuring more or
 * less never changes what is deposited: practices can be compared on the same weather.
 */
import { type Random, random, refuse } from "../../engine/index.ts";
import type { Film } from "./aim.ts";
import { filmLaw, need } from "./film-law.ts";
import { type CellLight, type Gauge, type Measured, virtualGauge } from "./virtual-gauge.ts";
import type { ChamberSettings, World } from "./worlds.ts";

/** What makes a chamber this chamber. Drawn from the seed; a story may state any of it. */
export interface Traits {
  index: number;
  lnRate: number;
  /** Ignition: nothing grows for so long, s. */
  ignitionS: number;
  /** Film on a facet over film on a polished witness. */
  facetFactor: number;
  /** Transient after an event: sizes in index and (relative) rate, and the depositions over which it fades. */
  transient: { index: number; rate: number; fade: number };
  controllers: { silane: number; ammonia: number; nitrogen: number };
}

/** One deposition as it truly is. Index and thickness are those of a witness in the middle of the boat. */
export interface Deposited extends Film {
  facetNm: number;
  /** What really ran, where it differs from what was asked (a setting changed without being written down). */
  settings: ChamberSettings;
  /** Depositions since the clean before this one. */
  sinceClean: number;
  /** Film at a place along the boat, 0 to 1. */
  at(place: number): Film;
}

export interface VirtualChamber {
  readonly traits: Traits;
  /** Lays one film and ages the chamber by one deposition. Refuses missing or impossible settings. */
  deposit(settings: ChamberSettings): Deposited;
  /** Reads a film, with the gauge's scatter and now and then a gross slip. */
  measure(film: Deposited, gauge: Gauge): Measured;
  /** The film that the next deposition would give without scatter: what an oracle knows. */
  expected(settings: ChamberSettings): Film;
  /** A clean; the step it leaves may be stated, else it is drawn. */
  clean(step?: { index: number; lnRate: number }): void;
  /** New flow controllers: gains are drawn again unless stated. */
  swapControllers(gains?: Partial<Traits["controllers"]>): void;
  /** An air leak: index lower by 0.05 to 0.1 (drawn unless stated) until mended. */
  leak(index?: number): void;
  mend(): void;
  readonly depositionsSinceClean: number;
  readonly depositionsSinceEvent: number;
}

function drawTransient(source: Random): Traits["transient"] {
  return {
    index: source.uniform(-0.02, 0.02),
    rate: source.uniform(-0.06, -0.01),
    fade: source.uniform(2, 6),
  };
}

function drawControllers(world: World, source: Random): Traits["controllers"] {
  const gain = () => 1 + world.spread.controller * source.normal();
  return { silane: gain(), ammonia: gain(), nitrogen: gain() };
}

function drawTraits(world: World, source: Random): Traits {
  return {
    index: world.spread.index * source.normal(),
    lnRate: world.spread.lnRate * source.normal(),
    ignitionS: source.uniform(1, 8),
    facetFactor: source.uniform(0.6, 0.95),
    transient: drawTransient(source),
    controllers: drawControllers(world, source),
  };
}

/** A change of one setting that nobody wrote down: 2 to 5 % either way, in one of those that people touch. */
function fiddled(settings: ChamberSettings, source: Random): ChamberSettings {
  const name = source.choice(["silane", "ammonia", "time", "power"]);
  const factor = 1 + (source.chance(0.5) ? -1 : 1) * source.uniform(0.02, 0.05);
  return new Map([...settings, [name, need(settings, name) * factor]]);
}

/**
 * A chamber of the world, drawn from its seed. `cellLight` (a coated wafer) gives what a reflectometer sees on the cell; without it
 * only polished readings can be had. `given` states traits instead of drawing them.
 */
export function virtualChamber(
  world: World,
  chamberSeed: number | string,
  { cellLight, given = {} }: { cellLight?: CellLight; given?: Partial<Traits> } = {},
): VirtualChamber {
  const weather = random(chamberSeed).fork("weather");
  const measure = virtualGauge(world, random(chamberSeed).fork("gauge"), cellLight);
  const traits: Traits = { ...drawTraits(world, weather), ...given };
  let transient = traits.transient;
  const gains = { ...traits.controllers };
  let step = { index: 0, lnRate: 0 };
  let leakIndex = 0;
  let sinceClean = 0;
  let sinceEvent = 0;
  let memory = 0;

  /** Index and rate (nm/s) without scatter, at the settings as they truly are. */
  function steady(settings: ChamberSettings): { index: number; rateNmPerS: number } {
    const flows = new Map(settings);
    for (const gas of ["silane", "ammonia", "nitrogen"] as const) {
      const asked = settings.get(gas);
      if (asked !== undefined) flows.set(gas, asked * gains[gas]);
    }
    const law = filmLaw(world, flows);
    const fading = Math.exp(-sinceEvent / transient.fade);
    const age = sinceClean / world.cycle;
    return {
      index:
        law.index + traits.index + step.index + transient.index * fading + world.indexDriftPerCycle * age + leakIndex,
      rateNmPerS:
        law.rateNmPerS *
        Math.exp(traits.lnRate + step.lnRate) *
        (1 + world.rateDriftPerCycle * age) *
        (1 + transient.rate * fading),
    };
  }

  function age(): void {
    sinceClean += 1;
    sinceEvent += 1;
    for (const gas of ["silane", "ammonia", "nitrogen"] as const) gains[gas] += world.controllerWalk * weather.normal();
  }

  function deposit(asked: ChamberSettings): Deposited {
    const settings = weather.chance(world.slips.setting) ? fiddled(asked, weather) : asked;
    const { index: steadyIndex, rateNmPerS } = steady(settings);
    const fresh = Math.sqrt(1 - world.scatter.memory ** 2) * world.scatter.index * weather.normal();
    memory = world.scatter.memory * memory + fresh;
    const index = steadyIndex + memory;
    const rate = rateNmPerS * Math.exp(world.scatter.lnRate * weather.normal());
    const growingS = need(settings, "time") - traits.ignitionS - world.ignitionJitterS * weather.normal();
    if (growingS <= 0) refuse("out-of-range", `time ${need(settings, "time")} s is over before the plasma catches`);
    const thicknessNm = rate * growingS;
    const film: Deposited = {
      index,
      thicknessNm,
      facetNm: traits.facetFactor * thicknessNm,
      settings,
      sinceClean,
      at(place) {
        if (!(place >= 0 && place <= 1)) refuse("out-of-range", `place along the boat is ${place}, it lies in 0 to 1`);
        const from = place - 0.5;
        return {
          index: index + 2 * world.boat.index * from,
          thicknessNm: thicknessNm * (1 - world.boat.tilt * from + 4 * world.boat.bend * from * from),
        };
      },
    };
    age();
    return film;
  }

  return {
    traits,
    deposit,
    measure,
    expected(settings) {
      const { index, rateNmPerS } = steady(settings);
      return { index, thicknessNm: rateNmPerS * (need(settings, "time") - traits.ignitionS) };
    },
    clean(stated) {
      // Drawn whether or not a step is stated, so that stating one does not shift the weather that follows.
      const drawn = {
        index: world.cleanStep.index * weather.normal(),
        lnRate: world.cleanStep.lnRate * weather.normal(),
      };
      step = stated ?? drawn;
      if (world.redrawTransients) transient = drawTransient(weather);
      sinceClean = 0;
      sinceEvent = 0;
    },
    swapControllers(stated = {}) {
      Object.assign(gains, drawControllers(world, weather), stated);
      sinceEvent = 0;
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
    get depositionsSinceEvent() {
      return sinceEvent;
    },
  };
}
