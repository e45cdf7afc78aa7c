/**
 * A material as a stack file spells it: a name of the library, a table beside the file, a constant index, a formula, or a
 * mixture of these. Reads one at a place of the file, alone (the substrate) or with the further keys of a film layer beside it.
 * `extrapolate: true` beside any of them lets it answer beyond the wavelengths it is known at.
 */
import * as z from "zod/mini";
import {
  constantMaterial,
  extrapolated,
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
import { type FormulaKind, readFormula } from "./material-formula.ts";
import { PART_KEYS, readMixture } from "./material-mixture.ts";

/** A material as written. */
export type WrittenMaterial = { material: Material } & (
  | { kind: "material"; name: string; index?: number }
  | { kind: "table"; file: string; rows: readonly (readonly [wavelengthNm: number, n: number, k: number])[] }
  | { kind: "constant"; index: number; extinction: number }
  | { kind: FormulaKind }
  | { kind: "mixture"; parts: readonly { material: Material; share: number }[] }
);

/** With what stood beside it: the thickness of a layer by its own name, and the values of all keys asked for. */
export type ReadMaterial = WrittenMaterial & { thicknessNm?: number; given: Readonly<Record<string, unknown>> };

type MoreKeys = Readonly<Record<string, z.ZodMiniType>>;

// the engine divides by indices; a real index of zero is no transparent or metallic film of this trade
const index = read((text) => within(parseQuantity(text, "number").value, 0.05, 10, ""));
const extinction = read((text) => within(parseQuantity(text, "number").value, 0, 20, ""));
const beside = { extrapolate: z.optional(z.boolean()) };

const SHAPES = {
  material: { material: z.string(), index: z.optional(index) },
  table: { table: z.string() },
  // what these hold is read on its own, also when another key of the layer is wrong
  cauchy: { cauchy: z.unknown() },
  sellmeier: { sellmeier: z.unknown() },
  tauc_lorentz: { tauc_lorentz: z.unknown() },
  mixture: { mixture: z.unknown() },
  index: { index, extinction: z.optional(extinction) },
} as const;
type Spelling = keyof typeof SHAPES;
const SPELLINGS = Object.keys(SHAPES) as Spelling[];

/** Negative k is refused: it counts as absorption here whatever convention a table's author used. */
const TABLE_COLUMNS = { wavelength_nm: [1, 1e6], n: [0.01, 20], k: [0, 50] } as const;

const HINT = "{ material: silica }, { table: my-film.csv } or { index: 1.64, extinction: 0 }";

/**
 * Reads a material in one of its spellings. `more` are the shapes of further keys beside it (the thickness of a layer); one of the
 * same name as a key of the material takes its place, and for `index` must give a number or an object with a number `value`.
 * Undefined when anything is wrong, with every problem kept in the reader.
 */
export function readMaterial(
  reader: Reader,
  path: YamlPath,
  more: MoreKeys,
  readFile: FileReader | undefined,
): ReadMaterial | undefined {
  const value = reader.at(path);
  if (typeof value !== "object" || value === null || Array.isArray(value)) {
    reader.add(path, "wrong-type", "a material is needed", HINT);
    return undefined;
  }
  const [spelling, ...others] = SPELLINGS.filter(
    (key) => Object.hasOwn(value, key) && !(key === "index" && Object.hasOwn(value, "material")),
  );
  if (spelling === undefined) {
    const known = [...SPELLINGS, "extinction", "extrapolate", ...Object.keys(more)];
    for (const key of Object.keys(value)) if (!known.includes(key)) reader.unknownKey([...path, key], known);
    reader.add(path, "missing-key", "no material is given", HINT);
    return undefined;
  }
  if (others.length > 0) {
    for (const other of others) {
      const message = `${spelling} and ${other} are both given`;
      reader.add([...path, other], "two-materials", message, HINT, "key");
    }
    return undefined;
  }
  const shape = reader.shaped(z.strictObject({ ...SHAPES[spelling], ...beside, ...more }), path) as Values | undefined;
  const written = readSpelling(reader, path, spelling, shape, readFile);
  if (!written || !shape) return undefined;
  const given = Object.fromEntries(Object.keys(more).map((key) => [key, shape[key]]));
  return {
    ...written,
    ...(shape.extrapolate === true ? { material: extrapolated(written.material) } : {}),
    ...(typeof shape.thickness === "number" ? { thicknessNm: shape.thickness } : {}),
    given,
  };
}

type Values = Readonly<Record<string, unknown>>;

/** `shape` is undefined when some key of the layer is wrong; what can be judged without it is judged all the same. */
function readSpelling(
  reader: Reader,
  path: YamlPath,
  spelling: Spelling,
  shape: Values | undefined,
  readFile: FileReader | undefined,
): WrittenMaterial | undefined {
  const place = [...path, spelling];
  switch (spelling) {
    case "material": {
      if (shape) return byName(reader, place, String(shape.material), numberIn(shape.index), [...path, "index"]);
      const written = reader.at(place);
      if (typeof written === "string" && !materialNames.includes(written)) byName(reader, place, written);
      return undefined;
    }
    case "table":
      return shape && readTable(reader, place, String(shape.table), readFile);
    case "index": {
      const n = numberIn(shape?.index);
      if (!shape || n === undefined) return undefined;
      const k = numberIn(shape.extinction) ?? 0;
      return { kind: "constant", index: n, extinction: k, material: constantMaterial(n, k) };
    }
    case "mixture": {
      const mixture = readMixture(reader, place, (part) => readMaterial(reader, part, PART_KEYS, readFile));
      return mixture && { kind: "mixture", ...mixture };
    }
    default: {
      const material = readFormula(reader, place, spelling);
      return material && { kind: spelling, material };
    }
  }
}

function numberIn(value: unknown): number | undefined {
  if (typeof value === "number") return value;
  const inside = typeof value === "object" && value !== null && "value" in value ? value.value : undefined;
  return typeof inside === "number" ? inside : undefined;
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
