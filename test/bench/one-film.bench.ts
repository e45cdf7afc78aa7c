/**
 * The reflectance spectrum of one nitride film on pyramids, which everything in the program asks for thousands of times:
 * the engine's fast path beside plain complex 2x2 matrices on the same grid, angles and bounce paths.
 */
import { materialByName } from "../../engine/materials/library.ts";
import { siliconNitride } from "../../engine/materials/nitride-family.ts";
import { pathSum } from "../../engine/surface/path-sum.ts";
import { pyramidPaths } from "../../engine/surface/pyramids.ts";
import { coatedWafer } from "../../engine/wafer.ts";
import { plainReflectance } from "../support/characteristic-matrix.ts";
import type { Bench } from "./harness.ts";

const FACET_ANGLE_DEG = 52;
const wafer = coatedWafer({
  surface: { kind: "pyramids", facetAngleDeg: FACET_ANGLE_DEG },
  seenFrom: "air",
  fromNm: 300,
  toNm: 1100,
  weight: "photons",
});
const silicon = materialByName("silicon");
const paths = pathSum(pyramidPaths("random", FACET_ANGLE_DEG));

const deepAt = Array.from(wafer.wavelengthNm, (wavelengthNm) => silicon.at(wavelengthNm));
/** The film's constants, kept for the index asked last, so that the plain way does not pay for them at every thickness. */
let kept = { index: Number.NaN, at: deepAt };

function plainSpectrum(index: number, thicknessNm: number): Float64Array {
  if (kept.index !== index) {
    const nitride = siliconNitride(index);
    kept = { index, at: Array.from(wafer.wavelengthNm, (wavelengthNm) => nitride.at(wavelengthNm)) };
  }
  return wafer.wavelengthNm.map((wavelengthNm, i) => {
    const film = [{ ...kept.at[i], thicknessNm }];
    const deep = deepAt[i];
    const bounce = paths.anglesRad.map((angleRad) => {
      const s = plainReflectance(wavelengthNm, angleRad, 1, film, deep, "s");
      return (s + plainReflectance(wavelengthNm, angleRad, 1, film, deep, "p")) / 2;
    });
    return paths.paths.reduce(
      (sum, { fraction, bounces }) => sum + bounces.reduce((left, one) => left * bounce[one], fraction),
      0,
    );
  });
}

/** Rounding in some twenty products of numbers near 1. */
const AGREE = 1e-12;

function check(): void {
  for (const [index, thicknessNm] of [
    [1.95, 60],
    [2.06, 75],
    [2.12, 110],
  ]) {
    const fast = wafer.nitride(index, thicknessNm).reflectance;
    const plain = plainSpectrum(index, thicknessNm);
    fast.forEach((value, i) => {
      if (!(Math.abs(value - plain[i]) < AGREE)) {
        throw new Error(`at ${wafer.wavelengthNm[i]} nm, index ${index}, ${thicknessNm} nm: ${value} and ${plain[i]}`);
      }
    });
  }
}

const total = (values: Float64Array) => values.reduce((sum, value) => sum + value, 0);
/** Twenty thicknesses of one film, as a search over time settings asks. */
const THICKNESSES = Array.from({ length: 20 }, (_, i) => 66 + i);
const overThickness = (spectrum: (index: number, thicknessNm: number) => Float64Array) => () =>
  THICKNESSES.reduce((sum, thicknessNm) => sum + total(spectrum(2.06, thicknessNm)), 0);
/** Films of a new index each time: nothing can be kept ready from the call before. */
const overIndex = (spectrum: (index: number, thicknessNm: number) => Float64Array) => {
  let call = 0;
  return () => total(spectrum(2 + ((call++ * 0.618034) % 0.12), 75));
};

const fast = (index: number, thicknessNm: number) => wafer.nitride(index, thicknessNm).reflectance;

export const benches: Bench[] = [
  {
    title: "one film on pyramids, 81 wavelengths, twenty thicknesses at one index",
    a: { name: "fast path", run: overThickness(fast) },
    b: { name: "plain 2x2", run: overThickness(plainSpectrum) },
    check,
    rounds: 51,
  },
  {
    title: "one film on pyramids, 81 wavelengths, a new index each time",
    a: { name: "fast path", run: overIndex(fast) },
    b: { name: "plain 2x2", run: overIndex(plainSpectrum) },
    check,
    rounds: 101,
  },
];
