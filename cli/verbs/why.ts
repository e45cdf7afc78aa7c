/**
 * The verb `why`: which single cause would explain what a chamber misses. Its `--json` document:
 *
 *   chamber
 *   onset         {entry, kind: clean | service | change | run, stated, probability}; stated: by --since
 *   runs[]        {entry, index, thickness_nm, expected: {index: {mean, low, high}, thickness_nm: {..}}, suspect}
 *                 the measured runs since the onset beside what the chamber, as known before it, would have read (95 %)
 *   miss          {index: {mean, sd}, thickness_percent: {mean, sd}}; sd: what the mean miss would scatter by anyway
 *   verdict       named | nothing | cannot_separate
 *   says          the answer in a sentence
 *   causes[]      likeliest first: {kind: setting | gauge_index | gauge_thickness | leak | step | ordinary, setting,
 *                 probability, as_if: {mean, low, high, unit: % | degC | index} or null, cannot_explain[]: index | rate,
 *                 likely, says}; likely: the one named, or one of those not told apart
 *   refused[]     causes and what they cannot explain, in words
 *   would_tell[]  checks and runs that would tell, in words
 *   telling_run   {set, removes} or null; set: settings to change from the latest run (none: repeat it), removes: the
 *                 share of the doubt that the run is expected to remove
 */
import { why } from "../../recipes/index.ts";
import { whyText } from "../text/why.ts";
import { flag, type Verb, word } from "./verb.ts";

export const whyVerbs: Verb[] = [
  {
    name: "why",
    does: "the misses restated as the single causes that would explain them, or what cannot be told apart",
    words: [word("chamber", "the chamber")],
    flags: [
      flag(
        "since",
        "ENTRY",
        "where it began: an entry's number, or a change that was entered; the likeliest if left out",
      ),
    ],
    examples: ["coatwright why A2", "coatwright why A2 --since 118"],
    writes: false,
    run: (call) => {
      const ws = call.workspace();
      const { name } = ws.chamber(call.args.need("chamber"));
      const found = why(ws, name, call.args.text("since"));
      return { document: found.document, text: whyText(name, found) };
    },
  },
];
