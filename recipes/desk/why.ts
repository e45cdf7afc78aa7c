/**
 * Why a chamber misses: what was read since an onset beside what was expected, restated as the single causes that would
 * explain it, with the checks and the run that would tell them apart. Writes nothing.
 */
import { type Cause, causesOf, type Explanation, type Settings } from "../../calibration/index.ts";
import { refuse } from "../../engine/index.ts";
import { asQuantity, shown, snapInside } from "../line/settings.ts";
import { outside } from "../line/window.ts";
import { changesOf } from "../record/changes.ts";
import { changeId, parseChangeId } from "../record/ids.ts";
import { chamberModel } from "./asking.ts";
import { leversOf } from "./learn.ts";
import { causeName, causeWords, checkFor, hiddenWords, joined, ordinaryWords, refusedWords } from "./why-words.ts";
import type { Workspace } from "./workspace.ts";

export interface Why {
  explanation: Explanation;
  document: Record<string, unknown>;
  /** The answer in a sentence or two. */
  sentence: string;
  /** Causes still in question, likeliest first, each in words; empty where one is named. */
  inQuestion: readonly { probability: number; words: string }[];
  refused: readonly string[];
  wouldTell: readonly string[];
}

/** How far a run that would tell is moved from the latest one. */
const moved = 0.03;
/** A run is worth proposing when it is expected to remove this share of the doubt, and this much more than a repeat. */
const worthIt = 0.1;
const beyondRepeat = 0.05;
/** Checks listed. */
const mostChecks = 4;

/**
 * Why a chamber misses since `since` (an entry's number, or a change that was entered), or since the likeliest onset.
 * Refuses `no-reading`, `no-run-since`, `bad-entry`, and as `Workspace.chamber`.
 */
export function why(ws: Workspace, name: string, sinceText?: string): Why {
  const chamber = ws.chamber(name);
  // Changes of another recipe move this chamber's settings too: all of its are possible onsets.
  const changes = changesOf(ws.ledger, chamber.name).flatMap((c) => (c.entered ? [c.entered.seq] : []));
  const model = chamberModel(ws, chamber.name);
  const latest = model.runs.at(-1)?.settings ?? new Map<string, number>();
  const films = [...ws.line.gauges.values()].filter((gauge) => gauge.on === "polished");
  // With several gauges it is not known here which one read a sister.
  const sisters = films.length > 1 ? [] : model.context.sisters.flatMap((s) => ws.model?.chamber(s.chamber) ?? []);
  const explanation = causesOf(model, {
    levers: leversOf(ws.line),
    changes,
    since: sinceEntry(ws, chamber.name, sinceText),
    sisters,
    runs: candidates(ws, chamber.name, latest),
  });
  const meaningOf = (cause: Cause) => ws.line.settings.get(cause.setting ?? "")?.meaning ?? null;
  const words = (cause: Cause) => causeWords(cause, meaningOf(cause), explanation.onset.kind);
  const { verdict, likely, causes } = explanation;
  const refused = verdict === "nothing" ? [] : refusedWords(causes.filter((c) => !likely.includes(c)));
  const inQuestion =
    verdict === "cannot separate" ? likely.map((c) => ({ probability: c.probability, words: words(c) })) : [];
  const wouldTell = verdict === "nothing" ? [] : tellingWords(ws, chamber.name, explanation, meaningOf);
  const sentence = sentenceOf(explanation, words);
  const run = verdict === "cannot separate" ? bestRun(explanation) : null;
  const document = {
    chamber: chamber.name,
    onset: explanation.onset,
    runs: explanation.runs.map(runDocument),
    miss: missDocument(explanation),
    verdict: verdict.replace(" ", "_"),
    says: sentence,
    causes: causes.map((cause) => ({
      ...causeDocument(cause),
      likely: likely.includes(cause),
      says: words(cause),
    })),
    refused,
    would_tell: wouldTell,
    telling_run: run
      ? {
          set: Object.fromEntries(
            [...run.settings]
              .filter(([setting, value]) => latest.get(setting) !== value)
              .flatMap(([setting, value]) => {
                const row = chamber.settings.get(setting);
                return row ? [[setting, asQuantity(row, value)]] : [];
              }),
          ),
          removes: rounded(run.tells, 3),
        }
      : null,
  };
  return { explanation, document, sentence, inQuestion, refused, wouldTell };
}

function sinceEntry(ws: Workspace, chamber: string, text: string | undefined): number | undefined {
  if (text === undefined) return undefined;
  if (/^c/i.test(text.trim())) {
    const number = parseChangeId(text);
    const change = changesOf(ws.ledger, chamber).find((c) => c.id === changeId(number));
    return change?.entered
      ? change.entered.seq
      : refuse("not-entered", `${changeId(number)} is no change that was entered on ${chamber}`);
  }
  if (!/^\d{1,12}$/.test(text.trim()))
    return refuse("bad-entry", `"${text}" is not an entry`, { hint: "--since takes an entry's number, or a change" });
  return Number(text);
}

/** The latest settings as they are, then each setting that may be tuned a few per cent up and down, inside window and range. */
function candidates(ws: Workspace, name: string, latest: Settings): Settings[] {
  const chamber = ws.chamber(name);
  const out: Settings[] = [latest];
  for (const setting of chamber.settings.values()) {
    const value = latest.get(setting.name);
    if (!setting.tune || value === undefined || !(value > 0)) continue;
    for (const sign of [1, -1]) {
      const to = snapInside(value * (1 + sign * moved), setting);
      const settings = new Map(latest).set(setting.name, to);
      if (Math.abs(to - value) > 0.5 * moved * value && outside(settings, chamber, ws.line).length === 0)
        out.push(settings);
    }
  }
  return out;
}

/** The run offered that tells best; null where none tells enough. The first is a repeat and wins unless clearly beaten. */
function bestRun({ tellingRuns }: Explanation): Explanation["tellingRuns"][number] | null {
  if (tellingRuns.length === 0) return null;
  const [repeat] = tellingRuns;
  const best = tellingRuns.reduce((a, b) => (b.tells > a.tells ? b : a));
  const chosen = best.tells > repeat.tells + beyondRepeat ? best : repeat;
  return chosen.tells >= worthIt ? chosen : null;
}

function tellingWords(
  ws: Workspace,
  name: string,
  explanation: Explanation,
  meaningOf: (cause: Cause) => string | null,
): string[] {
  const { likely, runs, verdict } = explanation;
  const out = runs
    .filter((run) => run.suspect > 0.5)
    .map((run) => `measure the wafer of entry ${run.entry} again: its reading is doubted`);
  const run = verdict === "cannot separate" ? bestRun(explanation) : null;
  if (run) {
    const share = `${Math.round(100 * run.tells)} % of the doubt`;
    const [latest] = explanation.tellingRuns;
    const change = [...run.settings].find(([setting, value]) => latest.settings.get(setting) !== value);
    const setting = change && ws.chamber(name).settings.get(change[0]);
    if (change && setting) {
      const from = latest.settings.get(change[0]) as number;
      out.push(
        `a run with ${setting.name} at ${shown(setting, change[1])} instead of ${shown(setting, from)} would remove about ${share}`,
      );
    } else out.push(`one more run as it is would remove about ${share}`);
  }
  const checks = likely
    .map((cause) => checkFor(cause, meaningOf(cause), explanation.onset.kind))
    .filter((text) => text !== null);
  out.push(...[...new Set(checks)].slice(0, mostChecks));
  return out;
}

function sentenceOf({ verdict, likely, causes, onset, miss }: Explanation, words: (cause: Cause) => string): string {
  if (verdict === "nothing") {
    const hidden = causes.filter((c) => c.kind === "setting" && likely.includes(c)).map(hiddenWords);
    const more = hidden.length ? ` So much would not show: ${hidden.join(", ")}.` : "";
    return `No miss worth explaining: it is within ${ordinaryWords(onset.kind)}.${more}`;
  }
  if (verdict === "named") {
    const text = words(likely[0]);
    return `${text[0].toUpperCase()}${text.slice(1)}.`;
  }
  const list = joined(likely.map((cause) => causeName(cause, onset.kind)));
  const unread =
    miss.index === null ? " (no index was read)" : miss.lnThickness === null ? " (no thickness was read)" : "";
  return `Cannot be told apart so far${unread}: ${list}.`;
}

const rounded = (v: number, digits: number) => Number(v.toFixed(digits));

function runDocument(run: Explanation["runs"][number]): Record<string, unknown> {
  const interval = ({ mean, sd }: { mean: number; sd: number }, digits: number) => ({
    mean: rounded(mean, digits),
    low: rounded(mean - 1.96 * sd, digits),
    high: rounded(mean + 1.96 * sd, digits),
  });
  return {
    entry: run.entry,
    index: run.index === null ? null : rounded(run.index, 4),
    thickness_nm: run.thicknessNm === null ? null : rounded(run.thicknessNm, 2),
    expected: { index: interval(run.expectedIndex, 4), thickness_nm: interval(run.expectedThickness, 2) },
    suspect: rounded(run.suspect, 3),
  };
}

function missDocument({ miss }: Explanation): Record<string, unknown> {
  const { index, lnThickness } = miss;
  return {
    index: index && { mean: rounded(index.mean, 4), sd: rounded(index.sd, 4) },
    thickness_percent: lnThickness && {
      mean: rounded(100 * Math.expm1(lnThickness.mean), 2),
      sd: rounded(100 * lnThickness.sd, 2),
    },
  };
}

/** Sizes in per cent of what was typed or read, in degrees, or in index; negative is less, lower, shorter. */
function causeDocument(cause: Cause): Record<string, unknown> {
  const { kind, setting, unit, probability, size, cannotExplain } = cause;
  const by = unit === "fraction" ? 100 : 1;
  const digits = unit === "index" ? 4 : 2;
  return {
    kind: kind.replace(" ", "_"),
    setting,
    probability: rounded(probability, 4),
    as_if: size && {
      mean: rounded(by * size.mean, digits),
      low: rounded(by * size.low, digits),
      high: rounded(by * size.high, digits),
      unit: unit === "fraction" ? "%" : unit === "degrees" ? "degC" : "index",
    },
    cannot_explain: cannotExplain,
  };
}
