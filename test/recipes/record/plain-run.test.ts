import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { checkData } from "../../../recipes/record/entry-schema.ts";
import { isPlainRun } from "../../../recipes/record/plain-run.ts";

const good = {
  chamber: "A2",
  recipe: "blue",
  settings_from: "given",
  steps: [{ settings: { silane: { value: 812, unit: "sccm" }, time: { value: 560, unit: "s" } } }],
  count: 1,
  readings: [{ gauge: "ellipsometer", on: "polished", index: 2.05, thickness_nm: 84.1 }],
};

/** What may stand where something else is expected. */
const odd = fc.oneof(
  fc.constantFrom(
    null,
    "",
    "x",
    0,
    -1,
    1.5,
    1e12,
    Number.NaN,
    Number.POSITIVE_INFINITY,
    true,
    [],
    {},
    "y".repeat(5000),
    { value: 1, unit: "s", more: 1 },
    [{ gauge: "g" }],
  ),
  fc.double(),
  fc.string(),
);

const keys = [
  "chamber",
  "recipe",
  "settings_from",
  "steps",
  "count",
  "since_clean",
  "kind",
  "boat",
  "position",
  "readings",
  "note",
  "imported_from",
  "site_values",
  "unknown",
];

/** The general schema alone: a run in a list of two steps always goes through it, so wrap to force it. */
const schemaSays = (data: Record<string, unknown>): boolean => {
  // A name on the step makes the quick check say "perhaps" without changing whether the data are valid.
  const steps = data["steps"];
  const named =
    Array.isArray(steps) &&
    steps.length === 1 &&
    typeof steps[0] === "object" &&
    steps[0] !== null &&
    !("name" in steps[0])
      ? [{ name: "layer", ...steps[0] }]
      : steps;
  return checkData("run", { ...data, steps: named }) === null;
};

describe("the quick yes for ordinary runs", () => {
  it("says yes to the ordinary run, with and without the optional members", () => {
    expect(isPlainRun(good)).toBe(true);
    expect(
      isPlainRun({
        ...good,
        since_clean: 3,
        kind: "tuning",
        boat: "7",
        note: "n",
        imported_from: { file: "h.csv", row: 3 },
      }),
    ).toBe(true);
    expect(isPlainRun({ ...good, readings: [] })).toBe(true);
  });

  it("never says yes where the schema says no", () => {
    fc.assert(
      fc.property(fc.constantFrom(...keys), odd, (key, value) => {
        const data = { ...good, [key]: value };
        if (isPlainRun(data)) expect(schemaSays(data), JSON.stringify(data).slice(0, 300)).toBe(true);
      }),
      { numRuns: 3000 },
    );
  });

  it("never says yes to a reading or a quantity the schema refuses", () => {
    const inReading = fc.constantFrom(
      "gauge",
      "on",
      "index",
      "thickness_nm",
      "weighted_reflectance_percent",
      "reflectance_minimum_nm",
      "sites",
      "spectrum",
      "unknown",
    );
    fc.assert(
      fc.property(inReading, odd, fc.constantFrom("value", "unit", "more"), odd, (a, x, b, y) => {
        const data = {
          ...good,
          steps: [{ settings: { silane: { value: 812, unit: "sccm", [b]: y } } }],
          readings: [{ ...good.readings[0], [a]: x }],
        };
        if (isPlainRun(data)) expect(schemaSays(data), JSON.stringify(data).slice(0, 300)).toBe(true);
      }),
      { numRuns: 3000 },
    );
  });
});
