/** When a chamber is usually cleaned: the depositions of its whole cycles, if people clean at regular counts. */
import type { TimelineEvent } from "../record/timeline.ts";

export interface CleanHabit {
  /** Median of the latest whole cycles, depositions. */
  usual: number;
  least: number;
  most: number;
  cycles: number;
  /** Depositions left to the usual count; negative when it is past. */
  left: number;
}

/** Whole cycles below which there is no habit, and the most that are looked at. */
const fewest = 3;
const latest = 8;
/** Cycles are regular when the middle half of them lies within this share of their median. */
const regular = 0.2;

/**
 * The habit of a chamber's timeline, null without one. Cycles are counted from clean to clean; what stands before the first
 * clean is part of a cycle nobody saw begin.
 */
export function cleanHabit(timeline: readonly TimelineEvent[]): CleanHabit | null {
  const cycles: number[] = [];
  let k = 0;
  let whole = false;
  for (const event of timeline) {
    if (event.kind === "clean") {
      if (whole && k > 0) cycles.push(k);
      whole = true;
      k = 0;
    } else if (event.kind === "precoat") k += event.count;
    else if (event.kind === "run") {
      const { since_clean: counted, count } = event.data;
      // The tool's own counter is believed before ours.
      k = counted === undefined ? k + count : Math.max(counted, 1);
    }
  }
  const seen = cycles.slice(-latest).sort((a, b) => a - b);
  if (seen.length < fewest) return null;
  const at = (share: number) => {
    const x = share * (seen.length - 1);
    const i = Math.floor(x);
    return seen[i] + (x - i) * ((seen[i + 1] ?? seen[i]) - seen[i]);
  };
  const usual = Math.round(at(0.5));
  if (at(0.75) - at(0.25) > regular * usual) return null;
  return { usual, least: seen[0], most: seen[seen.length - 1], cycles: seen.length, left: usual - k };
}
