/**
 * Reads the stack file of the `film` verb: light, what it is seen from, the layers from the light inwards, surface and
 * substrate. Every problem is reported with row and column; tables come through a passed-in reader. The result is what
 * `filmStack` of the engine computes, with the words of the file kept for showing.
 */
import * as z from "zod/mini";
import {
  type FilmStackDescription,
  facetAngleRange,
  type Material,
  parseQuantity,
  Refusal,
  refuse,
} from "../../../engine/index.ts";
import { LIGHT_NM, within } from "../goal-shape.ts";
import type { FileReader } from "../number-table.ts";
import { FACET_ANGLE_DEG } from "../read-line.ts";
import { Reader, read } from "../shape.ts";
import { readYaml } from "../yaml.ts";
import { readFilm, type StackLayer } from "./film.ts";
import { byName, readMaterial } from "./material.ts";
import { readSeenFrom } from "./seen-from.ts";

export interface StackFile {
  light: FilmStackDescription["light"];
  seenFrom: FilmStackDescription["seenFrom"];
  /** From the light inwards; may be empty. Thicknesses are on the surface named. */
  film: readonly StackLayer[];
  surface: FilmStackDescription["surface"];
  substrate: Material;
}

const KEYS = ["light", "seen_from", "film", "surface", "substrate"];
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
  weight: z.optional(z.enum(["photons", "power"])),
});

/** Reads a stack file. Throws a Refusal with all problems, in file order. */
export function readStack(source: Uint8Array | string, file: string, readFile?: FileReader): StackFile {
  const reader = new Reader(readYaml(source, file));
  const { root } = reader.yaml;
  if (typeof root !== "object" || root === null || Array.isArray(root)) {
    reader.add([], "wrong-type", "a stack file holds keys and values", "as in substrate: silicon");
    throw new Refusal(reader.problems);
  }
  for (const key of Object.keys(root)) if (!KEYS.includes(key)) reader.unknownKey([key], KEYS);
  const surface = readSurface(reader);
  const light = readLight(reader, surface);
  const seenFrom = readSeenFrom(reader);
  const film = readFilm(reader, readFile);
  const substrate = reader.at(["substrate"]) === undefined ? "silicon" : reader.at(["substrate"]);
  const below = typeof substrate === "string" ? byName(reader, ["substrate"], substrate) : undefined;
  const layer =
    below ?? (typeof substrate === "string" ? undefined : readMaterial(reader, ["substrate"], {}, readFile));
  if (reader.problems.length > 0 || !surface || !light || !seenFrom || !film || !layer) {
    throw new Refusal(
      [...reader.problems].sort((a, b) => (a.row ?? 0) - (b.row ?? 0) || (a.column ?? 0) - (b.column ?? 0)),
    );
  }
  return { light, seenFrom, film, surface, substrate: layer.material };
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

function readLight(reader: Reader, surface: StackFile["surface"] | undefined): StackFile["light"] | undefined {
  const shape = reader.at(["light"]) === undefined ? {} : reader.shaped(lightShape, ["light"]);
  if (!shape) return undefined;
  const { from, to, step, angle, polarisation = "both", weight = "photons" }: z.output<typeof lightShape> = shape;
  const light = {
    fromNm: from ?? LIGHT_DEFAULTS.fromNm,
    toNm: to ?? LIGHT_DEFAULTS.toNm,
    stepNm: step ?? LIGHT_DEFAULTS.stepNm,
    angleDeg: angle ?? LIGHT_DEFAULTS.angleDeg,
    polarisation,
    weight,
  };
  if (light.fromNm >= light.toNm) {
    reader.add(["light"], "range-reversed", `the light goes from ${light.fromNm} nm to ${light.toNm} nm`);
  }
  if (surface?.kind === "pyramids" && light.angleDeg !== 0) {
    const message = "light aslant on pyramids is not computed; their bounce paths are known for 0 deg only";
    reader.add(["light", "angle"], "angle-on-pyramids", message, "use angle: 0 deg, or surface: polished");
  }
  return light;
}

function readSurface(reader: Reader): StackFile["surface"] | undefined {
  const path = ["surface"];
  const value = reader.at(path);
  if (value === undefined || value === "polished") return { kind: "polished" };
  if (value === "pyramids") return { kind: "pyramids", facetAngleDeg: FACET_ANGLE_DEG };
  if (typeof value === "object" && value !== null && !Array.isArray(value)) {
    const angle = read((text) => within(parseQuantity(text, "angle").value, ...facetAngleRange, "deg"));
    const shape = reader.shaped(z.strictObject({ pyramids: angle }), path);
    return shape && { kind: "pyramids", facetAngleDeg: shape.pyramids };
  }
  reader.add(path, "wrong-value", `surface: "${value}" is not known here`, "polished, or { pyramids: 54.74 deg }");
  return undefined;
}
