/**
 * The tuned EWMA over a line's own book: what it would have expected and set, told the same as this program. It knows gas
 * ratio and time only, so a line without silane, ammonia or time has no such rival.
 */
import type { Settings } from "../../calibration/index.ts";
import { type Goal, goalOf } from "../line/line.ts";
import { chamberRecord } from "../record/ledger.ts";
import { sameSettings } from "../rehearsal/practices/dials.ts";
import { hearing } from "../rehearsal/practices/practice.ts";
import { tunedHand } from "../rehearsal/practices/tuned-ewma.ts";
import type { Brief, Logged } from "../rehearsal/stage.ts";
import { canonicalSettings, referenceRecipe } from "./learn.ts";
import type { Workspace } from "./workspace.ts";

const NEEDED = ["silane", "ammonia", "time"] as const;

export interface Rival {
  /** The film it expects at settings of the line. */
  expects(settings: Settings): { index: number; thicknessNm: number } | null;
  /** Does it want other settings than those in force? */
  moves: boolean;
}

/** A chamber's goal for the film with what is not stated filled in, only to weigh errors by. */
export function weighed(goal: Goal, otherwise: { index: number; thicknessNm: number }) {
  return {
    goal: {
      index: goal.index?.value ?? otherwise.index,
      thicknessNm: goal.thicknessNm?.value ?? otherwise.thicknessNm,
    },
    tolerance: { index: goal.index?.within ?? 0.02, thicknessNm: goal.thicknessNm?.within ?? 2 },
  };
}

/** The rival as it stands after what the book says so far; null where the line has no settings for it or nothing is known. */
export function rivalOf(
  ws: Workspace,
  chamber: string,
  inForce: Settings,
  goals: Pick<Brief, "goal" | "tolerance">,
): Rival | null {
  const { line, ledger } = ws;
  const names = new Map(
    NEEDED.map((meaning) => [meaning, [...line.settings.values()].find((s) => s.meaning === meaning)?.name]),
  );
  if ([...names.values()].some((name) => name === undefined)) return null;
  // The rival calls every setting by its meaning.
  const known = (settings: Settings): Settings | null => {
    const out = new Map<string, number>();
    for (const [meaning, name] of names) {
      const value = settings.get(name ?? "");
      if (value === undefined || !(value > 0)) return null;
      out.set(meaning, value);
    }
    return out;
  };
  const found = referenceRecipe(line, ledger);
  const reference = found && known(found.settings);
  const start = known(inForce);
  if (!found || !reference || !start) return null;
  const meant = goalOf(line, found.recipe);
  const logOf = (name: string): Logged[] =>
    chamberRecord(ledger, name).timeline.flatMap((event): Logged[] => {
      if (event.kind === "clean") return [{ kind: "clean" }];
      if (event.kind !== "run") return [];
      const settings = known(canonicalSettings(line, event.data.steps));
      return settings ? [{ kind: "run", settings, reading: ws.filmOf(event) }] : [];
    });
  const levers = ws.chamber(chamber).settings;
  const ratio = line.window.find((w) => w.text === `${names.get("ammonia")}/${names.get("silane")}`);
  const brief: Brief = {
    ...goals,
    reference,
    aim: {
      index: meant.index?.value ?? goals.goal.index,
      thicknessNm: meant.thicknessNm?.value ?? goals.goal.thicknessNm,
    },
    start,
    levers: [...names].flatMap(([meaning, name]) => {
      const setting = levers.get(name ?? "");
      return setting ? [{ ...setting, name: meaning }] : [];
    }),
    ratio: [ratio?.low ?? 0, ratio?.high ?? Number.POSITIVE_INFINITY],
    gauge: { index: 0, thicknessNm: 0, correlation: 0, sites: 1 },
    sisters: [...line.chambers.keys()].filter((name) => name !== chamber).map((name) => ({ name, log: logOf(name) })),
    history: logOf(chamber),
  };
  const hand = hearing(tunedHand(brief), brief.history);
  return {
    expects(settings) {
      const at = known(settings);
      return at && hand.expects(at);
    },
    moves: !sameSettings(hand.next(), start),
  };
}
