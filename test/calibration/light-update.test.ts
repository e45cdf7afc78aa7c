/**
 * Runs of which only the light was read, against weighing a cloud of drawn states by the same readings: the plain answer to
 * what a reading teaches, whatever its shape.
 */
import { describe, expect, test } from "vitest";
import { lightLink } from "../../calibration/light-link.ts";
import { readLight } from "../../calibration/light-update.ts";
import type { PreparedRun } from "../../calibration/prepare.ts";
import { opticsFloor, strayLight } from "../../calibration/priors.ts";
import type { LightReading } from "../../calibration/run.ts";
import { copyState, covariance, diagonalState, dot, type State } from "../../calibration/square-root.ts";
import { normalPdf, random } from "../../engine/index.ts";
import { expectAllClose, expectClose } from "../support/close.ts";

/** Optics of a kind: light knows index times thickness. Flat at 158 nm of optical thickness, two-valued about it. */
const weightedOf = (index: number, facetNm: number) => 1.9 + ((index * facetNm - 158) / 12) ** 2;
const minimumOf = (index: number, facetNm: number) => 3.9 * index * facetNm;
const facet = { mean: 0.85, sd: 0.03, runs: 0, doubted: [] };
const link = lightLink(minimumOf, weightedOf, facet);
const process = [0.003 ** 2, 0.005 ** 2] as const;

/** Index offset and slope, rate offset, then the two steps. */
const start = (): State => diagonalState([2.06, 0.01, 0.02, 0, 0], [0.02, 0.01, 0.05, 0.006, 0.015]);
const hIndex = Float64Array.of(1, 0.4, 0, 1, 0);
const hRate = Float64Array.of(0, 0, 1, 0, 1);
const known = Math.log(88);

function run(light: LightReading[]): PreparedRun {
  return {
    kind: "run",
    entry: 1,
    settings: new Map(),
    count: 1,
    k: 3,
    hIndex,
    hRate,
    seen: null,
    yIndex: Number.NaN,
    yRate: Number.NaN,
    known,
    gauge: [0, 0, 0],
    light,
  };
}
const weighted = (value: number): LightReading => ({ kind: "weighted_reflectance_percent", value, sd: 0.1 });
const minimum = (value: number): LightReading => ({ kind: "reflectance_minimum_nm", value, sd: 1.5 });

/** Mean and variances of the state, and the density of the readings, from a weighed cloud. */
function cloud(readings: readonly LightReading[]) {
  const prior = start();
  const draw = random("cloud");
  const count = 200_000;
  const sums = new Float64Array(5);
  const squares = new Float64Array(5);
  let total = 0;
  for (let i = 0; i < count; i++) {
    const z = prior.mean.map((mean, j) => mean + prior.factor[j * 5 + j] * draw.normal());
    const index = dot(hIndex, z) + Math.sqrt(process[0]) * draw.normal();
    const facetNm =
      Math.exp(dot(hRate, z) + known + Math.sqrt(process[1]) * draw.normal()) *
      facet.mean *
      Math.exp((facet.sd / facet.mean) * draw.normal());
    let weight = 1;
    for (const { kind, value, sd } of readings) {
      const isMinimum = kind === "reflectance_minimum_nm";
      const width = Math.hypot(sd, isMinimum ? opticsFloor.minimumNm : opticsFloor.weightedPercent);
      const off = value - (isMinimum ? minimumOf : weightedOf)(index, facetNm);
      const fits = normalPdf(off / width) / width;
      // The minimum is linearised without a stray share.
      weight *= isMinimum ? fits : (1 - strayLight.chance) * fits + strayLight.chance / strayLight.weightedPercent;
    }
    total += weight;
    for (let j = 0; j < 5; j++) {
      sums[j] += weight * z[j];
      squares[j] += weight * z[j] * z[j];
    }
  }
  const mean = sums.map((sum) => sum / total);
  return { mean, sd: squares.map((s, j) => Math.sqrt(s / total - mean[j] ** 2)), density: total / count };
}

const sdsOf = (state: State) => Float64Array.from({ length: 5 }, (_, j) => Math.sqrt(covariance(state)[j * 6]));

describe("a run of which only the light was read", () => {
  test.each([
    ["a weighted reflectance on one side of the flat", [weighted(2.6)]],
    ["a weighted reflectance at the flat, where both sides are as likely", [weighted(1.9)]],
    ["a weighted reflectance no film gives", [weighted(0.9)]],
    ["a minimum", [minimum(640)]],
    ["a minimum and a weighted reflectance", [minimum(640), weighted(2.6)]],
  ])("%s teaches what a weighed cloud of states says", (_, readings) => {
    const state = start();
    const density = readLight(state, run(readings), link, process);
    const plain = cloud(readings);
    const sds = sdsOf(state);
    const prior = sdsOf(start());
    // A minimum is linearised where the cloud is not, and light that knows the facet factor less well is not Gaussian.
    const because = "sampling of the cloud (0.3 %) and the film's law brought back to a Gaussian, in prior sd";
    for (let j = 0; j < 5; j++) {
      expectClose((state.mean[j] - plain.mean[j]) / prior[j], 0, { absolute: 0.04, because });
      expectClose(sds[j] / plain.sd[j], 1, { absolute: 0.03, because });
    }
    expectClose(Math.exp(density) / plain.density, 1, { absolute: 0.05, because });
  });

  test("never yields an index: light on a texture knows index times thickness", () => {
    const state = start();
    for (let i = 0; i < 40; i++) {
      readLight(state, run([minimum(640), weighted(2.1)]), link, process);
    }
    const before = sdsOf(start());
    const after = sdsOf(state);
    expect(after[0] / before[0]).toBeGreaterThan(0.85);
    expect(Math.abs(state.mean[0] - start().mean[0]) / before[0]).toBeLessThan(0.5);
  });

  test("a weighted reflectance that every film gives changes nothing, however often it is read", () => {
    const same = lightLink(minimumOf, () => 2, facet);
    const state = start();
    for (let i = 0; i < 100; i++) readLight(state, run([weighted(2)]), same, process);
    const tolerance = { absolute: 1e-9, because: "rounding of a hundred updates" };
    expectAllClose(Array.from(covariance(state)), Array.from(covariance(start())), tolerance);
    expectAllClose(Array.from(state.mean), Array.from(start().mean), tolerance);
  });

  test("teaches nothing where the optics have no answer", () => {
    const blind = lightLink(
      () => null,
      () => null,
      facet,
    );
    const state = start();
    const before = copyState(state);
    expect(readLight(state, run([minimum(600), weighted(2)]), blind, process)).toBe(0);
    expect(state).toEqual(before);
    const noWeighted = lightLink(minimumOf, null, facet);
    expect(readLight(state, run([weighted(2)]), noWeighted, process)).toBe(0);
    expect(state).toEqual(before);
  });
});
