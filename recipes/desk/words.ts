/** Goals and light in words, for documents and headings. */
import type { Goal, Line } from "../line/line.ts";

export function goalWords(goal: Goal): Record<string, string> {
  const out: Record<string, string> = {};
  if (goal.index) out["index"] = `${goal.index.value} within ${goal.index.within}`;
  if (goal.thicknessNm) out["thickness"] = `${goal.thicknessNm.value} nm within ${goal.thicknessNm.within} nm`;
  if (goal.weightedReflectancePercent)
    out["weighted_reflectance"] = `at most ${goal.weightedReflectancePercent.atMost} %`;
  if (goal.reflectanceMinimumNm)
    out["reflectance_minimum"] = `${goal.reflectanceMinimumNm.value} nm within ${goal.reflectanceMinimumNm.within} nm`;
  return out;
}

/** "index 2.06 within 0.02, thickness 88 nm within 2 nm" */
export function goalText(goal: Goal): string {
  return Object.entries(goalWords(goal))
    .map(([name, words]) => `${name.replace("_", " ")} ${words}`)
    .join(", ");
}

/** The definition printed with every weighted number: "photons, 300-1100 nm". */
export function lightText(line: Line): string {
  const { weight, fromNm, toNm } = line.light;
  return `${typeof weight === "string" ? weight : `photons x ${weight.file}`}, ${fromNm}-${toNm} nm`;
}
