/**
 * How soon is a new chamber known? Three sisters with ten runs each; the film of its next run against what was predicted,
 * after so many runs of its own, with a clean after the fifth (so that "after 5" is the first run after a clean).
 */
import type { Figure, Sample } from "../figures.ts";
import { covered, oneStepAhead } from "../one-step.ts";
import type { Scenario } from "../scenario.ts";
import { StudiedLine } from "../studied-line.ts";
import { studyWorld, type WorldOptions } from "../worlds-under-study.ts";

const AFTER = [0, 1, 3, 5, 8] as const;
const CLEAN_AFTER = 5;

/**
 * Robust errors (index, nm) that an independent prototype of the same kind of model, written in numpy, showed in 300 linear
 * worlds, to compare with. Its worlds were not these ones number for number.
 */
const PROTOTYPE: Readonly<Record<number, readonly [string, string]>> = {
  1: ["0.0072", "0.99"],
  3: ["0.0051", "0.74"],
  5: ["0.0093", "1.84"],
  8: ["0.0055", "0.66"],
};

function figures(compared: boolean): Figure[] {
  return AFTER.flatMap((own): Figure[] => {
    const when = own === CLEAN_AFTER ? `${own} own runs and a clean` : `${own} own runs`;
    const other = compared ? PROTOTYPE[own] : undefined;
    const beside = (which: 0 | 1) => (other ? { wanted: `${other[which]} in a prototype` } : {});
    return [
      { key: `${own} n`, words: `robust error after ${when}, index`, how: "robust sd", digits: 4, ...beside(0) },
      { key: `${own} d`, words: `robust error after ${when}`, how: "robust sd", digits: 2, unit: "nm", ...beside(1) },
      { key: `${own} in n`, words: `reading inside after ${when}, index`, how: "share", digits: 3, wanted: "0.95" },
      { key: `${own} in d`, words: `reading inside after ${when}, thickness`, how: "share", digits: 3, wanted: "0.95" },
    ];
  });
}

function newChamber(name: string, title: string, options: WorldOptions): Scenario {
  const specimen = (seed: string) => {
    const line = new StudiedLine(studyWorld(seed, options), seed);
    line.run(CLEAN_AFTER);
    line.clean();
    line.run(Math.max(...AFTER) + 1 - CLEAN_AFTER);
    return line;
  };
  return {
    name,
    title,
    figures: figures(options.kind === "base"),
    specimen,
    play(seed): Sample {
      const predictions = oneStepAhead(specimen(seed));
      const sample: Record<string, number[]> = {};
      for (const own of AFTER) {
        const p = predictions[own];
        sample[`${own} n`] = [p.run.film.index - p.index];
        sample[`${own} d`] = [p.run.film.thicknessNm - p.thicknessNm];
        sample[`${own} in n`] = p.rankIndex === null ? [] : [Number(covered(p.rankIndex))];
        sample[`${own} in d`] = p.rankThickness === null ? [] : [Number(covered(p.rankThickness))];
      }
      return sample;
    },
  };
}

export const newChamberScenarios: readonly Scenario[] = [
  newChamber("new", "A new chamber with three sisters, linear worlds", { kind: "base" }),
  newChamber("new-tube", "A new chamber with three sisters, tube-like worlds", { kind: "tube" }),
];
