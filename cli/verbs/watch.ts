/** The verb `watch`: drift, forecasts and alarms over all chambers. */
import { watch, watchDocument } from "../../recipes/index.ts";
import { watchText } from "../text/watch.ts";
import type { Verb } from "./verb.ts";

export const watchVerbs: Verb[] = [
  {
    name: "watch",
    does: "drift, forecasts, what is due and alarms over all chambers, the most urgent first",
    words: [],
    flags: [],
    examples: ["coatwright watch"],
    writes: false,
    run: (call) => {
      const ws = call.workspace();
      const watched = watch(ws);
      return { document: watchDocument(ws.line.name, watched), text: watchText(watched) };
    },
  },
];
