/** Suspected faults in words: the evidence, and what to check first, in order. Checks are common practice, no source. */
import type { Suspicion } from "../../calibration/index.ts";
import { asPercent } from "./reasons.ts";

export interface Alarm {
  /** The name an override is given for. */
  name: string;
  /** True when it must stop proposals; false when one more reading should decide. */
  certain: boolean;
  sentence: string;
  checks: string[];
}

const first: Record<Suspicion["name"], string[]> = {
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
};

/** From this posterior probability on a suspicion stops proposals; from the lower one a further reading is asked for. */
const stopAt = 0.9;
const askAt = 0.3;

export function alarmsFrom(found: readonly Suspicion[], overridden: ReadonlySet<string>): Alarm[] {
  return found
    .filter((s) => s.probability >= askAt && !overridden.has(s.name))
    .map((s) => {
      const since =
        s.onsetKind === "run" ? `since entry ${s.onsetEntry}` : `since the ${s.onsetKind} (entry ${s.onsetEntry})`;
      const by = `${Math.abs(s.indexMiss).toFixed(3)} ${s.indexMiss < 0 ? "below" : "above"} what was expected`;
      return {
        name: s.name,
        certain: s.probability >= stopAt,
        sentence: `${s.name}: index ${by} ${since} (${s.runsSince} measured run${s.runsSince === 1 ? "" : "s"}), more than cleans do, with the rate as usual: ${asPercent(s.probability)} a fault rather than an offset.`,
        checks: first[s.name],
      };
    });
}
