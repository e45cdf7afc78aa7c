/**
 * What the declared numbers imply, in sentences for `check`: things an engineer would want to see beside the file but
 * nobody writes down. Nothing here is an error.
 */
import { formatQuantity } from "../../engine/index.ts";
import { reach } from "./expression.ts";
import type { Line } from "./line.ts";
import { priorSentences } from "./priors.ts";
import type { Declared } from "./read-settings.ts";

/**
 * Light of a film on the declared wafer: `filmNm` is the film on the surface itself (for pyramids, on the facet), `index`
 * at 632.8 nm. The minimum is null where the reflectance has none inside the light range.
 */
export type CoatedLight = (
  line: Line,
  index: number,
  filmNm: number,
) => { weightedReflectancePercent: number; reflectanceMinimumNm: number | null };

/** Half-width of the middle 95 % of a normal distribution, in standard deviations. */
const HALF_95 = 1.96;

/** All sentences, those about the film first. */
export function impliedBy(line: Line, declared: readonly Declared[], light?: CoatedLight): string[] {
  return [
    ...filmOnFacet(line),
    ...(light ? lightOfGoal(line, light) : []),
    ...floors(declared),
    ...gaugesAgainstGoals(line),
    ...idleLimits(line),
    ...tuning(line),
    ...priorSentences(line.priors),
  ];
}

function filmOnFacet({ goal, wafer }: Line): string[] {
  if (wafer.surface !== "pyramids" || !goal.thicknessNm) return [];
  const { value } = goal.thicknessNm;
  const { mean, sd } = wafer.facetFactor;
  const [low, high] = [mean - HALF_95 * sd, mean + HALF_95 * sd].map((factor) => (factor * value).toFixed(1));
  return [
    `${value} nm on a polished witness is ${(mean * value).toFixed(1)} nm on a facet (95 % between ${low} and ${high} nm, from the facet factor ${mean} sd ${sd}).`,
  ];
}

function lightOfGoal(line: Line, light: CoatedLight): string[] {
  const { index, thicknessNm, reflectanceMinimumNm: minimum, weightedReflectancePercent: weighted } = line.goal;
  if (!index || !thicknessNm) return [];
  const { mean, sd } = line.wafer.facetFactor;
  const at = (n: number, factor: number, nm: number) => light(line, n, factor * nm);
  const sentences: string[] = [];
  const centre = at(index.value, mean, thicknessNm.value);
  const range = `${line.light.fromNm} to ${line.light.toNm} nm`;
  if (centre.reflectanceMinimumNm !== null) {
    const nearly = `index ${index.value} and ${thicknessNm.value} nm put the reflectance minimum at ${centre.reflectanceMinimumNm.toFixed(0)} nm`;
    sentences.push(
      `${nearly} and the weighted reflectance at ${centre.weightedReflectancePercent.toFixed(2)} % (${range}).`,
    );
  }
  if (minimum && sd > 0) {
    const ends = [mean - HALF_95 * sd, mean + HALF_95 * sd].map(
      (factor) => at(index.value, factor, thicknessNm.value).reflectanceMinimumNm,
    );
    if (ends[0] !== null && ends[1] !== null) {
      const [low, high] = [Math.min(ends[0], ends[1]), Math.max(ends[0], ends[1])];
      const wide = high - low > 2 * minimum.within;
      const verdict = wide
        ? "measure a reflectance minimum on a coated cell before judging that goal"
        : "the goal can be judged from the film alone";
      sentences.push(
        `The facet factor alone spans a reflectance minimum of ${low.toFixed(0)} to ${high.toFixed(0)} nm, against a goal of ${minimum.value} nm within ${minimum.within} nm: ${verdict}.`,
      );
    }
  }
  // corners of the film goals: a light goal met at all of them (and at the centre) never asks for more than they do
  const corners = [-1, 1].flatMap((i) =>
    [-1, 1].map((j) => at(index.value + i * index.within, mean, thicknessNm.value + j * thicknessNm.within)),
  );
  if (weighted) {
    const values = [centre, ...corners].map((corner) => corner.weightedReflectancePercent);
    const worst = Math.max(...values);
    const text = `weighted reflectance at most ${weighted.atMost} %`;
    if (worst <= weighted.atMost) {
      sentences.push(
        `The goal of ${text} never binds: films within the film goals reach at most ${worst.toFixed(2)} %.`,
      );
    } else if (Math.min(...values) > weighted.atMost) {
      sentences.push(
        `The goal of ${text} is missed by every film within the film goals (${worst.toFixed(2)} % at worst).`,
      );
    }
  }
  if (minimum) {
    const values = [centre, ...corners].map((corner) => corner.reflectanceMinimumNm);
    const numbers = values.filter((value) => value !== null);
    const text = `reflectance minimum of ${minimum.value} nm within ${minimum.within} nm`;
    const [low, high] = [Math.min(...numbers), Math.max(...numbers)];
    if (numbers.length < values.length) return sentences;
    if (low >= minimum.value - minimum.within && high <= minimum.value + minimum.within) {
      sentences.push(
        `The goal of a ${text} never binds at facet factor ${mean}: the film goals allow ${low.toFixed(0)} to ${high.toFixed(0)} nm.`,
      );
    } else if (high < minimum.value - minimum.within || low > minimum.value + minimum.within) {
      sentences.push(
        `The goal of a ${text} cannot be met by a film within the film goals at facet factor ${mean}: they allow ${low.toFixed(0)} to ${high.toFixed(0)} nm.`,
      );
    }
  }
  return sentences;
}

function floors(declared: readonly Declared[]): string[] {
  return declared
    .filter(({ setting, declaredLow }) => setting.low > declaredLow)
    .map(({ setting: { name, unit, low, fullScale }, declaredLow }) => {
      const [from, floor, full] = [declaredLow, low, fullScale ?? 0].map((value) => formatQuantity(value, unit));
      return `${name} is declared from ${from}, but below ${floor} (2 % of the full scale of ${full}) a controller is not trusted: ${floor} is taken.`;
    });
}

function gaugesAgainstGoals({ goal, gauges }: Line): string[] {
  const sentences: string[] = [];
  const judge = (what: string, tolerance: number | undefined, unit: string, sds: (number | undefined)[]) => {
    const known = sds.filter((sd) => sd !== undefined);
    if (tolerance === undefined) return;
    if (known.length === 0) {
      sentences.push(`No gauge reads ${what}: that goal is judged through the film alone.`);
      return;
    }
    const best = Math.min(...known);
    // a tolerance of two standard deviations is exceeded by gauge noise alone in one reading of twenty
    if (tolerance < 2 * best) {
      sentences.push(
        `One reading of ${what} has a standard deviation of ${Number(best.toPrecision(2))}${unit}, day-to-day part included, against a tolerance of ${tolerance}${unit}: single readings cannot judge it.`,
      );
    }
  };
  const all = [...gauges.values()];
  const polished = all.filter((gauge) => gauge.on === "polished");
  const both = (one: number | undefined, daily: number) => (one === undefined ? undefined : Math.hypot(one, daily));
  judge(
    "index",
    goal.index?.within,
    "",
    polished.map((gauge) => both(gauge.index, gauge.dayToDay.index)),
  );
  judge(
    "thickness",
    goal.thicknessNm?.within,
    " nm",
    polished.map((gauge) => both(gauge.thicknessNm, gauge.dayToDay.thicknessNm)),
  );
  judge(
    "reflectance_minimum",
    goal.reflectanceMinimumNm?.within,
    " nm",
    all.map((gauge) => gauge.reflectanceMinimumNm),
  );
  if (goal.weightedReflectancePercent && all.every((gauge) => gauge.weightedReflectancePercent === undefined)) {
    sentences.push("No gauge reads weighted_reflectance: that goal is judged through the film alone.");
  }
  return sentences;
}

function idleLimits({ window, settings }: Line): string[] {
  return window.flatMap((limit) => {
    const reached = reach(limit, settings);
    if (!reached || reached.low < limit.low || reached.high > limit.high) return [];
    return [`The window on ${limit.text} never binds: the ranges alone keep inside it.`];
  });
}

function tuning({ settings, anchor }: Line): string[] {
  const tuned = [...settings.values()].filter((setting) => setting.tune).map((setting) => setting.name);
  if (tuned.length === 0) return ["No setting has tune: true, so nothing can be proposed."];
  const held = new Set(anchor.flatMap((limit) => limit.settings));
  const free = tuned.filter((name) => !held.has(name));
  return free.length === 0
    ? []
    : [`No anchor holds ${free.join(", ")}: corrections of ${free.length === 1 ? "it" : "them"} may add up unseen.`];
}
