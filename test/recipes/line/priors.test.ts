/** `priors:` in line.yaml: what may be written, what each mistake is told as, and that the model really takes it. */
import { describe, expect, it } from "vitest";
import { LineModel, priorsWith, standardPriors } from "../../../calibration/index.ts";
import { chamberLogs, learnOptions, referenceRecipe } from "../../../recipes/desk/learn.ts";
import { blankLine } from "../../../recipes/line/template.ts";
import { emptyLedger } from "../../../recipes/record/ledger.ts";
import { lineWith, onGoal, stepsFor } from "../../support/desk-line.ts";
import { Bench } from "../../support/ledger-bench.ts";
import { EXAMPLE, lineOf, problemsOf } from "./given.ts";

/** The example with a `priors:` part appended; its first row is the one after the example's last. */
const rows = EXAMPLE.trimEnd().split("\n").length;
const withPriors = (text: string): string => `${EXAMPLE.trimEnd()}\npriors:\n${text}\n`;
const priorsOf = (text: string) => lineOf(withPriors(text)).priors;

describe("priors of a line's own", () => {
  it("are read as written in the contract of this file", () => {
    expect(
      priorsOf(
        [
          "  index: { ratio: -0.20 sd 0.05, silane: { fleet: 0 sd 0.02, chambers: 0.01 }, ratio_squared: sd 0.02 }",
          "  rate: { silane: 0.75 sd 0.08, dead_time: 4 sd 2, offset: { fleet: sd 0.1, chambers: 0.03 } }",
          "  scatter: { process: { index: 0.004, thickness: 0.6 % }, step_at_clean: { rate: 2 % }, walk: { index: 0.001 } }",
        ].join("\n"),
      ),
    ).toEqual({
      index: {
        ratio: { mean: -0.2, sd: 0.05 },
        silane: { mean: 0, sd: 0.02, spread: 0.01 },
        ratioSquared: { sd: 0.02 },
      },
      rate: { silane: { mean: 0.75, sd: 0.08 }, deadTime: { mean: 4, sd: 2 }, offset: { sd: 0.1, spread: 0.03 } },
      scatter: {
        process: [0.004, 0.006],
        step: [standardPriors.scatter.step[0], 0.02],
        walk: [0.001, standardPriors.scatter.walk[1]],
      },
    });
  });

  it("of time may have any unit of time", () => {
    expect(priorsOf("  rate: { dead_time: 4000 ms sd 2 s }")).toEqual({ rate: { deadTime: { mean: 4, sd: 2 } } });
  });

  it("are absent where the file says nothing, and every standard prior stands then", () => {
    expect(lineOf().priors).toBe(undefined);
    expect(priorsWith(lineOf().priors)).toEqual(standardPriors);
  });

  it("every name of the model's table can be written, but those no term uses", () => {
    const snake = (name: string) => name.replace(/[A-Z]/g, (c) => `_${c.toLowerCase()}`);
    for (const part of ["index", "rate"] as const)
      for (const key of Object.keys(standardPriors[part]).filter((name) => name !== "belt"))
        expect(priorsOf(`  ${part}: { ${snake(key)}: sd 0.5 }`)).toEqual({ [part]: { [key]: { sd: 0.5 } } });
  });

  it.each([
    ["  index: { ratoi: -0.2 sd 0.05 }", "unknown-key", 12, "did you mean ratio?"],
    ["  indx: { ratio: -0.2 sd 0.05 }", "unknown-key", 3, "did you mean index?"],
    ["  ratio: -0.2 sd 0.05", "unknown-key", 3, "index: { ratio: ... } or rate: { ratio: ... }"],
    ["  walk: { index: 0.001 }", "unknown-key", 3, "scatter: { walk: ... }"],
    ["  index: { dead_time: 3 sd 1 }", "unknown-key", 12, "write it under rate:"],
    ["  index: { belt: 0 sd 0.1 }", "unknown-key", 12, ""],
    ["  index: { ratio: -0.2 }", "not-a-mean-and-sd", 19, "sd"],
    ["  index: { ratio: -0.2 sd 0 }", "zero-sd", 19, ""],
    ["  index: { ratio: -0,2 sd 0.05 }", "decimal-comma", 19, ""],
    ["  index: { ratio: -0.2 \u00b1 0.05 }", "plus-minus", 19, "sd"],
    ["  index: { ratio: -20 sd 0.05 }", "out-of-bounds", 19, ""],
    ["  index: { ratio: -0.2 nm sd 0.05 }", "wrong-unit", 19, ""],
    ["  index: { offset: 2.05 sd 0.05 }", "no-mean-here", 20, "write sd 0.05"],
    ["  index: { silane: { fleet: 0 sd 0.02, chamber: 0.01 } }", "unknown-key", 40, "did you mean chambers?"],
    ["  index: { silane: { chambers: 0 } }", "out-of-bounds", 32, ""],
    ["  index: { silane: {} }", "empty-prior", 20, "chambers"],
    ["  index: { silane: [0, 0.02] }", "wrong-type", 20, "fleet"],
    ["  rate: { dead_time: 4 sccm sd 2 }", "wrong-unit", 22, ""],
    ["  scatter: { proces: { index: 0.004 } }", "unknown-key", 14, "did you mean process?"],
    ["  scatter: { process: { index: 0.004, rate: 1 % } }", "unknown-key", 39, "thickness"],
    ["  scatter: { process: { thickness: 0.006 } }", "missing-unit", 36, "%"],
    ["  scatter: { process: { thickness: 0.5 nm } }", "wrong-unit", 36, ""],
    ["  scatter: { process: {} }", "empty-prior", 23, "as in process"],
    ["  scatter: { process: { index: 0 } }", "out-of-bounds", 32, ""],
  ])("%s is refused as %s at column %i", (text, code, column, hint) => {
    const problems = problemsOf(() => lineOf(withPriors(text)));
    expect(problems.map((p) => `${p.code} ${p.row}:${p.column}`)).toEqual([`${code} ${rows + 2}:${column}`]);
    expect(problems[0].hint ?? "").toContain(hint);
  });

  it("each mistake is a problem of its own", () => {
    const text = "  index: { ratoi: 1 sd 1, ratio: 2 }\n  scatter: { walk: { index: x } }";
    expect(problemsOf(() => lineOf(withPriors(text))).map(({ code, row }) => `${code} ${row}`)).toEqual([
      `unknown-key ${rows + 2}`,
      `not-a-mean-and-sd ${rows + 2}`,
      `not-a-number ${rows + 3}`,
    ]);
  });

  it("are said beside the standard ones by check", () => {
    const { implications } = lineOf(
      withPriors("  index: { ratio: -0.20 sd 0.05 }\n  scatter: { process: { thickness: 0.6 % } }"),
    );
    expect(implications.at(-1)).toBe(
      "Priors of this line's own: index ratio -0.2 sd 0.05, chambers 0.03 (standard -0.22 sd 0.07, chambers 0.03); scatter of process 0.003 and 0.6 % of thickness (standard 0.003 and 0.5 % of thickness).",
    );
  });

  it("stand in the commented line file that `new` writes, and read when the comment is taken off", () => {
    const text = blankLine("x", "UTC").replace("# priors:", "priors:");
    expect(lineOf(text).priors).toEqual({
      index: { ratio: { mean: -0.2, sd: 0.05 } },
      scatter: { process: [0.004, 0.006] },
    });
  });

  it("reach the model: its slope before any reading is the one stated", () => {
    const stated = lineWith({ "chambers:\n": "priors: { index: { ratio: -0.31 sd 0.02 } }\nchambers:\n" }).line;
    for (const [line, mean] of [
      [stated, -0.31],
      [lineWith().line, standardPriors.index.ratio.mean],
    ] as const) {
      const bench = new Bench();
      bench.add({ kind: "recipe", data: { chamber: "A2", recipe: "blue", steps: stepsFor(onGoal) } });
      const reference = referenceRecipe(line, bench.ledger);
      if (!reference) throw new Error("a recipe was stated");
      const model = new LineModel(chamberLogs(line, emptyLedger()), learnOptions(line, reference, null)).chamber("A2");
      const ratio = model.coefficients().find(({ term }) => term.name === "ratio" && term.output === "index");
      expect(ratio?.mean).toBe(mean);
    }
  });
});

describe("the reference wafer of a gauge", () => {
  const gauge = (more: string) => EXAMPLE.replace("thickness: 0.4 nm,", `thickness: 0.4 nm, ${more},`);
  it("has certified values, whose tolerance is two standard deviations", () => {
    const line = lineOf(gauge("reference: { index: 2.045 within 0.002, thickness: 85.0 nm }, correlation: -0.9"));
    expect(line.gauges.get("ellipsometer")).toMatchObject({
      correlation: -0.9,
      reference: { index: { value: 2.045, sd: 0.001 }, thicknessNm: { value: 85, sd: 0 } },
    });
  });

  it.each([
    ["reference: { index: 20.45 }", "out-of-bounds"],
    ["reference: { thickness: 85 }", "missing-unit"],
    ["reference: { indx: 2.045 }", "unknown-key"],
    ["reference: {}", "empty-reference"],
    ["correlation: 1", "out-of-bounds"],
  ])("%s is refused as %s", (more, code) => {
    expect(problemsOf(() => lineOf(gauge(more)))[0].code).toBe(code);
  });

  it("is of a gauge that reads film", () => {
    const text = EXAMPLE.replace(
      "reflectance_minimum: 1.5 nm,",
      "reflectance_minimum: 1.5 nm, reference: { index: 2 },",
    );
    expect(problemsOf(() => lineOf(text)).map(({ code }) => code)).toEqual(["gauge-reads-nothing"]);
  });
});
