/**
 * How settings become film: the table of levers that turns a recipe into the regressors of a linear model for the index
 * and for ln(thickness).
 *
 *   index   n    = sum_i c_i x_i(settings, k) + s_n
 *   ln thickness = sum_j r_j y_j(settings, k) + s_r + [ln te + tp/te],   te = max(t - tp, 5 s)
 *
 * k counts depositions since the clean; s_n, s_r are the steps since then. The dead time t0 enters to first order of
 * ln(t - t0) about tp. The index is regressed on the silane share z = SiH4/(SiH4+NH3), scaled so that its lever equals
 * ln(ratio / reference ratio) to first order: near the usual index the share is nearly linear where ln(ratio) bends
 * (composition model of Bustarret et al., Phys. Rev. B 38, 8171 (1988)).
 */
import { refuse } from "../engine/index.ts";
import { assumedDeadTimeS, type Prior, type Priors, standardPriors, transientDepositions } from "./priors.ts";
import type { Settings } from "./run.ts";

/** A setting as the model sees it. `meaning` is its built-in meaning, null for a site's own. */
export interface Lever {
  setting: string;
  meaning: string | null;
  acts: "log" | "linear" | null;
  low: number;
  high: number;
}

/** One coefficient of the model. `value` gives its regressor, 0 at the reference recipe for every lever. */
export interface Term {
  /** "ratio", "silane", "power", ... ; "offset", "drift", "transient", "dead time". */
  name: string;
  output: "index" | "rate";
  prior: Prior;
  /** Settings that move this term, by name. Empty for offset, drift and transient. */
  movedBy: readonly string[];
  value(settings: Settings, k: number): number;
}

export interface FilmResponse {
  terms: readonly Term[];
  reference: Settings;
  /** The known part of ln(thickness). */
  known(settings: Settings): number;
  /** The setting that keeps a run from teaching anything: one not written down, or not above zero where logs are taken; else null. */
  spoilt(settings: Settings): string | null;
  /** Name of the setting with a built-in meaning, if the line has it. */
  named(meaning: string): string | null;
}

const need = (settings: Settings, name: string): number => {
  const value = settings.get(name);
  if (value === undefined) refuse("missing-setting", `${name} is not given`);
  return value;
};

/** A lever's own regressor: log or linear about the reference; a setting that was not written down sits at it. */
function simpleLever(name: string, reference: number, how: "log" | "linear", scale: number) {
  return (settings: Settings): number => {
    const value = settings.get(name) ?? reference;
    return how === "log" ? Math.log(value / reference) : (value - reference) / scale;
  };
}

/**
 * Builds the response for a line's levers about a reference recipe. `thicknessNm` is what the reference recipe is meant
 * to lay (the goal's), which centres the rate prior; `index` likewise the index. Throws when there is neither time nor
 * belt speed, or a log lever's reference is not positive.
 */
export function filmResponse(
  levers: readonly Lever[],
  reference: Settings,
  aim: { index: number | null; thicknessNm: number | null },
  priors: Priors = standardPriors,
): FilmResponse {
  const { index: indexPriors, rate: ratePriors } = priors;
  const byMeaning = new Map<string, string>();
  for (const lever of levers) if (lever.meaning !== null) byMeaning.set(lever.meaning, lever.setting);
  const named = (meaning: string) => byMeaning.get(meaning) ?? null;
  const terms: Term[] = [];
  const add = (name: string, output: Term["output"], prior: Prior, movedBy: string[], value: Term["value"]) =>
    terms.push({ name, output, prior, movedBy, value });

  const silane = named("silane");
  const ammonia = named("ammonia");
  const time = named("time");
  const belt = named("belt_speed");
  if (time === null && belt === null)
    refuse("no-time", "the line declares neither time nor belt_speed, so no thickness can be learned");

  const te = (settings: Settings) => Math.max(need(settings, time ?? "time") - assumedDeadTimeS, 5);
  const known = (settings: Settings): number => {
    if (time !== null) return Math.log(te(settings)) + assumedDeadTimeS / te(settings);
    return -Math.log(need(settings, belt ?? "belt_speed"));
  };
  const rateMean =
    Math.log(aim.thicknessNm ?? 80) - known(reference) + (time === null ? 0 : assumedDeadTimeS / te(reference));
  const indexMean = aim.index ?? indexPriors.offset.mean;

  // A regressor that serves both outputs is one function, so that `layoutFor` sees that it is the same.
  add("offset", "index", { ...indexPriors.offset, mean: indexMean }, [], always);
  add("drift", "index", indexPriors.drift, [], since);
  add("transient", "index", indexPriors.transient, [], dying);
  const ratioLever = ratioOf(silane, ammonia, reference);
  if (ratioLever && silane && ammonia) {
    add("ratio", "index", indexPriors.ratio, [silane, ammonia], ratioLever);
    add("ratio squared", "index", indexPriors.ratioSquared, [silane, ammonia], (s) => ratioLever(s) ** 2);
  }
  const gas = (name: string, meaning: string) =>
    simpleLever(name, need(reference, name), "log", positive(name, meaning, reference));
  const silaneLever = silane ? gas(silane, "silane") : null;
  if (silane && silaneLever) add("silane", "index", indexPriors.silane, [silane], silaneLever);
  const others = otherLevers(levers, reference, priors);
  for (const o of others) add(o.name, "index", o.index, o.settings, o.value);

  add("offset", "rate", { ...ratePriors.offset, mean: rateMean }, [], always);
  add("drift", "rate", ratePriors.drift, [], since);
  add("transient", "rate", ratePriors.transient, [], dying);
  if (ratioLever && silane && ammonia) add("ratio", "rate", ratePriors.ratio, [silane, ammonia], ratioLever);
  if (silane && silaneLever) add("silane", "rate", ratePriors.silane, [silane], silaneLever);
  if (time !== null) add("dead time", "rate", ratePriors.deadTime, [time], (s) => -1 / te(s));
  for (const o of others) add(o.name, "rate", o.rate, o.settings, o.value);

  const needed = [silane, ammonia, time ?? belt].filter((name): name is string => name !== null);
  const logged = others.filter((o) => o.how === "log").flatMap((o) => o.settings);
  const spoilt = (settings: Settings): string | null =>
    needed.find((name) => !((settings.get(name) ?? 0) > 0)) ??
    logged.find((name) => settings.has(name) && !((settings.get(name) as number) > 0)) ??
    null;
  return { terms, reference, known, spoilt, named };
}

const always: Term["value"] = () => 1;
const since: Term["value"] = (_settings, k) => k;
const dying: Term["value"] = (_settings, k) => Math.exp(-k / transientDepositions);

function positive(name: string, meaning: string, reference: Settings): number {
  const value = need(reference, name);
  if (!(value > 0)) refuse("bad-reference", `${meaning} is ${value} in the reference recipe; it must be above zero`);
  return value;
}

/** The ratio lever: -(z - z0) / (z0 (1 - z0)), z the silane share. */
function ratioOf(silane: string | null, ammonia: string | null, reference: Settings) {
  if (!silane || !ammonia) return null;
  const share = (s: Settings) => need(s, silane) / (need(s, silane) + need(s, ammonia));
  positive(ammonia, "ammonia", reference);
  const z0 = share(reference);
  return (settings: Settings) => -(share(settings) - z0) / (z0 * (1 - z0));
}

interface OtherLever {
  name: string;
  how: "log" | "linear";
  settings: string[];
  index: Prior;
  rate: Prior;
  value(settings: Settings): number;
}

/** Levers beyond gas and time: one row a meaning. */
const otherMeanings = ({
  index,
  rate,
}: Priors): Record<string, { how: "log" | "linear"; index: Prior; rate: Prior }> => ({
  power: { how: "log", index: index.power, rate: rate.power },
  pressure: { how: "log", index: index.pressure, rate: rate.pressure },
  temperature: { how: "linear", index: index.temperature, rate: rate.temperature },
  on_time: { how: "log", index: index.duty, rate: rate.duty },
  off_time: { how: "log", index: index.duty, rate: { ...rate.duty, mean: -rate.duty.mean } },
});

function otherLevers(levers: readonly Lever[], reference: Settings, priors: Priors): OtherLever[] {
  const found: OtherLever[] = [];
  const { index: indexPriors, rate: ratePriors } = priors;
  const meanings = otherMeanings(priors);
  for (const lever of levers) {
    const { setting, meaning } = lever;
    if (meaning === "silane" || meaning === "ammonia" || meaning === "time" || meaning === "belt_speed") continue;
    const at = reference.get(setting);
    if (at === undefined) continue;
    const span = lever.high - lever.low || 1;
    if (meaning === "nitrogen") {
      const scale = Math.max(at, 0.25 * lever.high, 1e-9);
      const value = simpleLever(setting, at, "linear", scale);
      const { nitrogen } = indexPriors;
      found.push({
        name: setting,
        how: "linear",
        settings: [setting],
        index: nitrogen,
        rate: ratePriors.nitrogen,
        value,
      });
      continue;
    }
    const row = meaning === null ? undefined : meanings[meaning.startsWith("zone_") ? "temperature" : meaning];
    if (row && (row.how === "linear" || at > 0)) {
      const value = simpleLever(setting, at, row.how, 1);
      found.push({ name: setting, how: row.how, settings: [setting], index: row.index, rate: row.rate, value });
      continue;
    }
    const how = lever.acts === "log" && at > 0 ? "log" : "linear";
    const index = how === "log" ? indexPriors.ownLog : indexPriors.ownLinear;
    const rate = how === "log" ? ratePriors.ownLog : ratePriors.ownLinear;
    found.push({ name: setting, how, settings: [setting], index, rate, value: simpleLever(setting, at, how, span) });
  }
  return found;
}
