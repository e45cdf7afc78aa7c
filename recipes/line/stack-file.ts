/**
 * Reads the stack file of the `film` verb: light, what it is seen from, the layers from the light inwards, surface and
 * substrate. Every problem is reported with row and column; tables come through a passed-in reader. The result is what
 * `filmStack` of the engine computes, with the words of the file kept for showing.
 */
import * as z from "zod/mini";
import {
  constantMaterial,
  type FilmStackDescription,
  facetAngleRange,
  type Material,
  materialByName,
  materialNames,
  nearestWord,
  parseQuantity,
  Refusal,
  refuse,
  tabulated,
} from "../../engine/index.ts";
import { LIGHT_NM, within } from "./goal-shape.ts";
import { type FileReader, openBeside, readNumberTable } from "./number-table.ts";
import { FACET_ANGLE_DEG } from "./read-line.ts";
import { Reader, read } from "./shape.ts";
import { readYaml, type YamlPath } from "./yaml.ts";

/** One layer as written. */
export type StackLayer = { thicknessNm: number; material: Material } & (
  | { kind: "material"; name: string; index?: number }
  | { kind: "table"; file: string; rows: readonly (readonly [wavelengthNm: number, n: number, k: number])[] }
  | { kind: "constant"; index: number; extinction: number }
);

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

const thickness = read((text) => {
  if (/^\s*may\s+be\b/.test(text)) {
    refuse("not-available", `"${text}": improving a thickness is not available yet`, { hint: "give one thickness" });
  }
  return within(parseQuantity(text, "length").value, 0, 100_000, "nm");
});
// the engine divides by indices; a real index of zero is no transparent or metallic film of this trade
const index = read((text) => within(parseQuantity(text, "number").value, 0.05, 10, ""));
const extinction = read((text) => within(parseQuantity(text, "number").value, 0, 20, ""));

const materialShape = { material: z.string(), index: z.optional(index) };
const tableShape = { table: z.string() };
const constantShape = { index, extinction: z.optional(extinction) };

/** Negative k is refused: it counts as absorption here whatever convention a table's author used. */
const TABLE_COLUMNS = { wavelength_nm: [1, 1e6], n: [0.01, 20], k: [0, 50] } as const;

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

function readSeenFrom(reader: Reader): StackFile["seenFrom"] | undefined {
  const path = ["seen_from"];
  const value = reader.at(path);
  if (value === undefined || value === "air") return "air";
  if (value === "glass") return "glass";
  if (Array.isArray(value)) {
    const message = "a list of thick layers in front is not available yet";
    reader.add(path, "not-available", message, "air, glass, or { index: 1.5 }");
    return undefined;
  }
  if (typeof value === "object" && value !== null) return reader.shaped(z.strictObject({ index }), path);
  reader.add(path, "wrong-value", `seen_from: "${value}" is not known here`, "air, glass, or { index: 1.5 }");
  return undefined;
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

function readFilm(reader: Reader, readFile: FileReader | undefined): StackLayer[] | undefined {
  const list = reader.at(["film"]);
  if (!Array.isArray(list)) {
    const what = list === undefined ? '"film" is missing' : "film must be a list of layers";
    const code = list === undefined ? "missing-key" : "wrong-type";
    reader.add(["film"], code, what, "one layer a row, as in - { material: silica, thickness: 90 nm }");
    return undefined;
  }
  const layers = list.map((_, i) => {
    const path = ["film", i];
    const read = readMaterial(reader, path, { thickness }, readFile);
    return read as StackLayer | undefined;
  });
  return layers.every((layer) => layer !== undefined) ? (layers as StackLayer[]) : undefined;
}

/** Reads a material in one of its three spellings, with further keys beside it (the thickness of a layer). */
function readMaterial(
  reader: Reader,
  path: YamlPath,
  more: { thickness?: typeof thickness },
  readFile: FileReader | undefined,
): { material: Material; thicknessNm?: number } | undefined {
  const value = reader.at(path);
  const hint = "{ material: silica }, { table: my-film.csv } or { index: 1.64, extinction: 0 }";
  if (typeof value !== "object" || value === null || Array.isArray(value)) {
    reader.add(path, "wrong-type", "a material is needed", hint);
    return undefined;
  }
  const has = (key: string) => Object.hasOwn(value, key);
  if (has("material") && has("table")) {
    reader.add([...path, "table"], "two-materials", "material and table are both given", hint, "key");
    return undefined;
  }
  if (has("material")) {
    const shape = reader.shaped(z.strictObject({ ...materialShape, ...more }), path);
    if (!shape) {
      // another key of this layer is wrong; the name is judged all the same, so that one pass finds both
      const written = String(reader.at([...path, "material"]));
      if (!materialNames.includes(written)) byName(reader, [...path, "material"], written);
      return undefined;
    }
    const named = byName(reader, [...path, "material"], shape.material, shape.index, [...path, "index"]);
    return named && withThickness(named, shape);
  }
  if (has("table")) {
    const shape = reader.shaped(z.strictObject({ ...tableShape, ...more }), path);
    if (!shape) return undefined;
    const table = readTable(reader, [...path, "table"], shape.table, readFile);
    return table && withThickness(table, shape);
  }
  if (has("index")) {
    const shape = reader.shaped(z.strictObject({ ...constantShape, ...more }), path);
    if (!shape) return undefined;
    const { index: n, extinction: k = 0 } = shape;
    return withThickness({ kind: "constant", index: n, extinction: k, material: constantMaterial(n, k) }, shape);
  }
  const known = ["material", "table", "index", "extinction", ...Object.keys(more)];
  for (const key of Object.keys(value)) if (!known.includes(key)) reader.unknownKey([...path, key], known);
  reader.add(path, "missing-key", "no material is given", hint);
  return undefined;
}

function withThickness<T extends object>(layer: T, shape: object): T & { thicknessNm?: number } {
  const { thickness: thicknessNm } = shape as { thickness?: number };
  return thicknessNm === undefined ? layer : { ...layer, thicknessNm };
}

function byName(reader: Reader, path: YamlPath, name: string, n?: number, indexPath?: YamlPath) {
  if (!materialNames.includes(name)) {
    const near = nearestWord(name, materialNames);
    const hint = near ? `did you mean ${near}?` : `known are ${materialNames.join(", ")}`;
    reader.add(path, "unknown-material", `"${name}" is not a material known here`, hint);
    return undefined;
  }
  const place = n === undefined ? path : (indexPath ?? path);
  const material = reader.attempt(place, () => materialByName(name, n === undefined ? {} : { index: n }));
  return material && { kind: "material" as const, name, ...(n === undefined ? {} : { index: n }), material };
}

function readTable(reader: Reader, path: YamlPath, file: string, readFile: FileReader | undefined) {
  const source = reader.attempt(path, () => openBeside(file, readFile));
  if (source === undefined) return undefined;
  try {
    const { wavelength_nm, n, k } = readNumberTable(source, file, TABLE_COLUMNS);
    const rows = wavelength_nm.map((nm, i) => [nm, n[i], k[i]] as const);
    return { kind: "table" as const, file, rows, material: tabulated({ name: file, source: file, rows }) };
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    reader.problems.push(...error.problems.map((problem) => ({ ...problem, file })));
    return undefined;
  }
}
