/**
 * Formulas for a material in a stack file: `cauchy`, `sellmeier`, `tauc_lorentz`, each a map of coefficients and the range they
 * were fitted on. Coefficients whose unit is no unit of the file (um2, eV) carry it in their key.
 */
import * as z from "zod/mini";
import {
  cauchyMaterial,
  type Material,
  parseQuantity,
  parseRange,
  Refusal,
  refuse,
  sellmeierMaterial,
  taucLorentzMaterial,
} from "../../../engine/index.ts";
import { within } from "../goal-shape.ts";
import { type Reader, read } from "../shape.ts";
import type { YamlPath } from "../yaml.ts";

// wide enough for any formula of optics; catches a slip of units
const WAVELENGTH_NM = [1, 1e6] as const;

const number = read((text) => parseQuantity(text, "number").value);
const positive = read((text) => {
  const { value } = parseQuantity(text, "number");
  if (!(value > 0)) refuse("out-of-bounds", `${value} is not above 0`);
  return value;
});
const notNegative = read((text) => within(parseQuantity(text, "number").value, 0, 1e6, ""));
const range = read((text) => {
  const { low, high } = parseRange(text, "length");
  for (const end of [low, high]) within(end, ...WAVELENGTH_NM, "nm");
  return [low, high] as const;
});

const cauchyShape = z.strictObject({
  a: number,
  b_um2: z.optional(number),
  c_um4: z.optional(number),
  extinction: z.optional(read((text) => within(parseQuantity(text, "number").value, 0, 20, ""))),
  range,
});
const sellmeierShape = z.strictObject({
  terms: z.array(
    z.strictObject({
      b: number,
      c: read((text) => within(parseQuantity(text, "length").value, 0, WAVELENGTH_NM[1], "nm")),
    }),
  ),
  range,
});
const taucLorentzShape = z.strictObject({
  gap_ev: notNegative,
  epsilon_infinity: z.optional(positive),
  oscillators: z.array(z.strictObject({ amplitude_ev: positive, centre_ev: positive, width_ev: positive })),
  range,
});

const makers = {
  cauchy(reader: Reader, path: YamlPath) {
    const shape = reader.shaped(cauchyShape, path);
    if (!shape) return undefined;
    const { a, b_um2 = 0, c_um4 = 0, extinction = 0, range: rangeNm } = shape;
    return () => cauchyMaterial({ a, bNm2: 1e6 * b_um2, cNm4: 1e12 * c_um4, k: extinction, rangeNm });
  },
  sellmeier(reader: Reader, path: YamlPath) {
    const shape = reader.shaped(sellmeierShape, path);
    if (!shape) return undefined;
    const terms = shape.terms.map(({ b, c }) => [b, c / 1000] as const);
    const named = { name: "Sellmeier film", source: "Sellmeier formula" };
    return () => sellmeierMaterial({ ...named, rangeNm: shape.range, terms });
  },
  tauc_lorentz(reader: Reader, path: YamlPath) {
    const shape = reader.shaped(taucLorentzShape, path);
    if (!shape) return undefined;
    const oscillators = shape.oscillators.map(({ amplitude_ev, centre_ev, width_ev }) => ({
      amplitudeEv: amplitude_ev,
      centreEv: centre_ev,
      widthEv: width_ev,
    }));
    const { gap_ev: gapEv, epsilon_infinity: epsilonInfinity = 1, range: rangeNm } = shape;
    return () => taucLorentzMaterial({ gapEv, epsilonInfinity, oscillators, rangeNm });
  },
};

export type FormulaKind = keyof typeof makers;

/** How each is written, for hints. */
const EXAMPLES: Record<FormulaKind, string> = {
  cauchy: "as in cauchy: { a: 1.9, b_um2: 0.02, range: 300..1100 nm }",
  sellmeier: "as in sellmeier: { terms: [ { b: 1.1, c: 0.1 um } ], range: 300..1100 nm }",
  tauc_lorentz:
    "as in tauc_lorentz: { gap_ev: 2.4, oscillators: [ { amplitude_ev: 80, centre_ev: 7.2, width_ev: 6 } ], range: 300..1100 nm }",
};

/** Keys that carry their unit; written without it, one letter is near to any other. */
const SUFFIXED = ["b_um2", "c_um4", "gap_ev", "amplitude_ev", "centre_ev", "width_ev"];

/** Points at which a formula is tried before it is taken, ends included. */
const trials = 65;

/**
 * Reads the formula at a path (that of its key's value); undefined when it is wrong or not physical somewhere in its own range,
 * with the problems kept in the reader.
 */
export function readFormula(reader: Reader, path: YamlPath, kind: FormulaKind): Material | undefined {
  const before = reader.problems.length;
  const make = makers[kind](reader, path);
  for (const problem of reader.problems.slice(before)) {
    const key = problem.code === "unknown-key" ? /^"(\w+)"/.exec(problem.message)?.[1] : undefined;
    const withUnit = SUFFIXED.find((name) => name.startsWith(`${key}_`));
    problem.hint = withUnit ? `did you mean ${withUnit}?` : (problem.hint ?? EXAMPLES[kind]);
  }
  if (!make) return undefined;
  return reader.attempt(path, () => {
    const material = make();
    const [from, to] = material.rangeNm;
    for (let i = 0; i < trials; i++) tryAt(material, i === trials - 1 ? to : from + ((to - from) * i) / (trials - 1));
    return material;
  });
}

function tryAt(material: Material, wavelengthNm: number): void {
  try {
    material.at(wavelengthNm);
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    const hint = "narrow the range, or look for a slip in a sign or a unit";
    throw new Refusal(error.problems.map((problem) => ({ ...problem, hint })));
  }
}
