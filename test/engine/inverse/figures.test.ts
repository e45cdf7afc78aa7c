import { describe, expect, test } from "vitest";
import { filmStack } from "../../../engine/index.ts";
import { StackFigures } from "../../../engine/inverse/figures.ts";
import type { FilmGoal } from "../../../engine/inverse/goal.ts";
import { piecesOf, stackWith } from "../../../engine/inverse/varied-stack.ts";
import { expectClose } from "../../support/close.ts";
import { refusalCode } from "../../support/refusal.ts";
import { index, nitride, polished, pyramids, silica, stackOf, thickness } from "./stacks.ts";

const goal: FilmGoal = {
  weightedReflectancePercent: { atMost: 2 },
  reflectanceMinimumNm: { value: 560, within: 15 },
  reflectance: [
    { wavelengthNm: 412, atMost: 8 },
    { wavelengthNm: 700, value: 4, within: 0.5 },
  ],
  colour: { lab: [40, -10, 20], within: 3 },
};
const surfaces = [
  ["polished in air", { surface: polished }],
  ["polished under glass", { surface: polished, seenFrom: "glass" as const }],
  ["pyramids in air", { surface: pyramids }],
] as const;
const films = [
  ["one film", [nitride(2.03, 78)], [thickness(0, 40, 120), index(0, 1.95, 2.13)], [78, 2.03]],
  [
    "two films",
    [silica(85), nitride(2.11, 60)],
    [thickness(1, 20, 120), thickness(0, 0, 200), index(1, 2.0, 2.2)],
    [60, 85, 2.11],
  ],
] as const;
const cases = surfaces.flatMap(([where, more]) => films.map(([what, ...film]) => [what, where, film, more] as const));

describe("what a search follows", () => {
  test.each(cases)(
    "%s, %s: loss and every goal have the slopes of differences",
    (_, __, [film, unknowns, at], more) => {
      const figures = new StackFigures(stackOf(film, more), unknowns, goal);
      // the piece of the nitride family that holds the index, so that no difference straddles a join
      const pieces = unknowns.map((unknown, u) => piecesOf(unknown).find(({ high }) => at[u] < high) as never);
      const { loss, excess } = figures.sloped(at, pieces);
      expect(excess.length).toBe(film.length === 1 ? 5 : 6);
      unknowns.forEach(({ what }, u) => {
        const step = what === "thickness" ? 0.02 : 2e-4;
        const [m2, m1, p1, p2] = [-2, -1, 1, 2].map((c) =>
          figures.sloped(
            at.map((value, v) => (v === u ? value + c * step : value)),
            pieces,
          ),
        );
        const slope = (pick: (f: typeof m1) => number) =>
          (8 * (pick(p1) - pick(m1)) - (pick(p2) - pick(m2))) / (12 * step);
        expectClose(
          loss.slopes[u],
          slope((f) => f.loss.value),
          {
            relative: 1e-6,
            absolute: 1e-8,
            because: "rounding and truncation of the difference; dk/dindex is good to 1e-4 where k is small",
          },
        );
        excess.forEach((one, i) => {
          // The place of the minimum is closed in on to 1e-6 nm, and bends at the tables' own points.
          const isPlace = i === 1;
          expectClose(
            one.slopes[u],
            slope((f) => f.excess[i].value),
            {
              relative: isPlace ? 2e-3 : 1e-5,
              absolute: 1e-7,
              because: isPlace ? "half-nm differences along wavelength" : "rounding and truncation of the differences",
            },
          );
        });
      });
    },
  );

  test.each(cases)("%s, %s: the numbers are those the film verb shows", (_, __, [film, unknowns, at], more) => {
    const description = stackOf(film, more);
    const figures = new StackFigures(description, unknowns, goal);
    const answer = filmStack(stackWith(description, unknowns, at));
    const { lossMaCm2, weightedReflectancePercent } = figures.plain(at);
    const rounding = { absolute: 1e-9, because: "two routes through the same sums" };
    expectClose(lossMaCm2, answer.current_ma_cm2.available - answer.current_ma_cm2.into_substrate, rounding);
    expectClose(weightedReflectancePercent, answer.weighted_reflectance_percent, rounding);
    const minimum = figures.misses(at).find(({ wanted }) => wanted.kind === "minimum");
    expectClose(minimum?.found ?? Number.NaN, answer.reflectance_minimum_nm ?? Number.NaN, {
      absolute: 0.02,
      because: "the verb closes in to 0.005 nm; half-nm differences shift the place by as little",
    });
  });

  test("a goal without a tolerance above zero is refused", () => {
    const make = (wanted: FilmGoal) => () => new StackFigures(stackOf([nitride(2)]), [thickness(0, 40, 120)], wanted);
    expect(refusalCode(make({ weightedReflectancePercent: { atMost: 0 } }))).toBe("goal-value");
    expect(refusalCode(make({ reflectanceMinimumNm: { value: 600, within: -1 } }))).toBe("goal-value");
    expect(refusalCode(make({ reflectance: [{ wavelengthNm: 600, atMost: Number.NaN }] }))).toBe("not-a-number");
  });
});
