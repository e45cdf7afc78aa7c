/**
 * What a doubted reading may have been: a slip of units, two runs' readings exchanged, a wafer of the wrong kind. Each is
 * weighed by how well the reading it would then have been was expected, against the reading as it stands (an unspecific
 * bad measurement or an unlogged step among the explanations). A doubted reading moves nothing, so none of these stops
 * anything: they say what to correct.
 */
import { logSumExp } from "../../engine/index.ts";
import type { ChamberModel } from "../chamber-model.ts";
import type { LineModel } from "../line-model.ts";
import { readingSlips } from "../priors.ts";
import type { ChamberLog } from "../run.ts";
import {
  asItStandsLog,
  type LawBefore,
  lawBefore,
  meanOf,
  ordinaryLog,
  type Reading,
  readingOf,
} from "./reading-law.ts";

export type MistakeName = "unit_slip" | "swapped_rows" | "wrong_wafer";

/** What a run's reading should say instead: what was typed of the run `from`, divided by `over`. */
export interface Corrected {
  entry: number;
  field: "index" | "thicknessNm" | "reflectanceMinimumNm";
  value: number;
  from: number;
  over: number;
}

export interface ReadingMistake {
  name: MistakeName;
  probability: number;
  /** The run whose reading is doubted, and the run it was exchanged with. */
  entry: number;
  other: { chamber: string; entry: number } | null;
  read: { index: number | null; thicknessNm: number | null };
  expected: { index: number; thicknessNm: number };
  /** Empty where the right value cannot be known from the wrong one. */
  corrected: Corrected[];
}

/** How many of the last measured runs are looked at, and how many runs apart two may be whose readings were exchanged. */
const lastRuns = 8;
const apart = 3;
/** Entries apart two runs of different chambers may be: one import, one sheet. */
const entriesApart = 24;
/** A reading is doubted from this joint probability of bad and step on; a mistake is told from the other on. */
const doubted = 0.5;
const told = 0.5;

interface Doubt {
  model: ChamberModel;
  /** Place among the chamber's measured runs. */
  at: number;
  entry: number;
  reading: Reading;
  law: LawBefore;
  asItStands: number;
  isDoubted: boolean;
}

type Explained = Pick<ReadingMistake, "name" | "other" | "corrected"> & { log: number };

/** Mistakes likelier than anything else in the last doubted readings of a chamber, latest first; a pair exchanged is told once. */
export function readingMistakes(line: LineModel, chamber: string): ReadingMistake[] {
  const own = lastReadings(line.chamber(chamber));
  const found = impossibleMinima(own);
  if (!own.some((d) => d.isDoubted)) return found;
  // A chamber without a run so near to a doubted one need not be asked.
  const near = (log: ChamberLog) =>
    own.some(
      (d) => d.isDoubted && log.events.some((e) => e.kind === "run" && Math.abs(e.entry - d.entry) <= entriesApart),
    );
  const elsewhere = line.logs
    .filter((log) => log.chamber !== chamber && near(log))
    .flatMap((log) => lastReadings(line.chamber(log.chamber)).filter((d) => d.isDoubted));
  const explained = new Set<number>();
  for (const doubt of [...own].reverse()) {
    if (!doubt.isDoubted || explained.has(doubt.entry)) continue;
    const mates = [
      ...own.filter((d) => d !== doubt && Math.abs(d.at - doubt.at) <= apart),
      ...elsewhere.filter((d) => Math.abs(d.entry - doubt.entry) <= entriesApart),
    ];
    const ways = [
      ...unitSlips(doubt),
      ...wrongWafers(doubt, line.facet),
      ...mates.flatMap((mate) => exchanged(doubt, mate)),
    ];
    if (ways.length === 0) continue;
    const best = ways.reduce((a, b) => (b.log > a.log ? b : a));
    const alike = ways.filter((w) => w.name === best.name).map((w) => w.log);
    const probability = Math.exp(logSumExp(alike) - logSumExp([doubt.asItStands, ...ways.map((w) => w.log)]));
    if (probability < told) continue;
    explained.add(doubt.entry);
    if (best.other?.chamber === chamber) explained.add(best.other.entry);
    const { log: _, ...way } = best;
    found.push({ ...way, probability, entry: doubt.entry, ...films(doubt) });
  }
  return found;
}

function lastReadings(model: ChamberModel): Doubt[] {
  const { runs } = model;
  const first = Math.max(runs.length - lastRuns, 0);
  return runs.slice(first).map((run, i) => {
    const at = first + i;
    const law = lawBefore(model, at);
    const reading = readingOf(run, law);
    const asItStands = asItStandsLog(law, reading);
    const isDoubted = ordinaryLog(law, reading) - asItStands < Math.log(1 - doubted);
    return { model, at, entry: run.entry, reading, law, asItStands, isDoubted };
  });
}

function films({ reading, law }: Doubt): Pick<ReadingMistake, "read" | "expected"> {
  const mean = meanOf(law);
  return {
    read: {
      index: Number.isNaN(reading.index) ? null : reading.index,
      thicknessNm: Number.isNaN(reading.lnThickness) ? null : Math.exp(reading.lnThickness),
    },
    expected: { index: mean.index, thicknessNm: Math.exp(mean.lnThickness) },
  };
}

/** Typed over meant: micrometres and angstrom for nm, a decimal point astray. */
const thicknessFactors = [10, 0.1, 1000, 0.001];
const indexFactors = [10, 0.1, 100, 1000];

function unitSlips({ reading, law, entry }: Doubt): Explained[] {
  const prior = Math.log(readingSlips.unit / (thicknessFactors.length + indexFactors.length));
  const slip = (
    meant: Reading,
    jacobian: number,
    corrected: Pick<Corrected, "field" | "value" | "over">,
  ): Explained => ({
    name: "unit_slip",
    other: null,
    corrected: [{ entry, from: entry, ...corrected }],
    log: prior + ordinaryLog(law, meant) - jacobian,
  });
  const out: Explained[] = [];
  if (!Number.isNaN(reading.lnThickness))
    for (const over of thicknessFactors) {
      const lnThickness = reading.lnThickness - Math.log(over);
      out.push(slip({ ...reading, lnThickness }, 0, { field: "thicknessNm", value: Math.exp(lnThickness), over }));
    }
  if (!Number.isNaN(reading.index))
    for (const over of indexFactors) {
      const index = reading.index / over;
      // The density is that of the index as typed.
      out.push(slip({ ...reading, index }, Math.log(over), { field: "index", value: index, over }));
    }
  return out;
}

/** A textured wafer read in place of the witness, or a witness taken for a textured one. The index read of it says little. */
function wrongWafers({ reading, law }: Doubt, facet: { mean: number; sd: number }): Explained[] {
  if (Number.isNaN(reading.lnThickness) || Math.abs(Math.log(facet.mean)) < readingSlips.leastFacet) return [];
  const variance = (facet.sd / facet.mean) ** 2;
  return [1, -1].map((sign) => ({
    name: "wrong_wafer",
    other: null,
    corrected: [],
    log:
      Math.log(readingSlips.wafer / 2) +
      ordinaryLog(law, { ...reading, lnThickness: reading.lnThickness - sign * Math.log(facet.mean) }, [
        readingSlips.waferIndexSd ** 2,
        variance,
      ]),
  }));
}

/** Both readings where the other belongs. The other's own explanation as it stands is given up for it. */
function exchanged(one: Doubt, other: Doubt): Explained[] {
  const sameOutputs =
    Number.isNaN(one.reading.index) === Number.isNaN(other.reading.index) &&
    Number.isNaN(one.reading.lnThickness) === Number.isNaN(other.reading.lnThickness);
  if (!sameOutputs) return [];
  return [
    {
      name: "swapped_rows",
      other: { chamber: other.model.chamber, entry: other.entry },
      corrected: [...valuesFor(one.entry, other), ...valuesFor(other.entry, one)],
      log:
        Math.log(readingSlips.exchanged) +
        ordinaryLog(one.law, other.reading) +
        ordinaryLog(other.law, one.reading) -
        other.asItStands,
    },
  ];
}

function valuesFor(entry: number, { entry: from, reading }: Doubt): Corrected[] {
  const { index, lnThickness } = reading;
  const out: Corrected[] = [];
  if (!Number.isNaN(index)) out.push({ entry, field: "index", value: index, from, over: 1 });
  if (!Number.isNaN(lnThickness))
    out.push({ entry, field: "thicknessNm", value: Math.exp(lnThickness), from, over: 1 });
  return out;
}

/** A minimum of light under 20 nm was typed in micrometres: no film has one there, so nothing needs weighing. */
function impossibleMinima(own: readonly Doubt[]): ReadingMistake[] {
  return own.flatMap((doubt): ReadingMistake[] => {
    const typed = doubt.model.runs[doubt.at].light.find((l) => l.kind === "reflectance_minimum_nm")?.value;
    if (typed === undefined || typed > readingSlips.leastMinimumNm) return [];
    const { entry } = doubt;
    const corrected: Corrected = {
      entry,
      field: "reflectanceMinimumNm",
      value: 1000 * typed,
      from: entry,
      over: 0.001,
    };
    return [{ name: "unit_slip", probability: 1, entry, other: null, ...films(doubt), corrected: [corrected] }];
  });
}
