/**
 * Materials asked for beyond what is known of them. That is a refusal everywhere, unless a person asks for it by name; then
 * the material carries what was done, so that the answer can say it.
 *
 * Of a table the end row's n and k are held: they stay physical however far one goes, and at the transparent end, where
 * it is wanted most, the true index hardly moves (silicon nitride 0.001 a 50 nm at 1200 nm). A slope carried on runs away and
 * turns k negative. A formula is continued, as long as it stays physical.
 */
import { type Extrapolation, type Material, onGrid } from "./material.ts";

/**
 * The same material, answering at every wavelength above zero. A material that does so already comes back as it is. Beyond
 * the range `at` refuses only where a formula is not physical ("material-value") and wavelengths that are none ("outside-table").
 */
export function extrapolated(material: Material): Material {
  const [from, to] = material.rangeNm;
  if (from === 0 && to === Number.POSITIVE_INFINITY) return material;
  const { name, source, continuedAt } = material;
  const real = (wavelengthNm: number): boolean => wavelengthNm > 0 && wavelengthNm < Number.POSITIVE_INFINITY;
  // What is no wavelength is left for the material to refuse.
  const held = (nm: number): number => (real(nm) ? Math.min(to, Math.max(from, nm)) : nm);
  const at = (nm: number) => (continuedAt && real(nm) ? continuedAt(nm) : material.at(held(nm)));
  return {
    name,
    source,
    rangeNm: [0, Number.POSITIVE_INFINITY],
    extrapolations: [
      ...(material.extrapolations ?? []),
      { name, knownNm: [from, to], how: continuedAt ? "formula" : "held" },
    ],
    at,
    ...(continuedAt ? {} : { along: (grid) => onGrid(material, Float64Array.from(grid, held)) }),
  };
}

const beyond: Record<Extrapolation["how"], string> = {
  held: "beyond, its last value is held",
  formula: "beyond, its formula is carried on",
};

/**
 * The sentence that says what was extrapolated for a range of wavelengths (nm), as in "silica is known from 210 to 2000 nm;
 * beyond, its formula is carried on"; several parts are joined. Null when everything asked is known.
 */
export function extrapolationSentence(material: Material, fromNm: number, toNm: number): string | null {
  const said = (material.extrapolations ?? [])
    .filter(({ knownNm }) => fromNm < knownNm[0] || toNm > knownNm[1])
    .map(({ name, knownNm, how }) => `${name} is known from ${knownNm[0]} to ${knownNm[1]} nm; ${beyond[how]}`);
  return said.length === 0 ? null : [...new Set(said)].join(". ");
}
