/**
 * A gauge that lies does so for every chamber it reads. What the sisters read since the onset is weighed with the gauge's
 * error taken off, against what was read as it stands: a sister that reads as before speaks for the gauge.
 */
import { nodesBefore, type Onset, ordinary, type Suspect, sceneOf, tell } from "./cause-evidence.ts";
import type { ChamberModel } from "./chamber-model.ts";

/** Measured runs of a sister that are heard. */
const heard = 6;

/** ln of how much likelier a gauge error e makes the sisters' readings since entry `since`; 0 for every other cause. */
export function gaugeElsewhere(
  sisters: readonly ChamberModel[],
  since: number,
): (suspect: Suspect, e: number) => number {
  const witnesses = sisters.flatMap((model) => {
    const { events } = model.log;
    const at = events.findIndex((event) => event.kind === "run" && event.entry > since);
    if (at < 0) return [];
    const scene = sceneOf(model);
    const [ready] = nodesBefore(scene, at);
    if (!ready) return [];
    let runs = 0;
    const end = events.findIndex((event, i) => i >= at && event.kind === "run" && ++runs === heard);
    const to = end < 0 ? events.length : end + 1;
    const onset: Onset = { at, kind: "run", entry: events[at].entry, prior: 1 };
    return [{ scene, ready, onset, to, plain: tell(scene, ready, onset, ordinary, { to }).logDensity }];
  });
  return (suspect, e) => {
    if (suspect.kind !== "gauge index" && suspect.kind !== "gauge thickness") return 0;
    let sum = 0;
    for (const { scene, ready, onset, to, plain } of witnesses)
      sum += tell(scene, ready, onset, { suspect, e, restart: false }, { to }).logDensity - plain;
    return sum;
  };
}
