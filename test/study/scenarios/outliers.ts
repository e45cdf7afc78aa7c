/**
 * How far do gross outliers pull the estimate? One reading in twenty is one. Three books of the same films: with them, with
 * those readings left out, and with them read right; the film predicted for the recipe of the day is compared in units of
 * the gauge's sd (of one reading), just after an outlier and at the end.
 */
import { type ChamberEvent, type ChamberModel, filmMoments } from "../../../calibration/index.ts";
import type { Figure, Sample } from "../figures.ts";
import type { Scenario } from "../scenario.ts";
import { StudiedLine, type StudiedRun } from "../studied-line.ts";
import { studyWorld, type WorldOptions } from "../worlds-under-study.ts";

const MEASURED_RUNS = 40;
const SLIPS = 0.05;
/** A book's first outlier may be its first reading, before anything can be known to be odd: those are told apart. */
const KNOWN_AFTER = 5;

const pull = (key: string, words: string): Figure[] =>
  (["n", "d"] as const).flatMap((which): Figure[] => {
    const from = `${key} ${which}`;
    const of = `${words}, ${which === "n" ? "index" : "thickness"}`;
    return [
      { key: from, words: `${of}: mean`, how: "mean", digits: 2, unit: "gauge sd" },
      { key: `${from} tail`, from, words: `${of}: 19 in 20 below`, how: "tail", digits: 2, unit: "gauge sd" },
      { key: `${from} one`, from, words: `${of}: less than one gauge sd`, how: "below one", digits: 3, wanted: "1" },
    ];
  });

const FIGURES: readonly Figure[] = [
  ...pull("after", "pull just after an outlier, against leaving it out"),
  ...pull("right", "the same, against reading it right"),
  ...pull("young", `pull of an outlier among the first ${KNOWN_AFTER} runs, against leaving it out`),
  ...pull("end", "pull at the end of the book, against leaving all of them out"),
];

function outliers(name: string, title: string, kind: WorldOptions["kind"]): Scenario {
  return {
    name,
    title,
    figures: FIGURES,
    play(seed): Sample {
      const quiet = twin(seed, kind, 0);
      // Both engineers are told what a gauge without slips says, so that both lay the same films.
      const line = twin(seed, kind, SLIPS, quiet.runs);
      const sample: Record<string, number[]> = {};
      for (const { key, from = key } of FIGURES) sample[from] = [];
      const [vn, , vd] = line.world.gauge;
      const note = (key: string, a: ChamberModel, b: ChamberModel, run: StudiedRun) => {
        const [x, y] = [a, b].map((model) => filmMoments(model.law(run.settings)));
        const n = Math.abs(x.index - y.index) / Math.sqrt(vn);
        const d = Math.abs(Math.exp(x.lnThickness) - Math.exp(y.lnThickness)) / Math.sqrt(vd);
        sample[`${key} n`].push(n);
        sample[`${key} d`].push(d);
      };
      const spoilt = line.runs.filter((run) => run.reading.spoilt);
      const without = new Map(spoilt.map((run) => [run.entry, unread(line, run)]));
      line.runs.forEach((run, at) => {
        if (!run.reading.spoilt) return;
        const after = run.prefix + 1;
        const alone = new Map([[run.entry, unread(line, run)]]);
        const withIt = line.model(after);
        note(at < KNOWN_AFTER ? "young" : "after", withIt, line.model(after, alone), run);
        if (at >= KNOWN_AFTER) {
          const right = new Map([[run.entry, quiet.events[run.prefix]]]);
          note("right", withIt, line.model(after, right), run);
        }
      });
      if (spoilt.length > 0)
        note("end", line.model(), line.model(line.events.length, without), line.runs[line.runs.length - 1]);
      return sample;
    },
  };
}

/** A line whose engineer is told the readings of `heard`, his twin's, or his own. */
export function twin(
  seed: string,
  kind: WorldOptions["kind"],
  slips: number,
  heard?: readonly StudiedRun[],
): StudiedLine {
  let at = 0;
  const line = new StudiedLine(studyWorld(seed, { kind, slips }), seed, {
    told: (_, reading) => heard?.[at++]?.reading ?? reading,
  });
  line.run(MEASURED_RUNS);
  return line;
}

/** The same entry with nothing read. */
function unread(line: StudiedLine, run: StudiedRun): ChamberEvent {
  const event = line.events[run.prefix];
  if (event.kind !== "run") throw new Error(`entry ${run.entry} is no run`);
  return { ...event, film: null };
}

export const outlierScenarios: readonly Scenario[] = [
  outliers("outliers", "5 % gross outliers, linear worlds", "base"),
  outliers("outliers-tube", "5 % slips of five kinds, tube-like worlds", "tube"),
];
