/** A cause, the checks that settle it and the run that would tell, in the words of the trade. Used by `why`. */
import type { Cause, Explanation } from "../../calibration/index.ts";

/** One sign all along: "3.8 % less (2.9-4.6)"; across zero both ends say which way. */
function sized(size: NonNullable<Cause["size"]>, by: number, digits: number, unit: string, [more, less]: Ways): string {
  const show = (v: number) => Math.abs(by * v).toFixed(digits);
  const way = (v: number) => (v < 0 ? less : more);
  const { mean, low, high } = size;
  const space = unit === "" ? "" : " ";
  const amount = `${show(mean)}${space}${unit} ${way(mean)}`;
  const [near, far] = Math.abs(low) < Math.abs(high) ? [low, high] : [high, low];
  return low < 0 === high < 0
    ? `${amount} (${show(near)}-${show(far)})`
    : `${amount} (${show(low)} ${less} to ${show(high)} ${more})`;
}

type Ways = readonly [more: string, less: string];

/** What "ordinary" means at an onset: a clean always leaves a step behind. */
export const ordinaryWords = (onset: Explanation["onset"]["kind"]): string =>
  onset === "clean" ? "what a clean ordinarily leaves" : "scatter";

/** "as if silane delivered 3.8 % less (2.9-4.6)". `meaning` is the setting's built-in one. */
export function causeWords(cause: Cause, meaning: string | null, onset: Explanation["onset"]["kind"]): string {
  const { kind, setting, size, unit } = cause;
  if (kind === "ordinary") return `nothing but ${ordinaryWords(onset)}`;
  if (kind === "step" && onset === "service") return "as if the service had moved the chamber itself";
  if (kind === "step" || size === null) return "as if the chamber had stepped, as at a clean nobody wrote down";
  if (kind === "gauge index") return `as if the gauge read the index ${sized(size, 1, 3, "", ["high", "low"])}`;
  if (kind === "gauge thickness")
    return `as if the gauge read the thickness ${sized(size, 100, 1, "%", ["high", "low"])}`;
  if (kind === "leak") return `as if air leaked in: index ${sized(size, 1, 3, "", ["higher", "lower"])}`;
  if (unit === "degrees") return `as if ${setting} stood ${sized(size, 1, 0, "degC", ["higher", "lower"])}`;
  if (meaning === "time") return `as if ${setting} ran ${sized(size, 100, 1, "%", ["longer", "shorter"])}`;
  if (meaning === "belt_speed") return `as if the belt ran ${sized(size, 100, 1, "%", ["faster", "slower"])}`;
  if (meaning === "pressure") return `as if ${setting} stood ${sized(size, 100, 1, "%", ["higher", "lower"])}`;
  return `as if ${setting} delivered ${sized(size, 100, 1, "%", ["more", "less"])}`;
}

/** What a cause is called in a list: the setting, or "the gauge's index". */
export function causeName(
  { kind, setting }: Pick<Cause, "kind" | "setting">,
  onset: Explanation["onset"]["kind"] = "run",
): string {
  switch (kind) {
    case "setting":
      return setting ?? "a setting";
    case "gauge index":
      return "the gauge's index";
    case "gauge thickness":
      return "the gauge's thickness";
    case "leak":
      return "an air leak";
    case "step":
      return onset === "service" ? "the chamber moved by the service" : "an ordinary step";
    default:
      return ordinaryWords(onset);
  }
}

/** What would not show: "silane 2.1 % less to 0.9 % more". */
export function hiddenWords({ setting, size, unit }: Cause): string {
  if (size === null || setting === null) return "";
  const [by, digits, sign] = unit === "degrees" ? [1, 0, "degC"] : [100, 1, "%"];
  const end = (v: number) => `${v < 0 ? "-" : "+"}${Math.abs(by * v).toFixed(digits)}`;
  return `${setting} ${end(size.low)} to ${end(size.high)} ${sign}`;
}

export const joined = (names: readonly string[]) =>
  names.length < 2 ? names.join("") : `${names.slice(0, -1).join(", ")} and ${names.at(-1)}`;

/** "ammonia cannot explain the rate; time cannot explain the index": causes refused, those of one reason together. */
export function refusedWords(causes: readonly Cause[]): string[] {
  const by = new Map<string, string[]>();
  for (const cause of causes) {
    if (cause.cannotExplain.length === 0) continue;
    const what = joined(cause.cannotExplain.map((property) => `the ${property}`));
    by.set(what, [...(by.get(what) ?? []), causeName(cause)]);
  }
  return [...by].map(([what, names]) => `${joined(names)} cannot explain ${what}`);
}

/** The check at the tool that settles a cause (common practice, no source). Null where there is none but another run. */
export function checkFor(
  cause: Pick<Cause, "kind" | "setting">,
  meaning: string | null,
  onset: Explanation["onset"]["kind"] = "run",
): string | null {
  const { kind, setting } = cause;
  if (kind === "ordinary") return null;
  if (kind === "gauge index" || kind === "gauge thickness") return "measure the reference wafer";
  if (kind === "leak") return "close all valves and watch the pressure rise";
  if (kind === "step" && onset === "service") return "ask what the service changed inside the chamber";
  if (kind === "step") return "look for a clean, a part or a boat that was changed and not written down";
  switch (meaning) {
    case "silane":
    case "ammonia":
    case "nitrogen":
      return `check the ${setting} flow by its rate of rise in the closed chamber`;
    case "power":
      return `read forward and reflected ${setting} at the generator`;
    case "pressure":
      return `hold the ${setting} gauge against a second one`;
    case "time":
      return "time the plasma with a stopwatch, from light to dark";
    case "belt_speed":
      return "time the belt over a measured length";
    default:
      return `check ${setting} against a second instrument`;
  }
}
