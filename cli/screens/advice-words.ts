/**
 * The advice of a proposal as people say it.
 */
import type { Advice } from "../../recipes/index.ts";

const phrases: Readonly<Record<Advice, string>> = {
  change: "change the settings",
  keep: "keep the settings",
  measure: "measure once more before any change",
  fault: "look for a fault first",
  out_of_reach: "the goal is out of reach inside the window",
};

export function adviceInWords(advice: Advice): string {
  return phrases[advice];
}
