/**
 * Reads the stack file of the `film` verb: light, what it is seen from, the layers from the light inwards, surface and
 * substrate. Every problem is reported with row and column; tables come through a passed-in reader. The result is what
 * `filmStack` of the engine computes, with the words of the file kept for showing.
 */
import * as z from "zod/mini";
import {
  type FilmGoal,
  type FilmStackDescription,
  type FilmUnknown,
  facetAngleRange,
  gridWeights,
  type Material,
  parseQuantity,
  Refusal,
  refuse,
  wavelengthGrid,
} from "../../../engine/index.ts";
import { readWeight } from "../efficiency.ts";
import { LIGHT_NM, within } from "../goal-shape.ts";
import type { FileReader } from "../number-table.ts";
import { FACET_ANGLE_DEG } from "../read-line.ts";
import { Reader, read } from "../shape.ts";
import { readYaml } from "../yaml.ts";
import { filmUnknowns, readFilm, type StackLayer } from "./film.ts";
import { readStackGoal } from "./goal.ts";
import { byName, readMaterial } from "./material.ts";
import { readSeenFrom } from "./seen-from.ts";

export interface StackFile {
  light: FilmStackDescription["light"];
  seenFrom: FilmStackDescription["seenFrom"];
  /** From the light inwards; may be empty. Thicknesses are on the surface named. */
  film: readonly StackLayer[];
  surface: FilmStackDescription["surface"];
  substrate: Material;
  /** What the improved film is to reach; empty without a goal. */
  goal: FilmGoal;
}

const KEYS = ["light", "seen_from", "film", "surface", "substrate", "goal"];
const LIGHT_DEFAULTS = { fromNm: 300, toNm: 1100, stepNm: 10, angleDeg: 0 };

const wavelength = read((text) => within(parseQuantity(text, "length").value, ...LIGHT_NM, "nm"));
const lightShape = z.strictObject({
  from: z.optional(wavelength),
  to: z.optional(wavelength),
  step: z.optional(read((text) => within(parseQuantity(text, "length").value, 0.1, 100, "nm"))),
  angle: z.optional(
    read((text) => {
      const { value } = parseQuantity(text, "angle");
      if (!(value >= 0 && value < 90)) refuse("out-of-bounds", `${value} deg lies outside 0 to 90 deg`);
      return value;
    }),
  ),
  polarisation: z.optional(z.enum(["s", "p", "both"])),
  weight: z.optional(z.string()),
});

/**
 * Reads a stack file. Throws a Refusal with all problems, in file order. Without `improve` a value that is left open ("may be"
 * alone) is one of them.
 */
export function readStack(
  source: Uint8Array | string,
  file: string,
  readFile?: FileReader,
  options: { improve?: boolean } = {},
): StackFile {
  const reader = new Reader(readYaml(source, file));
  const { root } = reader.yaml;
  if (typeof root !== "object" || root === null || Array.isArray(root)) {
    reader.add([], "wrong-type", "a stack file holds keys and values", "as in substrate: silicon");
    throw new Refusal(reader.problems);
  }
  for (const key of Object.keys(root)) if (!KEYS.includes(key)) reader.unknownKey([key], KEYS);
  const surface = readSurface(reader);
  const light = readLight(reader, surface, readFile);
  const gridNm = light && reader.attempt(["light"], () => wavelengthGrid(light.fromNm, light.toNm, light.stepNm));
  const seenFrom = readSeenFrom(reader, gridNm, readFile);
  const film = readFilm(reader, readFile, options);
  const goal = readStackGoal(reader);
  const substrate = reader.at(["substrate"]) === undefined ? "silicon" : reader.at(["substrate"]);
  const below = typeof substrate === "string" ? byName(reader, ["substrate"], substrate) : undefined;
  const layer =
    below ?? (typeof substrate === "string" ? undefined : readMaterial(reader, ["substrate"], {}, readFile));
  if (reader.problems.length > 0 || !surface || !light || !seenFrom || !film || !layer || !goal) {
    throw new Refusal(
      [...reader.problems].sort((a, b) => (a.row ?? 0) - (b.row ?? 0) || (a.column ?? 0) - (b.column ?? 0)),
    );
  }
  return { light, seenFrom, film, surface, substrate: layer.material, goal };
}

/** The stack as the engine computes it. */
export function stackDescription({ light, seenFrom, film, surface, substrate }: StackFile): FilmStackDescription {
  return {
    light,
    seenFrom,
    film: film.map(({ material, thicknessNm }) => ({ material, thicknessNm })),
    surface,
    substrate,
  };
}

/** What of the stack may be improved. */
export function stackUnknowns({ film }: StackFile): FilmUnknown[] {
  return filmUnknowns(film);
}

function readLight(
  reader: Reader,
  surface: StackFile["surface"] | undefined,
  readFile: FileReader | undefined,
): StackFile["light"] | undefined {
  const shape = reader.at(["light"]) === undefined ? {} : reader.shaped(lightShape, ["light"]);
  if (!shape) return undefined;
  const { from, to, step, angle, polarisation = "both", weight = "photons" }: z.output<typeof lightShape> = shape;
  const fromNm = from ?? LIGHT_DEFAULTS.fromNm;
  const toNm = to ?? LIGHT_DEFAULTS.toNm;
  const angleDeg = angle ?? LIGHT_DEFAULTS.angleDeg;
  if (surface?.kind === "pyramids" && angleDeg !== 0) {
    const message = "light aslant on pyramids is not computed; their bounce paths are known for 0 deg only";
    reader.add(["light", "angle"], "angle-on-pyramids", message, "use angle: 0 deg, or surface: polished");
  }
  if (fromNm >= toNm) {
    reader.add(["light"], "range-reversed", `the light goes from ${fromNm} nm to ${toNm} nm`);
    return undefined;
  }
  const counted = readWeight(reader, weight, { fromNm, toNm }, readFile);
  // a table that is zero all along the light weighs nothing
  const ends = Float64Array.of(fromNm, toNm);
  if (!counted || !reader.attempt(["light", "weight"], () => gridWeights(ends, fromNm, toNm, counted)))
    return undefined;
  return { fromNm, toNm, stepNm: step ?? LIGHT_DEFAULTS.stepNm, angleDeg, polarisation, weight: counted };
}

function readSurface(reader: Reader): StackFile["surface"] | undefined {
  const path = ["surface"];
  const value = reader.at(path);
  if (value === undefined || value === "polished") return { kind: "polished" };
  if (value === "pyramids") return { kind: "pyramids", facetAngleDeg: FACET_ANGLE_DEG };
  if (typeof value === "object" && value !== null && !Array.isArray(value)) {
    const angle = read((text) => within(parseQuantity(text, "angle").value, ...facetAngleRange, "deg"));
    const arrangement = z.optional(z.enum(["random", "regular"]));
    const shape = reader.shaped(z.strictObject({ pyramids: angle, arrangement }), path);
    if (!shape) return undefined;
    const surface = { kind: "pyramids", facetAngleDeg: shape.pyramids } as const;
    return shape.arrangement ? { ...surface, arrangement: shape.arrangement } : surface;
  }
  const hint = "polished, pyramids, or { pyramids: 54.74 deg, arrangement: random }";
  reader.add(path, "wrong-value", `surface: "${value}" is not known here`, hint);
  return undefined;
}
