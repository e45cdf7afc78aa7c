/**
 * Does the interval of the next reading hold? A chamber with a history of 60 measured runs, on worlds of several kinds; every
 * reading is held against what was predicted before it, and the first run after a clean and the chamber's first three are
 * told apart.
 */
import { coverageOf, trackRecord } from "../../../calibration/index.ts";
import type { Figure, Sample } from "../figures.ts";
import { covered, oneStepAhead, type Prediction } from "../one-step.ts";
import type { Scenario } from "../scenario.ts";
import { StudiedLine } from "../studied-line.ts";
import { studyWorld, type WorldOptions } from "../worlds-under-study.ts";

const MEASURED_RUNS = 60;
const share = (key: string, words: string): Figure => ({ key, words, how: "share", digits: 3, wanted: "0.95" });

const FIGURES: readonly Figure[] = [
  share("all n", "next reading inside its 95 % interval, index"),
  share("all d", "next reading inside its 95 % interval, thickness"),
  share("good n", "the same, readings that were not slips, index"),
  share("good d", "the same, readings that were not slips, thickness"),
  { key: "square n", words: "mean squared surprise of good readings, index", how: "mean", digits: 2, wanted: "1" },
  { key: "square d", words: "mean squared surprise of good readings, thickness", how: "mean", digits: 2, wanted: "1" },
  share("program", "inside the interval as the program itself counts, both"),
  { key: "program square", words: "mean squared surprise as the program counts", how: "mean", digits: 2, wanted: "1" },
  share("clean n", "first run after a written clean inside, index"),
  share("clean d", "first run after a written clean inside, thickness"),
  share("unwritten n", "first run after an unwritten clean inside, index"),
  share("unwritten d", "first run after an unwritten clean inside, thickness"),
  share("young n", "first three runs of the chamber inside, index"),
  share("young d", "first three runs of the chamber inside, thickness"),
  { key: "error n", words: "robust error of the next run's film, index", how: "robust sd", digits: 4 },
  { key: "error d", words: "robust error of the next run's film", how: "robust sd", digits: 2, unit: "nm" },
  { key: "clean error n", words: "robust error, first run after a written clean, index", how: "robust sd", digits: 4 },
  {
    key: "clean error d",
    words: "robust error, first run after a written clean",
    how: "robust sd",
    digits: 2,
    unit: "nm",
  },
];

export function oneStepSample(line: StudiedLine): Sample {
  const model = line.model();
  const predictions = oneStepAhead(line, model);
  const inside = (some: readonly Prediction[], rank: "rankIndex" | "rankThickness") =>
    some.flatMap((p) => (p[rank] === null ? [] : [Number(covered(p[rank]))]));
  const squares = (some: readonly Prediction[], surprise: "surpriseIndex" | "surpriseThickness") =>
    some.flatMap((p) => (p[surprise] === null ? [] : [p[surprise] ** 2]));
  const both = (name: string, some: readonly Prediction[]) => ({
    [`${name} n`]: inside(some, "rankIndex"),
    [`${name} d`]: inside(some, "rankThickness"),
  });
  const errors = (name: string, some: readonly Prediction[]) => ({
    [`${name} n`]: some.map((p) => p.run.film.index - p.index),
    [`${name} d`]: some.map((p) => p.run.film.thicknessNm - p.thicknessNm),
  });
  const good = predictions.filter((p) => !p.run.reading.spoilt);
  const first = (written: boolean) =>
    predictions.filter((p) => p.run.afterClean?.runs === 0 && p.run.afterClean.written === written);
  const own = coverageOf(trackRecord(model));
  return {
    ...both("all", predictions),
    ...both("good", good),
    "square n": squares(good, "surpriseIndex"),
    "square d": squares(good, "surpriseThickness"),
    program: own ? [own.inside] : [],
    "program square": own ? [own.meanSquare] : [],
    ...both("clean", first(true)),
    ...both("unwritten", first(false)),
    ...both("young", predictions.slice(0, 3)),
    ...errors("error", predictions),
    ...errors("clean error", first(true)),
  };
}

function oneStep(name: string, title: string, options: WorldOptions, runs = MEASURED_RUNS): Scenario {
  const specimen = (seed: string) => {
    const line = new StudiedLine(studyWorld(seed, options), seed);
    line.run(runs);
    return line;
  };
  const figures = FIGURES.filter((f) => options.kind === "misfit" || !f.key.startsWith("unwritten"));
  return { name, title, figures, specimen, play: (seed) => oneStepSample(specimen(seed)) };
}

export const oneStepScenarios: readonly Scenario[] = [
  oneStep("base", "Linear worlds, three sisters, 60 measured runs", { kind: "base" }),
  oneStep("cold", "Linear worlds without sisters", { kind: "cold" }),
  oneStep("wide", "Linear worlds with chambers twice as far apart", { kind: "wide" }),
  oneStep("fifth", "Linear worlds, production measured every fifth deposition", { kind: "fifth" }),
  oneStep("misfit", "Mis-specified: t3 scatter, gauge 1.5 x stated, cleans unwritten, interactions", {
    kind: "misfit",
  }),
  oneStep("tube", "Tube-like worlds with 3 % slips and 1 % unwritten settings", { kind: "tube" }),
];
