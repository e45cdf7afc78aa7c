/** The optics of a stack as text: the numbers an engineer compares first, then a spectrum every 50 nm. */
import type { FilmStackAnswer } from "../../engine/index.ts";

export function filmText(
  answer: FilmStackAnswer,
  stack: { light: { fromNm: number; toNm: number; weight: unknown } },
): string {
  const { light } = stack;
  const weight = typeof light.weight === "string" ? light.weight : "quantum efficiency";
  const c = answer.current_ma_cm2;
  const rows = answer.wavelength_nm.flatMap((w, i) =>
    w % 50 === 0
      ? [
          `  ${String(w).padStart(5)}  ${(100 * answer.reflectance[i]).toFixed(2).padStart(6)}  ${(100 * answer.transmittance[i]).toFixed(2).padStart(6)}`,
        ]
      : [],
  );
  const minimum = answer.reflectance_minimum_nm;
  return [
    `weighted reflectance ${answer.weighted_reflectance_percent.toFixed(3)} % (${weight}, ${light.fromNm}-${light.toNm} nm)`,
    `reflectance minimum  ${minimum === null ? "none inside the range" : `${minimum.toFixed(1)} nm`}`,
    `current, mA/cm2      available ${c.available.toFixed(3)}: reflected ${c.reflected.toFixed(3)},${c.absorbed_in_cover > 0 ? ` absorbed in glass and encapsulant ${c.absorbed_in_cover.toFixed(3)},` : ""} absorbed in the film ${c.absorbed_in_film.map((a) => a.toFixed(3)).join(" + ") || "0"}, into the substrate ${c.into_substrate.toFixed(3)}`,
    `colour               ${answer.colour ? `${answer.colour.hex} (${answer.colour.illuminant}, ${answer.colour.observer})` : "not given: a material is not known over 380-780 nm"}`,
    "",
    "     nm     R %     T %",
    ...rows,
  ].join("\n");
}
