/** Names of all alarms, and what to check first for each, in order. Checks are common practice, no source. */

/** Every alarm there is. The names are stable: overrides in the book are given for them. */
export const alarmNames = [
  "all_moved",
  "index_low",
  "index_high",
  "rate_low",
  "rate_high",
  "slow_shift",
  "unit_slip",
  "swapped_rows",
  "wrong_wafer",
  "past_anchor",
] as const;

export type AlarmName = (typeof alarmNames)[number];

const rateChecks = (which: "low" | "high"): string[] => [
  `Check the generator: delivered power against the setting, reflected power, the match; a plasma that catches ${which === "low" ? "late or only on part of the boat" : "early"}.`,
  "Check the pressure gauge against its zero and a second gauge, and the throttle valve.",
  "Check the time base: steps of the recipe as run, a step cut short, repeated or changed at the tool.",
  "Was the witness in its usual boat and position, and the boat the usual one?",
  "Check the silane controller against a second flow reading, above all if the index moved as well (`coatwright why CHAMBER` weighs the single causes).",
  `Measure the reference wafer: a gauge that reads ${which === "low" ? "thin" : "thick"} looks the same.`,
];

/** What to check first, in order. `CHAMBER` and `GAUGE` stand for the names. */
export const firstChecks: Readonly<Record<Exclude<AlarmName, "unit_slip" | "swapped_rows" | "wrong_wafer">, string[]>> =
  {
    index_low: [
      "Check for an air leak: rate-of-rise of the chamber with the gas valves shut.",
      "Was the boat or carrier wet, or the chamber opened long? Run a dry precoat and measure again.",
      "Check the ammonia controller against its zero and a second flow reading (about 28 % too much would do this).",
      "Measure the reference wafer: a gauge that reads low looks the same.",
    ],
    index_high: [
      "Check the ammonia supply: cylinder pressure, regulator, a valve left partly shut.",
      "Check the ammonia controller against its zero and a second flow reading.",
      "Check the silane controller for over-delivery.",
      "Measure the reference wafer: a gauge that reads high looks the same.",
    ],
    rate_low: rateChecks("low"),
    rate_high: rateChecks("high"),
    all_moved: [
      "Measure the reference wafer and put it in the book: coatwright record gauge --gauge GAUGE --reference --index .. --thickness ..",
      "Was the gauge serviced, its lamp, model or recipe changed?",
      "Check the gas supply the chambers share: a cylinder or bundle changed, its pressure and purity, the regulator.",
      "Check what else they share: mains power, cooling water, exhaust, the boats or carriers.",
      "Leave the chambers' recipes alone until this is known.",
    ],
    slow_shift: [
      "Is a clean, a service or a controller swap missing in the book?",
      "Look for a slow leak (rate-of-rise) where the index creeps, for a creeping flow controller, pressure gauge or generator where the thickness does.",
      "Measure the reference wafer: a gauge that creeps looks the same.",
    ],
    past_anchor: [
      "Look for a slow leak, a drifting controller or a drifting gauge.",
      "On a ramp, or when the film is right as it is, qualify the recipe anew and state it with `record recipe`: corrections add up from there.",
    ],
  };
