/**
 * The optics of a stack as text: the numbers an engineer compares first, then the ledger of where the light goes, then a
 * spectrum every 50 nm.
 */
import type { FilmStackAnswer } from "../../engine/index.ts";

/** What the text needs of the stack: its light, and names for its layers where they are known. */
export interface ShownStack {
  light: { fromNm: number; toNm: number; weight: unknown };
  seenFrom?: unknown;
  film?: readonly { material: { name: string } }[];
}

export function filmText(answer: FilmStackAnswer, stack: ShownStack): string {
  const { light } = stack;
  const weight = typeof light.weight === "string" ? light.weight : "quantum efficiency";
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
    `colour               ${answer.colour ? `${answer.colour.hex} (${answer.colour.illuminant}, ${answer.colour.observer})` : "not given: a material is not known over 380-780 nm"}`,
    ...answer.extrapolated.map((sentence) => `extrapolated         ${sentence}`),
    "",
    ...ledgerText(answer.current_ma_cm2, stack),
    "",
    "     nm     R %     T %",
    ...rows,
  ].join("\n");
}

/** A line for each place light goes, in the order light meets them, with its current and its part of what is available. */
function ledgerText(current: FilmStackAnswer["current_ma_cm2"], stack: ShownStack): string[] {
  const front = frontNames(stack.seenFrom);
  const entries: [string, number][] = [
    ["reflected", current.reflected],
    ...current.absorbed_in_cover_layers.map((lost, j): [string, number] => [
      `absorbed in ${front?.[j] ?? `thick layer ${j + 1}`}`,
      lost,
    ]),
    ...current.absorbed_in_film.map((lost, j): [string, number] => [filmName(j, stack.film), lost]),
    ["into the substrate", current.into_substrate],
  ];
  const lines: [string, number][] = [["light available", current.available], ...entries];
  if (current.collected !== undefined) lines.push(["collected, by quantum efficiency", current.collected]);
  const wide = Math.max(...lines.map(([name]) => name.length));
  const line = ([name, value]: [string, number]): string =>
    `${name.padEnd(wide)}  ${value.toFixed(3).padStart(7)}  ${((100 * value) / current.available).toFixed(2).padStart(6)}`;
  return [`${"".padEnd(wide)}   mA/cm2       %`, ...lines.map(line)];
}

function filmName(j: number, film: ShownStack["film"]): string {
  const name = film?.[j]?.material.name;
  const place = film?.length === 1 ? "the film" : `film layer ${j + 1}`;
  return `absorbed in ${place}${name === undefined ? "" : `, ${name}`}`;
}

/** Names of the thick layers in front, outermost first, where the stack tells them. */
function frontNames(seenFrom: unknown): string[] | null {
  if (seenFrom === "glass") return ["glass", "encapsulant"];
  if (typeof seenFrom !== "object" || seenFrom === null || !("thick" in seenFrom)) return null;
  const { thick } = seenFrom as { thick: readonly { material: { name: string } }[] };
  return thick.map(({ material }, j) => `thick layer ${j + 1}, ${material.name}`);
}
