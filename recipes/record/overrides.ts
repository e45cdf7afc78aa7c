/**
 * A person overrules one named alarm in one chamber, with evidence, for a number of runs: over when these are made, or at
 * the next clean.
 */
import type { Entry } from "./entries.ts";
import type { Ledger } from "./ledger.ts";

export interface Override {
  seq: number;
  at: string;
  atMs: number;
  by: string;
  chamber: string;
  alarm: string;
  /** Depositions it holds for. */
  runs: number;
  /** The evidence given. */
  text: string;
}

/** Takes a note's override into the ledger. */
export function addOverride(
  ledger: Ledger,
  entry: Entry<"note">,
  override: { alarm: string; runs: number; chamber: string },
): void {
  const { seq, at, by, data } = entry;
  ledger.overrides.push({ seq, at, atMs: Date.parse(at), by, text: data.text, ...override });
}

/** Depositions left to an override at `atMs`; 0 when it is over or not yet made. */
export function runsLeft(ledger: Ledger, override: Override, atMs: number): number {
  if (override.atMs > atMs) return 0;
  let left = override.runs;
  for (const event of ledger.chambers.get(override.chamber)?.timeline ?? []) {
    const since = event.atMs > override.atMs || (event.atMs === override.atMs && event.seq > override.seq);
    if (!since || event.atMs > atMs) continue;
    if (event.kind === "clean") return 0;
    if (event.kind === "run") left -= event.data.count;
  }
  return Math.max(0, left);
}

/** Overrides still holding in a chamber at `atMs` (ms since 1970). */
export function overridesInForce(ledger: Ledger, chamber: string, atMs: number): Override[] {
  return ledger.overrides.filter((one) => one.chamber === chamber && runsLeft(ledger, one, atMs) > 0);
}
