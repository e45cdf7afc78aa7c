/** The problems the optics competitors are given, in their plain text (described in `stack.c`). */

export interface Light {
  wavelengthNm: ArrayLike<number>;
  incidenceIndex: ArrayLike<number>;
  /** One number for all wavelengths, or one a wavelength. */
  angleRad: number | ArrayLike<number>;
  polarisation: "s" | "p" | "both";
}

/** Index n - ik at every wavelength. */
export interface Medium {
  n: ArrayLike<number>;
  k: ArrayLike<number>;
}

export interface StackProblem extends Light {
  /** From the light inwards. */
  layers: readonly Medium[];
  substrate: Medium;
  /** Of each stack, the thickness of every layer. */
  thicknessNm: readonly ArrayLike<number>[];
}

export interface MapProblem extends Light {
  weight: ArrayLike<number>;
  substrate: Medium;
  firstNm: number;
  stepNm: number;
  steps: number;
  /** One film a row. */
  films: readonly Medium[];
}

/** The shortest text that reads back as the same number, so that all compute on the same bits. */
const line = (values: ArrayLike<number>) => Array.from(values, String).join(" ");
const medium = ({ n, k }: Medium) => [line(n), line(k)];

function lightLines(kind: string, light: Light, counts: readonly number[]): string[] {
  const angles = typeof light.angleRad === "number" ? [light.angleRad] : light.angleRad;
  return [
    [kind, light.wavelengthNm.length, ...counts, angles.length, light.polarisation].join(" "),
    line(light.wavelengthNm),
    line(light.incidenceIndex),
    line(angles),
  ];
}

/** `kind`: "whole" (everything for every stack), "plain" (the same from the textbook, C only), "batch" (numpy: all at once) or "thicknesses" (interfaces beforehand). */
export function stackText(kind: "whole" | "plain" | "batch" | "thicknesses", problem: StackProblem): string {
  const { layers, substrate, thicknessNm } = problem;
  return [
    ...lightLines(kind, problem, [layers.length, thicknessNm.length]),
    ...[...layers, substrate].flatMap(medium),
    ...thicknessNm.map(line),
    "",
  ].join("\n");
}

export function mapText(problem: MapProblem): string {
  const { films, steps, weight, substrate, firstNm, stepNm } = problem;
  return [
    ...lightLines("map", problem, [films.length, steps]),
    line(weight),
    ...medium(substrate),
    line([firstNm, stepNm]),
    ...films.flatMap(medium),
    "",
  ].join("\n");
}
