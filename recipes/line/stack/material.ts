/**
 * A material as a stack file spells it: a name of the library, a table beside the file, or a constant index. Reads one at a
 * place of the file, alone (the substrate) or with the further keys of a film layer beside it.
 */
import * as z from "zod/mini";
import {
  constantMaterial,
  type Material,
  materialByName,
  materialNames,
  nearestWord,
  parseQuantity,
  Refusal,
  tabulated,
} from "../../../engine/index.ts";
import { within } from "../goal-shape.ts";
import { type FileReader, openBeside, readNumberTable } from "../number-table.ts";
import { type Reader, read } from "../shape.ts";
import type { YamlPath } from "../yaml.ts";

/** A material as written. */
export type WrittenMaterial = { material: Material } & (
  | { kind: "material"; name: string; index?: number }
  | { kind: "table"; file: string; rows: readonly (readonly [wavelengthNm: number, n: number, k: number])[] }
  | { kind: "constant"; index: number; extinction: number }
);

// the engine divides by indices; a real index of zero is no transparent or metallic film of this trade
const index = read((text) => within(parseQuantity(text, "number").value, 0.05, 10, ""));
const extinction = read((text) => within(parseQuantity(text, "number").value, 0, 20, ""));

const materialShape = { material: z.string(), index: z.optional(index) };
const tableShape = { table: z.string() };
const constantShape = { index, extinction: z.optional(extinction) };

/** Negative k is refused: it counts as absorption here whatever convention a table's author used. */
const TABLE_COLUMNS = { wavelength_nm: [1, 1e6], n: [0.01, 20], k: [0, 50] } as const;

/** Reads a material in one of its three spellings, with further keys beside it (the thickness of a layer). */
export function readMaterial(
  reader: Reader,
  path: YamlPath,
  more: Readonly<Record<string, z.ZodMiniType>>,
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

export function byName(reader: Reader, path: YamlPath, name: string, n?: number, indexPath?: YamlPath) {
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
