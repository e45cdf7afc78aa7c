/**
 * What is wanted of a stack, and by how much it is missed: in units of the goal's own tolerance, so that goals of different
 * kinds can be weighed against each other when not all can be met.
 */
import { convertRgbToLab65 } from "culori/fn";
import type { Triple } from "../colour/observer.ts";
import { finite, refuse } from "../errors.ts";

/** Any subset. Percentages are 0 to 100, the colour difference is CIEDE2000. */
export interface FilmGoal {
  weightedReflectancePercent?: { atMost: number };
  reflectanceMinimumNm?: Tolerance;
  reflectance?: readonly ({ wavelengthNm: number } & (AtMost | Tolerance))[];
  colour?: { lab: Triple; within: number };
}
interface AtMost {
  atMost: number;
}
interface Tolerance {
  value: number;
  within: number;
}

/** One goal; a spot's `place` counts along `FilmGoal.reflectance`. */
export type Wanted =
  | { kind: "weighted"; limit: AtMost }
  | { kind: "minimum"; limit: Tolerance }
  | { kind: "spot"; place: number; wavelengthNm: number; limit: AtMost | Tolerance }
  | { kind: "colour"; lab: Triple; limit: AtMost };

/** What the goal's quantity is; null where there is none (no minimum inside the range). */
export type Found = number | null;

export interface Miss {
  wanted: Wanted;
  found: Found;
  /** Beyond the tolerance, in units of it; 0 or less where the goal is met. */
  excess: number;
  /** Slope of `excess` with what was found. */
  perUnit: number;
}

/** A limit ("at most") has no tolerance; a tenth of the limit stands in for one where misses are weighed against each other. */
const limitUnit = 0.1;

/** Missed by so many tolerances when there is no minimum to place: more than any minimum inside the sunlight could miss by. */
const noMinimum = 1000;

/** By how much the goals are missed, in their tolerances, that still counts as met: the search's own accuracy. */
export const metWithin = 1e-4;

export function wantedOf(goal: FilmGoal): Wanted[] {
  const wanted: Wanted[] = [];
  if (goal.weightedReflectancePercent) wanted.push({ kind: "weighted", limit: goal.weightedReflectancePercent });
  if (goal.reflectanceMinimumNm) wanted.push({ kind: "minimum", limit: goal.reflectanceMinimumNm });
  goal.reflectance?.forEach((spot, place) => {
    wanted.push({ kind: "spot", place, wavelengthNm: spot.wavelengthNm, limit: spot });
  });
  if (goal.colour) wanted.push({ kind: "colour", lab: goal.colour.lab, limit: { atMost: goal.colour.within } });
  return wanted;
}

/** Refuses limits and tolerances that are not above zero, and numbers that are not finite ("goal-value", "not-a-number"). */
export function checkGoal(goal: FilmGoal): void {
  for (const { kind, limit } of wantedOf(goal)) {
    const width = "atMost" in limit ? limit.atMost : limit.within;
    if (finite(width, `goal of the ${kind}`) <= 0)
      refuse("goal-value", `goal of the ${kind}: ${width} is not above zero`);
    if ("value" in limit) finite(limit.value, `goal of the ${kind}`);
  }
}

export function missOf(wanted: Wanted, found: Found): Miss {
  const { limit } = wanted;
  if (found === null) return { wanted, found, excess: noMinimum, perUnit: 0 };
  if ("atMost" in limit) {
    // A colour goal is a tolerance around a colour: the difference itself is counted in it.
    const unit = wanted.kind === "colour" ? limit.atMost : limitUnit * limit.atMost;
    return { wanted, found, excess: (found - limit.atMost) / unit, perUnit: 1 / unit };
  }
  const off = found - limit.value;
  return { wanted, found, excess: Math.abs(off) / limit.within - 1, perUnit: (off < 0 ? -1 : 1) / limit.within };
}

/** CIELAB (D65) of a screen colour, "#rrggbb". Refuses other spellings ("bad-colour"). */
export function labOfHex(hex: string): Triple {
  if (!/^#[0-9a-f]{6}$/i.test(hex))
    refuse("bad-colour", `"${hex}" is not a colour`, { hint: 'six digits 0-9, a-f, as in "#20305f"' });
  const [r, g, b] = [1, 3, 5].map((at) => Number.parseInt(hex.slice(at, at + 2), 16) / 255);
  const lab = convertRgbToLab65({ r, g, b });
  return [lab.l, lab.a, lab.b];
}
