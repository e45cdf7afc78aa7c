/**
 * The film of a stack file: its layers from the light inwards, each a material with a thickness. A thickness, and the index of
 * silicon nitride, may be left to be improved: "may be 40..120 nm", or "75 nm may be 40..120 nm" with the value it has now.
 */
import {
  type Dimension,
  type FilmUnknown,
  nitrideIndexRange,
  parseQuantity,
  parseRange,
  refuse,
} from "../../../engine/index.ts";
import { within } from "../goal-shape.ts";
import type { FileReader } from "../number-table.ts";
import { type Reader, read } from "../shape.ts";
import { readMaterial, type WrittenMaterial } from "./material.ts";

/** What a value may be made; `start` is the value it has now, null when none is written. */
export interface MayBe {
  from: number;
  to: number;
  start: number | null;
}

/** One layer as written. Where a value may be improved and none is written, it stands in the middle of its range. */
export type StackLayer = { thicknessNm: number; thicknessMayBe?: MayBe; indexMayBe?: MayBe } & WrittenMaterial;

interface Written {
  value: number;
  mayBe: MayBe | null;
}

/** Coherent films thicker than this are not searched: their loss has a valley every 150 nm. */
const THICKEST_SEARCHED_NM = 2000;

/** `checked` throws for a value out of bounds. Without `improve` a range alone is refused. */
function valueOrRange(dimension: Dimension, checked: (value: number) => number, most: number, improve: boolean) {
  return read((text): Written => {
    const words = /^(.*?)\bmay\s+be\b(.*)$/s.exec(text);
    if (!words) return { value: checked(parseQuantity(text, dimension).value), mayBe: null };
    const [, now, range] = words;
    const { low, high } = parseRange(range, dimension);
    checked(low);
    within(high, low, most, dimension === "length" ? "nm" : "");
    const start = now.trim() === "" ? null : parseQuantity(now, dimension).value;
    if (start !== null && !(start >= low && start <= high)) {
      refuse("start-outside", `"${text}": the value before may be lies outside the range`);
    }
    if (start === null && !improve) {
      const middle = `${Number(((low + high) / 2).toPrecision(3))}${dimension === "length" ? " nm" : ""}`;
      const hint = `add --improve, or give one value, alone or in front as in ${middle} ${text.trim()}`;
      refuse("needs-improve", `"${text}" leaves the value open`, { hint });
    }
    return { value: start ?? (low + high) / 2, mayBe: { from: low, to: high, start } };
  });
}

const thicknessOf = (improve: boolean) =>
  valueOrRange("length", (value) => within(value, 0, 100_000, "nm"), THICKEST_SEARCHED_NM, improve);
/** The nitride family's own bounds are judged where the material is made, so that a single index keeps its message. */
const nitrideIndexOf = (improve: boolean) =>
  valueOrRange("number", (value) => within(value, 0.05, 10, ""), nitrideIndexRange[1], improve);

/** Reads the layers; undefined when one of them is wrong, with the problems kept in the reader. */
export function readFilm(
  reader: Reader,
  readFile: FileReader | undefined,
  { improve = false }: { improve?: boolean } = {},
): StackLayer[] | undefined {
  const list = reader.at(["film"]);
  if (!Array.isArray(list)) {
    const what = list === undefined ? '"film" is missing' : "film must be a list of layers";
    const code = list === undefined ? "missing-key" : "wrong-type";
    reader.add(["film"], code, what, "one layer a row, as in - { material: silica, thickness: 90 nm }");
    return undefined;
  }
  const layers = list.map((_, i) => readLayer(reader, i, readFile, improve));
  return layers.every((layer) => layer !== undefined) ? (layers as StackLayer[]) : undefined;
}

function readLayer(
  reader: Reader,
  i: number,
  readFile: FileReader | undefined,
  improve: boolean,
): StackLayer | undefined {
  const path = ["film", i];
  const isNitride = reader.at([...path, "material"]) === "silicon nitride";
  const indexWritten = reader.at([...path, "index"]);
  if (!isNitride && typeof indexWritten === "string" && /\bmay\s+be\b/.test(indexWritten)) {
    const hint = "only material: silicon nitride is a family of films whose index can be chosen";
    reader.add([...path, "index"], "not-a-family", `"${indexWritten}": this index cannot be improved`, hint);
    return undefined;
  }
  const more = {
    thickness: thicknessOf(improve),
    ...(isNitride && indexWritten !== undefined ? { index: nitrideIndexOf(improve) } : {}),
  };
  const layer = readMaterial(reader, path, more, readFile);
  if (!layer) return undefined;
  const { given, ...material } = layer;
  const thickness = given.thickness as Written;
  const index = given.index as Written | undefined;
  if (index?.mayBe) {
    const { from } = index.mayBe;
    const known = () => within(from, nitrideIndexRange[0], nitrideIndexRange[1], "");
    if (reader.attempt([...path, "index"], known) === undefined) return undefined;
  }
  return {
    ...material,
    thicknessNm: thickness.value,
    ...(thickness.mayBe ? { thicknessMayBe: thickness.mayBe } : {}),
    ...(index?.mayBe ? { indexMayBe: index.mayBe } : {}),
  };
}

/** What may be improved, from the light inwards, thickness before index. */
export function filmUnknowns(film: readonly StackLayer[]): FilmUnknown[] {
  return film.flatMap(({ thicknessMayBe, indexMayBe }, layer): FilmUnknown[] => [
    ...(thicknessMayBe ? [{ layer, what: "thickness" as const, ...thicknessMayBe }] : []),
    ...(indexMayBe ? [{ layer, what: "index" as const, ...indexMayBe }] : []),
  ]);
}
