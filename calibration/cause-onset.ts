/**
 * Where the misses may have begun: the last clean or service, a change typed in at the tool, or one of the latest runs; or
 * where a person says.
 */
import { refuse } from "../engine/index.ts";
import type { Onset } from "./cause-evidence.ts";
import type { ChamberModel } from "./chamber-model.ts";
import { causePriors } from "./priors.ts";

/** Each of the latest measured runs is tried as an onset, then every second one up to the longest memory. */
const lateOnsets = 6;
const longestMemory = 15;

/** Where the misses may have begun. Refuses `no-run-since`, `no-reading`. */
export function onsetsOf(
  model: ChamberModel,
  { changes = [], since }: { changes?: readonly number[]; since?: number },
): Onset[] {
  const { events } = model.log;
  if (model.runs.length === 0) refuse("no-reading", `${model.chamber} has no measured run yet`);
  const isRun = (at: number) => events[at].kind === "run";
  const runsFrom = (at: number) => events.slice(at).filter((e) => e.kind === "run").length;
  if (since !== undefined) {
    const exact = events.findIndex((e) => e.entry === since);
    const at = exact >= 0 ? exact : events.findIndex((e) => e.entry > since);
    if (at < 0 || runsFrom(at) === 0)
      refuse("no-run-since", `${model.chamber} has no measured run since entry ${since}`, {
        hint: `its latest measured run is entry ${model.runs[model.runs.length - 1].entry}`,
      });
    const { kind, entry } = events[at];
    const what = kind === "clean" || kind === "service" ? kind : exact >= 0 ? "run" : "change";
    return [{ at, kind: what, entry: what === "change" ? since : entry, prior: 1 }];
  }
  const last = events[events.length - 1];
  if (last.kind === "clean" || last.kind === "service")
    refuse("no-run-since", `${model.chamber} has no measured run since its ${last.kind}, entry ${last.entry}`, {
      hint: "record one, or say with --since from where on to look",
    });
  const out: Onset[] = [];
  let runs = 0;
  for (let at = events.length - 1; at >= 0 && runs < longestMemory; at--) {
    const { kind, entry } = events[at];
    if (kind === "clean" || kind === "service") {
      if (runs > 0) out.push({ at, kind, entry, prior: causePriors.onsetEvent });
      break;
    }
    if (!isRun(at)) continue;
    runs++;
    const before = model.runs[model.runs.length - runs - 1]?.entry ?? -1;
    const change = changes.findLast((c) => c < entry && c > before);
    if (change !== undefined) out.push({ at, kind: "change", entry: change, prior: causePriors.onsetEvent });
    else if (runs <= lateOnsets || runs % 2 === 0) out.push({ at, kind: "run", entry, prior: causePriors.onsetRun });
  }
  return out.reverse();
}
