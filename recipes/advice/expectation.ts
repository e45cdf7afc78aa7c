/**
 * What to expect at a set of settings: the intervals a person sees (what the next run would measure), the chances (for the
 * true film), and the light of the mean film.
 */
import {
  type Bounds,
  type ChamberModel,
  type FilmLaw,
  filmPoint,
  type GaugeCovariance,
  indexBounds,
  type Settings,
  thicknessBounds,
} from "../../calibration/index.ts";
import { normalQuantile } from "../../engine/index.ts";
import type { Gauge, Goal, Line } from "../line/line.ts";
import type { Predicted } from "../outlook.ts";
import type { CellLight } from "./cell-light.ts";
import { chanceOf, type GoalName, goalNames, isLight } from "./goal-region.ts";

export interface Expectation {
  film: { index: number; thicknessNm: number; covariance: [number, number, number] };
  predicted: Predicted;
  /** All goals together; null where one of them cannot be judged. */
  chanceInGoal: number | null;
  /** All goals that can be judged, together; what decisions rest on. */
  chanceJudged: number;
  cannotTell: string[];
}

/** Gauges used where the line declares none: usual repeatability of an ellipsometer and a reflectometer (common practice, no source). */
const usual = { index: 0.004, thicknessNm: 0.6, reflectanceMinimumNm: 2, weightedReflectancePercent: 0.1 };

export function gaugeFor(line: Line, on: Gauge["on"], what: "film" | "light"): Gauge | null {
  for (const gauge of line.gauges.values()) {
    if (gauge.on !== on) continue;
    const reads =
      what === "film"
        ? (gauge.index ?? gauge.thicknessNm)
        : (gauge.reflectanceMinimumNm ?? gauge.weightedReflectancePercent);
    if (reads !== undefined) return gauge;
  }
  return null;
}

/** Covariance of one reading's (index, thickness nm): sites average the repeatability, not the day-to-day part. */
export function gaugeCovariance(gauge: Gauge | null, sites: number): GaugeCovariance {
  const n = gauge?.index ?? usual.index;
  const d = gauge?.thicknessNm ?? usual.thicknessNm;
  const day = gauge?.dayToDay ?? { index: 0, thicknessNm: 0 };
  const cov = (gauge?.correlation ?? 0) * ((n * d) / sites + day.index * day.thicknessNm);
  return [n ** 2 / sites + day.index ** 2, cov, d ** 2 / sites + day.thicknessNm ** 2];
}

export function lightSd(gauge: Gauge | null, kind: "reflectance_minimum_nm" | "weighted_reflectance_percent"): number {
  return kind === "reflectance_minimum_nm"
    ? (gauge?.reflectanceMinimumNm ?? usual.reflectanceMinimumNm)
    : (gauge?.weightedReflectancePercent ?? usual.weightedReflectancePercent);
}

/** Expectation at settings. `sites` is how many sites a reading averages. */
export function expectation(
  model: ChamberModel,
  settings: Settings,
  context: { line: Line; goal: Goal; light: CellLight; sites?: number },
): Expectation {
  const { line, goal, light } = context;
  const law = model.law(settings);
  const measured = model.measuredLaw(settings, gaugeCovariance(gaugeFor(line, "polished", "film"), context.sites ?? 1));
  const film = filmPoint(law);
  const cannotTell: string[] = [];
  const lit = lightBounds(law, light, line);
  if (lit.reason) cannotTell.push(lit.reason);
  if (light.unjudged) cannotTell.push(light.unjudged);
  const predicted: Predicted = {
    index: indexBounds(measured),
    thickness_nm: thicknessBounds(measured),
    weighted_reflectance_percent: light.unjudged ? null : lit.weighted,
    reflectance_minimum_nm: light.unjudged ? null : lit.minimum,
  };
  const names = goalNames(goal);
  const judged = names.filter((name) => !isLight(name) || (light.unjudged === null && lit.reason === null));
  const chanceJudged = judged.length > 0 ? chanceOf(law, goal, judged, light) : Number.NaN;
  const chanceInGoal = judged.length < names.length ? null : chanceJudged;
  return { film, predicted, chanceInGoal, chanceJudged, cannotTell };
}

/** The chance of each goal on its own; null where it cannot be judged. */
export function chancesAlone(
  model: ChamberModel,
  settings: Settings,
  { goal, light }: { goal: Goal; light: CellLight },
): Map<GoalName, number | null> {
  const law = model.law(settings);
  return new Map(
    goalNames(goal).map((name) => [
      name,
      isLight(name) && light.unjudged !== null ? null : chanceOf(law, goal, [name], light),
    ]),
  );
}

/** The chance of all goals that can be judged, without intervals: for comparing candidates. */
export function chanceAt(
  model: ChamberModel,
  settings: Settings,
  { goal, light }: { goal: Goal; light: CellLight },
): number {
  const names = goalNames(goal).filter((name) => !isLight(name) || light.unjudged === null);
  return names.length === 0 ? Number.NaN : chanceOf(model.law(settings), goal, names, light);
}

/** Points of a low-discrepancy sequence in four dimensions, as normal deviates; fixed, so that answers repeat. */
const draws = lowDiscrepancy(256);

function lowDiscrepancy(count: number): Float64Array[] {
  // Additive recurrence with the generalised golden ratio (M. Roberts 2018, from memory): root of x^5 = x + 1.
  const g = 1.1673039782614187;
  const out: Float64Array[] = [];
  for (let i = 1; i <= count; i++)
    out.push(Float64Array.from([1, 2, 3, 4], (j) => normalQuantile((0.5 + i * g ** -j) % 1 || 0.5)));
  return out;
}

/** Intervals of the light features the next reading would give, by sampling film, facet factor and gauge together. */
function lightBounds(
  law: FilmLaw,
  light: CellLight,
  line: Line,
): { weighted: Bounds | null; minimum: Bounds | null; reason: string | null } {
  const { facet } = light;
  const gauge = gaugeFor(line, "cell", "light");
  const sdMinimum = lightSd(gauge, "reflectance_minimum_nm");
  const sdWeighted = lightSd(gauge, "weighted_reflectance_percent");
  const weighted: number[] = [];
  const minimum: number[] = [];
  const point = filmPoint(law);
  const [vn, cov, vd] = point.covariance;
  const sn = Math.sqrt(vn);
  const slope = cov / sn;
  const rest = Math.sqrt(Math.max(vd - slope * slope, 0));
  for (const z of draws) {
    const index = point.index + sn * z[0];
    const d = (point.thicknessNm + slope * z[0] + rest * z[1]) * (facet.mean + facet.sd * z[2]);
    const w = light.weighted(index, d);
    const m = light.minimum(index, d);
    if (w === null || m === null) continue;
    weighted.push(w + sdWeighted * z[3]);
    minimum.push(m + sdMinimum * z[3]);
  }
  if (weighted.length < 0.98 * draws.length)
    return {
      weighted: null,
      minimum: null,
      reason: `The film expected (index ${point.index.toFixed(3)}, ${point.thicknessNm.toFixed(1)} nm) reaches beyond the measured silicon-nitride family or the light range, so its reflectance is not given.`,
    };
  return { weighted: middle(weighted), minimum: middle(minimum), reason: null };
}

function middle(values: number[]): Bounds {
  values.sort((a, b) => a - b);
  const at = (p: number) => {
    const x = p * (values.length - 1);
    const i = Math.floor(x);
    return values[i] + (x - i) * ((values[i + 1] ?? values[i]) - values[i]);
  };
  return { mean: values.reduce((a, b) => a + b, 0) / values.length, low: at(0.025), high: at(0.975) };
}
