/**
 * The advice of a proposal as people say it.
 */
import type { Advice, ProposalView } from "../../recipes/index.ts";

const phrases: Readonly<Record<Advice, string>> = {
  change: "change the settings",
  keep: "keep the settings",
  measure: "measure once more before any change",
  fault: "look for a fault first",
  out_of_reach: "the goal is out of reach inside the window",
};

const short: Readonly<Record<Advice, string>> = {
  change: "change the settings",
  keep: "keep the settings",
  measure: "measure once more",
  fault: "look for a fault",
  out_of_reach: "out of reach",
};

/** Whether it is the anchor that stops proposals, which is not a fault: its sentence begins with its name. */
export function mustLook(alarms: readonly string[]): boolean {
  return alarms.some((sentence) => sentence.startsWith("past_anchor"));
}

export function adviceInWords({ advice, alarms }: Pick<ProposalView, "advice" | "alarms">): string {
  return advice === "fault" && mustLook(alarms) ? "a person must look before more is corrected" : phrases[advice];
}

/** The same where there is one short line. */
export function adviceInBrief({ advice, alarms }: Pick<ProposalView, "advice" | "alarms">): string {
  return advice === "fault" && mustLook(alarms) ? "a person must look" : short[advice];
}
