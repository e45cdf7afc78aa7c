/** Every scenario of the study, in the order they are told. What `run.mjs` and its workers load. */
import type { Scenario } from "./scenario.ts";
import { leakScenarios } from "./scenarios/leak.ts";
import { newChamberScenarios } from "./scenarios/new-chamber.ts";
import { oneStepScenarios } from "./scenarios/one-step.ts";
import { outlierScenarios } from "./scenarios/outliers.ts";

export { inWords } from "./in-words.ts";
export { checkWays, played, seedsOf, WAYS_MAY_DIFFER } from "./scenario.ts";

export const scenarios: readonly Scenario[] = [
  ...oneStepScenarios,
  ...newChamberScenarios,
  ...outlierScenarios,
  ...leakScenarios,
];

/** The scenario of that name; throws where there is none. */
export function scenarioNamed(name: string): Scenario {
  const found = scenarios.find((s) => s.name === name);
  if (!found) throw new Error(`no scenario ${name}; there are ${scenarios.map((s) => s.name).join(", ")}`);
  return found;
}
