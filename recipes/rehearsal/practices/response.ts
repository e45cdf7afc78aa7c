/**
 * The two straight lines behind the controllers: index against ln ratio, ln rate against ln ratio and ln silane, with
 * slopes from least squares over the line's runs (each chamber its own offset, far readings left out) or, without sisters, by
 * heart. And the way back: settings at which the lines, with the offsets believed now, meet the goal.
 */
import { leastSquares, Refusal } from "../../../engine/index.ts";
import type { Film } from "../aim.ts";
import { need } from "../film-law.ts";
import type { Brief } from "../stage.ts";
import type { ChamberSettings } from "../worlds.ts";
import { coordinates, dialled, usable } from "./dials.ts";

/** Seconds during which nothing grows, by heart (common practice, no source). */
export const DEAD_TIME_S = 3;
/** Index per ln ratio, ln rate per ln ratio and per ln silane, by heart (common practice, no source). */
export const BY_HEART = { index: -0.3, rateRatio: 0, rateSilane: 0.8 } as const;
/** A fitted slope of the index is believed between these only: flatter would send the ratio anywhere. */
const CREDIBLE = [-0.5, -0.06] as const;
/** A reading is left out of the second fit beyond so many robust standard deviations. */
const FAR_OFF = 3.5;
/** 1 / the normal quantile of 3/4, the factor between a median residual and an sd. */
const MEDIAN_TO_SD = 1.4826;
/** Fewer sister runs than this are not fitted. */
const FEWEST = 10;

export interface Slopes {
  index: number;
  rateRatio: number;
  rateSilane: number;
}

/** Offsets of the two lines: index, and ln rate (nm/s), at the reference recipe. */
export interface Offsets {
  index: number;
  lnRate: number;
}

export interface Response {
  slopes: Slopes;
  offsets: Offsets;
}

/** Effective growing time, s. */
const growing = (settings: ChamberSettings) => Math.max(need(settings, "time") - DEAD_TIME_S, 5);

/** The offsets that one reading alone would speak for. */
export function offsetsOf(brief: Brief, slopes: Slopes, settings: ChamberSettings, read: Film): Offsets {
  const { ratio, silane } = coordinates(brief, settings);
  return {
    index: read.index - slopes.index * ratio,
    lnRate: Math.log(read.thicknessNm / growing(settings)) - slopes.rateRatio * ratio - slopes.rateSilane * silane,
  };
}

/** The film the lines expect. */
export function filmOf(brief: Brief, { slopes, offsets }: Response, settings: ChamberSettings): Film {
  const { ratio, silane } = coordinates(brief, settings);
  return {
    index: offsets.index + slopes.index * ratio,
    thicknessNm: growing(settings) * Math.exp(offsets.lnRate + slopes.rateRatio * ratio + slopes.rateSilane * silane),
  };
}

/** Settings at which the lines meet the goal, typed in. */
export function settingsFor(brief: Brief, response: Response): ChamberSettings {
  const lnRatio = (brief.goal.index - response.offsets.index) / response.slopes.index;
  return dialled(brief, lnRatio, (gases) => {
    const one = filmOf(brief, response, new Map([...gases, ["time", DEAD_TIME_S + 100]])).thicknessNm / 100;
    return DEAD_TIME_S + brief.goal.thicknessNm / one;
  });
}

interface FittedRun {
  chamber: number;
  settings: ChamberSettings;
  read: Film;
}

/** Every usable run of the sisters and of the chamber itself. */
function loggedRuns(brief: Brief): FittedRun[] {
  return [...brief.sisters.map((s) => s.log), brief.history].flatMap((log, chamber) =>
    log.flatMap((event): FittedRun[] => {
      const read = event.kind === "run" ? usable(brief, event.reading) : null;
      return event.kind === "run" && read ? [{ chamber, settings: event.settings, read }] : [];
    }),
  );
}

/** Slopes and offsets to begin with: the fit and the mean offset of the logs, or by heart from what the reference is meant to lay. */
export function startingResponse(brief: Brief): Response {
  const runs = loggedRuns(brief);
  const slopes = runs.length >= FEWEST ? fitted(brief, runs) : BY_HEART;
  if (runs.length === 0) return { slopes, offsets: offsetsOf(brief, slopes, brief.reference, brief.aim) };
  const offsets = runs.map((run) => offsetsOf(brief, slopes, run.settings, run.read));
  const mean = (of: (o: Offsets) => number) => offsets.reduce((sum, o) => sum + of(o), 0) / offsets.length;
  return { slopes, offsets: { index: mean((o) => o.index), lnRate: mean((o) => o.lnRate) } };
}

interface Line {
  coefficients: Float64Array;
  residuals: Float64Array;
}

/** Least squares, and once more without the readings that lie far off, as slips do. */
function trimmed(rows: readonly (readonly number[])[], y: readonly number[]): Line {
  const fitOf = (keep: readonly number[]): Line =>
    leastSquares(
      Float64Array.from(keep.flatMap((i) => rows[i])),
      keep.length,
      rows[0].length,
      Float64Array.from(keep, (i) => y[i]),
    );
  const all = rows.map((_, i) => i);
  const first = fitOf(all);
  const sizes = Float64Array.from(first.residuals, Math.abs).sort();
  const limit = FAR_OFF * MEDIAN_TO_SD * sizes[sizes.length >> 1];
  const near = all.filter((i) => Math.abs(first.residuals[i]) <= limit);
  return near.length === all.length ? first : fitOf(near);
}

/** Slopes by least squares; by heart where the logs cannot tell the two flows apart. */
function fitted(brief: Brief, runs: readonly FittedRun[]): Slopes {
  const chambers = [...new Set(runs.map((run) => run.chamber))];
  const at = runs.map((run) => coordinates(brief, run.settings));
  const own = (run: FittedRun) => chambers.map((c) => Number(c === run.chamber));
  try {
    const index = trimmed(
      runs.map((run, i) => [at[i].ratio, ...own(run)]),
      runs.map((run) => run.read.index),
    ).coefficients;
    const rate = trimmed(
      runs.map((run, i) => [at[i].ratio, at[i].silane, ...own(run)]),
      runs.map((run) => Math.log(run.read.thicknessNm / growing(run.settings))),
    ).coefficients;
    const slope = Math.min(CREDIBLE[1], Math.max(CREDIBLE[0], index[0]));
    return { index: slope, rateRatio: rate[0], rateSilane: rate[1] };
  } catch (error) {
    if (error instanceof Refusal && error.code === "rank-deficient") return BY_HEART;
    throw error;
  }
}
