/**
 * Sources of scatter in the NIST/SEMATECH e-Handbook of Statistical Methods (https://doi.org/10.18434/M32189, U.S. Government
 * work): the furnace of section 3.5.1.4 (runs, zones, wafers) and the resistivity gauges of sections 2.4.4.4 and 2.6.1
 * (probes, wafers, runs, days, repetitions). Data: test/fixtures/handbook.
 */
import { describe, expect, it } from "vitest";
import { nestedVariance, pooledSd } from "../../engine/index.ts";
import { expectAllClose, expectClose } from "../support/close.ts";
import { readTable } from "../support/table.ts";

describe("section 3.5.1.4: oxide of 21 runs of 4 zones of 2 wafers", () => {
  const table = readTable("handbook/furnace-oxide-thickness.csv");
  const [run, zone, within] = nestedVariance(table.numbers("thickness_angstrom"), [21, 4, 2]);

  it("is a table in the order the analysis expects: wafers within zones within runs", () => {
    const order = table.numbers("run").map((r, i) => [r, table.numbers("zone")[i], table.numbers("wafer")[i]]);
    expect(order).toEqual(Array.from({ length: 168 }, (_, i) => [1 + (i >> 3), 1 + ((i >> 1) & 3), 1 + (i & 1)]));
  });

  it("has the printed analysis of variance", () => {
    expect([run.degrees, zone.degrees, within.degrees]).toEqual([20, 63, 84]);
    expectClose(run.sumOfSquares, 61442.29, { absolute: 0.006, because: "printed to two decimals" });
    expectClose(zone.sumOfSquares, 36014.5, { absolute: 0.051, because: "printed to one decimal" });
    expectClose(within.sumOfSquares, 10155, { absolute: 0.51, because: "printed without decimals" });
    expectClose(run.meanSquare, 3072.11, { absolute: 0.0051, because: "printed to two decimals" });
    expectClose(zone.meanSquare, 571.659, { absolute: 0.00051, because: "printed to three decimals" });
    expectClose(within.meanSquare, 120.893, { absolute: 0.00051, because: "printed to three decimals" });
    expectClose(run.f ?? 0, 5.37404, { absolute: 0.51e-5, because: "printed to five decimals" });
    expectClose(zone.f ?? 0, 4.72864, { absolute: 0.51e-5, because: "printed to five decimals" });
    expectClose(run.p ?? 1, 1e-7, { relative: 0.5, because: "printed to one digit" });
    expectClose(zone.p ?? 1, 3.85e-11, { relative: 0.002, because: "printed to three digits" });
  });

  it("has the printed components of variance, 47, 34 and 18 % of the whole", () => {
    const components = [run, zone, within].map(({ variance }) => variance);
    const printed = { absolute: 0.51e-5, because: "printed to five decimals" };
    expectAllClose(components, [312.55694, 225.38294, 120.89286], printed);
    const total = components.reduce((sum, v) => sum + v, 0);
    const percents = components.map((v) => (100 * v) / total);
    expectAllClose(percents, [47.44, 34.21, 18.35], { absolute: 0.0051, because: "printed to two decimals" });
    expectAllClose(components.map(Math.sqrt), [17.679, 15.013, 10.995], {
      absolute: 0.00051,
      because: "three decimals",
    });
  });
});

describe("section 2.4.4.4: repeatability of one probe pooled over five wafers", () => {
  it("is 0.1029 ohm cm on 300 degrees of freedom", () => {
    const sums = [0.48115, 0.69209, 0.48483, 1.21752, 0.30076];
    const pooled = pooledSd(sums.map((sumOfSquares) => ({ sumOfSquares, degrees: 60 })));
    expectClose(pooled, 0.1029, { absolute: 0.51e-4, because: "printed to four decimals" });
  });
});

describe("section 2.6.1: five probes on five wafers, two runs of six days", () => {
  const table = readTable("handbook/resistivity-gauge-study.csv");
  const columns = ["run", "wafer", "probe", "average_ohm_cm", "stddev_ohm_cm"].map((name) => table.numbers(name));
  const rows = Array.from({ length: table.rows }, (_, i) => columns.map((column) => column[i]));
  const unique = (at: number) => [...new Set(columns[at])];

  // Reference: the same definitions in exact order with numpy, from the 300 rows of the study.
  const expected: [number, number, number, number][] = [
    [1, 0.0921010640547, 0.0473286498857, 0.0281998556931],
    [281, 0.110748401794, 0.0442848194456, 0.0323466763706],
    [283, 0.0922126880279, 0.0456944668423, 0.0393495125623],
    [2062, 0.151999755482, 0.0575180600623, 0.0733401911566],
    [2362, 0.0728667253736, 0.0361682406724, 0.0196452362051],
  ];
  it.each(expected)(
    "probe %i: repetitions, days and runs scatter as the reference says",
    (probe, level1, level2, level3) => {
      const own = unique(1).flatMap((wafer) =>
        unique(0).flatMap((run) => rows.filter((row) => row[0] === run && row[1] === wafer && row[2] === probe)),
      );
      expect(own.length).toBe(60);
      const close = { relative: 1e-11, because: "the reference is given to twelve digits" };
      // Each row is an average of six repetitions with its standard deviation.
      const repetitions = own.map((row) => ({ sumOfSquares: 5 * row[4] ** 2, degrees: 5 }));
      expectClose(pooledSd(repetitions), level1, close);
      const [, run, day] = nestedVariance(
        own.map((row) => row[3]),
        [5, 2, 6],
      );
      expectClose(Math.sqrt(day.meanSquare), level2, close);
      // The scatter of averages of six days.
      expectClose(Math.sqrt(run.meanSquare / 6), level3, close);
    },
  );
});
