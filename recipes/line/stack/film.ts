/** The film of a stack file: its layers from the light inwards, each a material with a thickness. */
import { parseQuantity, refuse } from "../../../engine/index.ts";
import { within } from "../goal-shape.ts";
import type { FileReader } from "../number-table.ts";
import { type Reader, read } from "../shape.ts";
import { readMaterial, type WrittenMaterial } from "./material.ts";

/** One layer as written. */
export type StackLayer = { thicknessNm: number } & WrittenMaterial;

const thickness = read((text) => {
  if (/^\s*may\s+be\b/.test(text)) {
    refuse("not-available", `"${text}": improving a thickness is not available yet`, { hint: "give one thickness" });
  }
  return within(parseQuantity(text, "length").value, 0, 100_000, "nm");
});
/** Reads the layers; undefined when one of them is wrong, with the problems kept in the reader. */
export function readFilm(reader: Reader, readFile: FileReader | undefined): StackLayer[] | undefined {
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
