/** What a scenario of the study is, and how one is played over many worlds. */
import { type Figure, figureOver, type Result, type Sample } from "./figures.ts";
import { waysApart } from "./one-step.ts";
import type { StudiedLine } from "./studied-line.ts";

export interface Scenario {
  /** One word, what the command line picks scenarios by. */
  name: string;
  title: string;
  figures: readonly Figure[];
  /** Plays one world. The same seed gives the same sample, on any machine and in any order. */
  play(seed: string): Sample;
  /** A line of this scenario on which the quick one-step way is held against the honest one; absent where it is not used. */
  specimen?(seed: string): StudiedLine;
}

/** Seeds of a study: "TEXT-1" to "TEXT-N". All scenarios use the same ones, so that their worlds can be compared. */
export const seedsOf = (text: string, worlds: number) => Array.from({ length: worlds }, (_, i) => `${text}-${i + 1}`);

export interface Played {
  name: string;
  title: string;
  seeds: { first: string; last: string; worlds: number };
  results: Result[];
  /** Largest distance between the quick and the honest way on the specimens; null where not used. */
  waysApart: number | null;
  /** Time of one world on one core, mean, milliseconds. */
  msPerWorld: number;
}

/**
 * Largest distance allowed between the two ways, in ranks and gauge sds: nodes that are dropped weigh up to 6e-6 each, and
 * there are 72. Anything wrong in the logic is a hundred times as large.
 */
export const WAYS_MAY_DIFFER = 1e-3;
const SPECIMENS = 2;

/** Holds the quick way against the honest one on a few worlds: every fifth run, and the first three. */
export function checkWays(scenario: Scenario, seeds: readonly string[]): number | null {
  if (!scenario.specimen) return null;
  let apart = 0;
  for (const seed of seeds.slice(0, SPECIMENS)) {
    const line = scenario.specimen(seed);
    const runs = line.runs.filter((_, i) => i < 3 || i % 5 === 0);
    apart = Math.max(apart, waysApart(line, runs));
  }
  return apart;
}

/** The figures of a scenario from its samples, in the order of the seeds. */
export function played(
  scenario: Scenario,
  seeds: readonly string[],
  samples: readonly Sample[],
  more: Pick<Played, "waysApart" | "msPerWorld">,
): Played {
  return {
    name: scenario.name,
    title: scenario.title,
    seeds: { first: seeds[0], last: seeds[seeds.length - 1], worlds: seeds.length },
    results: scenario.figures.map((figure) => figureOver(figure, samples)),
    ...more,
  };
}
