/**
 * Is a leak named, and nothing else? From a clean on the index is 0.05 to 0.1 lower. Twins of the same films tell what an
 * ordinary clean gets in its place. Named: the program is sure enough to stop proposing; asked about: it wants another reading.
 */
import { suspicions } from "../../../calibration/index.ts";
import { random } from "../../../engine/index.ts";
import { alarmsFrom } from "../../../recipes/advice/alarms.ts";
import type { Figure, Sample } from "../figures.ts";
import type { Scenario } from "../scenario.ts";
import { StudiedLine, type StudiedRun } from "../studied-line.ts";
import { studyWorld, type WorldOptions } from "../worlds-under-study.ts";

const share = (key: string, words: string, wanted?: string): Figure => ({
  key,
  words,
  how: "share",
  digits: 3,
  wanted,
});
const FIGURES: readonly Figure[] = [
  share("named 1", "leak named after one reading"),
  share("named 2", "leak named within two readings", "1"),
  share("asked 1", "leak named or asked about after one reading", "1"),
  share("asked 2", "leak named or asked about within two readings", "1"),
  share("clean 1", "ordinary clean falsely named after one reading", "0"),
  share("clean 2", "ordinary clean falsely named within two readings", "0"),
  share("clean asked", "ordinary clean asked about within two readings"),
  share("other", "other runs falsely named, a run", "0"),
  share("other asked", "other runs asked about, a run"),
];
/** Of the runs that follow no clean, so manieth is looked at: they are many, and each costs a model. */
const EVERY = 6;

interface Heard {
  low: boolean;
  any: boolean;
  asked: boolean;
}

/** What the program would say with the book up to and with this run. */
function heard(line: StudiedLine, run: StudiedRun): Heard {
  const alarms = alarmsFrom(suspicions(line.model(run.prefix + 1)), new Set());
  return {
    low: alarms.some((a) => a.certain && a.name === "index_low"),
    any: alarms.some((a) => a.certain),
    asked: alarms.length > 0,
  };
}

function leak(name: string, title: string, ownRuns: number, options: WorldOptions): Scenario {
  return {
    name,
    title,
    figures: FIGURES,
    play(seed): Sample {
      const size = random(seed).fork("leak").uniform(-0.1, -0.05);
      const grown = () => {
        const line = new StudiedLine(studyWorld(seed, options), seed);
        line.run(ownRuns);
        line.clean();
        return line;
      };
      const sample: Record<string, number[]> = {};
      for (const { key } of FIGURES) sample[key] = [];

      const leaking = grown();
      leaking.leak(size);
      const [one, two] = [leaking.run(), leaking.run()].map((run) => heard(leaking, run));
      sample["named 1"].push(Number(one.low));
      sample["named 2"].push(Number(one.low || two.low));
      sample["asked 1"].push(Number(one.asked));
      sample["asked 2"].push(Number(one.asked || two.asked));

      const ordinary = grown();
      ordinary.run(2);
      ordinary.runs.forEach((run, at) => {
        const { afterClean } = run;
        if (afterClean?.runs === 0 && afterClean.written) {
          const next = ordinary.runs[at + 1];
          const [first, second] = [run, next].map((r) => heard(ordinary, r));
          sample["clean 1"].push(Number(first.any));
          sample["clean 2"].push(Number(first.any || second.any));
          sample["clean asked"].push(Number(first.asked || second.asked));
        } else if ((afterClean === null || afterClean.runs > 1) && at % EVERY === EVERY - 1) {
          const other = heard(ordinary, run);
          sample.other.push(Number(other.any));
          sample["other asked"].push(Number(other.asked));
        }
      });
      return sample;
    },
  };
}

const KNOWN = 60;
const YOUNG = 6;

export const leakScenarios: readonly Scenario[] = [
  leak("leak", "A leak in a known chamber (60 runs), linear worlds", KNOWN, { kind: "base" }),
  leak("leak-six", "A leak in a chamber with six runs, linear worlds", YOUNG, { kind: "base" }),
  leak("leak-steps", "A leak in a known chamber, cleans that leave twice the step", KNOWN, {
    kind: "base",
    stepScale: 2,
  }),
  leak("leak-six-steps", "A leak after six runs, cleans that leave twice the step", YOUNG, {
    kind: "base",
    stepScale: 2,
  }),
  leak("leak-six-slips", "A leak after six runs, twice the gross slips", YOUNG, { kind: "base", slips: 0.06 }),
  leak("leak-misfit", "A leak in a known chamber, mis-specified worlds", KNOWN, { kind: "misfit" }),
  leak("leak-tube", "A leak in a known chamber, tube-like worlds", KNOWN, { kind: "tube" }),
  leak("leak-six-tube", "A leak in a chamber with six runs, tube-like worlds", YOUNG, { kind: "tube" }),
];
