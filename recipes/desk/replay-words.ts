/** What a replay comes to: its figures, and the verdict in a sentence with its numbers. */
import { quantile } from "../rehearsal/score.ts";
import type { Replay, ReplayedRun } from "./replaying.ts";

export interface ReplaySummary {
  /** Median miss of the reading, in index and nm. */
  misses: Record<"ours" | "rival", { index: number; thicknessNm: number } | null>;
  /** Readings inside their 95 % interval, of all (index and thickness count one each). */
  coverage: { inside: number; readings: number };
  /** Mean of the chances stated of readings in goal, beside how many were. */
  chances: { stated: number; came: number; runs: number } | null;
  /** How often each advice would have been given, and how often the rival would have moved something. */
  advice: Record<string, number>;
  rivalMoves: { moves: number; runs: number } | null;
  says: string;
}

const median = (values: readonly number[]) => quantile(values, 0.5);

function missesOf(runs: readonly ReplayedRun[], who: "ours" | "rival"): { index: number; thicknessNm: number } | null {
  const both = runs.flatMap((run) => {
    const expected = run[who];
    return expected ? [{ expected, read: run.read }] : [];
  });
  if (both.length === 0) return null;
  const of = (key: "index" | "thicknessNm") =>
    median(both.flatMap(({ expected, read }) => (read[key] === null ? [] : [Math.abs(read[key] - expected[key])])));
  return { index: of("index"), thicknessNm: of("thicknessNm") };
}

function verdictSentence({ chamber, better, verdict }: Replay): string {
  if (verdict === "no_rival" || better === null)
    return `${chamber}: there is no rival to judge by here (it needs silane, ammonia and time).`;
  const { mean, error, runs } = better;
  const by = `${Math.abs(mean).toFixed(3)} tolerances a run (standard error ${error.toFixed(3)}, ${runs} runs)`;
  switch (verdict) {
    case "earns_its_keep":
      return `${chamber}: the model earns its keep: it missed the readings by less than the tuned EWMA, by ${by}.`;
    case "worse":
      return `${chamber}: the model does not earn its keep: it missed the readings by more than the tuned EWMA, by ${by}.`;
    default:
      return `${chamber}: on these runs the model expects readings no better and no worse than the tuned EWMA: it missed them by ${mean < 0 ? "more" : "less"}, by ${by}, which is within chance.`;
  }
}

export function summaryOf(replay: Replay): ReplaySummary {
  const { runs } = replay;
  const inside = runs.flatMap(({ ours }) => [ours.insideIndex, ours.insideThickness]).filter((one) => one !== null);
  const told = runs.flatMap(({ ours }) =>
    ours.chance === null || ours.inGoal === null ? [] : [{ chance: ours.chance, hit: ours.inGoal }],
  );
  const advice: Record<string, number> = {};
  for (const { ours } of runs) if (ours.advice !== null) advice[ours.advice] = (advice[ours.advice] ?? 0) + 1;
  const rivals = runs.flatMap(({ rival }) => (rival ? [rival] : []));
  return {
    misses: { ours: missesOf(runs, "ours"), rival: missesOf(runs, "rival") },
    coverage: { inside: inside.filter((one) => one).length, readings: inside.length },
    chances:
      told.length === 0
        ? null
        : {
            stated: told.reduce((sum, t) => sum + t.chance, 0) / told.length,
            came: told.filter((t) => t.hit).length / told.length,
            runs: told.length,
          },
    advice,
    rivalMoves: rivals.length === 0 ? null : { moves: rivals.filter((r) => r.moves).length, runs: rivals.length },
    says: verdictSentence(replay),
  };
}

/** A replay as `--json` gives it. */
export function replayDocument(replay: Replay, summary: ReplaySummary): Record<string, unknown> {
  const round = (v: number, digits: number) => (Number.isFinite(v) ? Number(v.toFixed(digits)) : null);
  const film = (f: { index: number; thicknessNm: number }) => ({
    index: round(f.index, 4),
    thickness_nm: round(f.thicknessNm, 2),
  });
  const { better, verdict, chamber, measured, leftOut } = replay;
  const { misses, coverage, chances, advice, rivalMoves, says } = summary;
  return {
    chamber,
    measured_runs: measured,
    replayed: replay.runs.length,
    left_out: leftOut,
    verdict,
    says,
    better: better && { mean: round(better.mean, 4), error: round(better.error, 4), runs: better.runs },
    median_miss: { ours: misses.ours && film(misses.ours), tuned_ewma: misses.rival && film(misses.rival) },
    inside_95: coverage,
    chances: chances && { ...chances, stated: round(chances.stated, 4), came: round(chances.came, 4) },
    advice,
    tuned_ewma_moves: rivalMoves,
    runs: replay.runs.map(({ entry, recipe, read, ours, rival, miss }) => ({
      entry,
      recipe,
      read: {
        index: read.index === null ? null : round(read.index, 4),
        thickness_nm: read.thicknessNm === null ? null : round(read.thicknessNm, 2),
      },
      ours: {
        ...film(ours),
        inside_index: ours.insideIndex,
        inside_thickness: ours.insideThickness,
        chance: ours.chance === null ? null : round(ours.chance, 4),
        in_goal: ours.inGoal,
        advice: ours.advice,
      },
      tuned_ewma: rival && { ...film(rival), moves: rival.moves },
      miss: { ours: round(miss.ours, 3), tuned_ewma: miss.rival === null ? null : round(miss.rival, 3) },
    })),
  };
}
