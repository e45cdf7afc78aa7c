/** What a stack is seen from: air, glass, a medium of one index, or a list of thick layers, outermost first. */
import * as z from "zod/mini";
import {
  type FilmStackDescription,
  type Material,
  parseQuantity,
  type ThickLayer,
  ThickLayers,
} from "../../../engine/index.ts";
import { within } from "../goal-shape.ts";
import type { FileReader } from "../number-table.ts";
import { type Reader, read } from "../shape.ts";
import type { YamlPath } from "../yaml.ts";
import { readMaterial } from "./material.ts";

// the engine divides by indices; a real index of zero is no transparent medium
const index = read((text) => within(parseQuantity(text, "number").value, 0.05, 10, ""));

/** Thinner is no incoherent layer: under some 10 um sunlight still interferes. Thicker than 20 mm is no front of a module. */
const THICK_MM = [0.01, 20] as const;
const NM_PER_MM = 1e6;
const HINT = "thick layers are glass and encapsulant, as in thickness: 3.2 mm; thin ones belong into film";
const thickness = read(
  (text) => within(parseQuantity(text, "length").value / NM_PER_MM, ...THICK_MM, "mm", HINT) * NM_PER_MM,
);
const KNOWN = "air, glass, { index: 1.5 }, or a list as in - { material: glass, thickness: 3.2 mm }";

/**
 * Reads `seen_from`; undefined when it is wrong, with every problem kept in the reader. `gridNm` are the wavelengths the thick
 * layers must be clear and known at; left out when the light itself is wrong, and then that is not judged.
 */
export function readSeenFrom(
  reader: Reader,
  gridNm: Float64Array | undefined,
  readFile: FileReader | undefined,
): FilmStackDescription["seenFrom"] | undefined {
  const path = ["seen_from"];
  const value = reader.at(path);
  if (value === undefined || value === "air") return "air";
  if (value === "glass") return "glass";
  if (Array.isArray(value)) {
    if (value.length === 0) reader.add(path, "no-layers", "the list of thick layers is empty", KNOWN);
    const thick = value.map((_, i) => readThick(reader, [...path, i], gridNm, readFile));
    return thick.length > 0 && thick.every((layer) => layer !== undefined) ? { thick } : undefined;
  }
  if (typeof value === "object" && value !== null) return reader.shaped(z.strictObject({ index }), path);
  reader.add(path, "wrong-value", `seen_from: "${value}" is not known here`, KNOWN);
  return undefined;
}

function readThick(
  reader: Reader,
  path: YamlPath,
  gridNm: Float64Array | undefined,
  readFile: FileReader | undefined,
): ThickLayer | undefined {
  const written = readMaterial(reader, path, { thickness }, readFile) as
    | { material: Material; thicknessNm: number }
    | undefined;
  if (!written) return undefined;
  const layer = { material: written.material, thicknessMm: written.thicknessNm / NM_PER_MM };
  // the engine's own judgement of each layer, at the row of that layer
  return gridNm ? reader.attempt(path, () => new ThickLayers(gridNm, [layer]) && layer) : layer;
}
