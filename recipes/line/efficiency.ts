/**
 * The weight of sunlight as line and stack files spell it: photons, power, or a file beside them with the cell's internal
 * quantum efficiency (`wavelength_nm,efficiency`).
 */
import { Refusal } from "../../engine/index.ts";
import type { Light } from "./line.ts";
import { type FileReader, openBeside, readNumberTable } from "./number-table.ts";
import type { Reader } from "./shape.ts";

/**
 * Reads the weight written at `light: weight:` for light from `fromNm` to `toNm`; undefined when it is wrong, with the problems
 * kept in the reader. Problems inside the table name the table's own rows; only a file that cannot be opened, or that does not
 * cover the light, is a problem of the row that names it.
 */
export function readWeight(
  reader: Reader,
  weight: string,
  { fromNm, toNm }: Pick<Light, "fromNm" | "toNm">,
  readFile: FileReader | undefined,
): Light["weight"] | undefined {
  const path = ["light", "weight"];
  if (weight === "photons" || weight === "power") return weight;
  if (!/\.csv$/i.test(weight)) {
    const hint = "photons, power, or a file as in quantum-efficiency.csv";
    reader.add(path, "wrong-value", `weight: "${weight}" is not a weighting known here`, hint);
    return undefined;
  }
  const source = reader.attempt(path, () => openBeside(weight, readFile));
  if (source === undefined) return undefined;
  try {
    const { wavelength_nm, efficiency } = readNumberTable(source, weight, {
      wavelength_nm: [1, 1e6],
      efficiency: [0, 1],
    });
    const [first, last] = [wavelength_nm[0], wavelength_nm[wavelength_nm.length - 1]];
    if (first > fromNm || last < toNm) {
      const message = `${weight} covers ${first} to ${last} nm, the light goes from ${fromNm} to ${toNm} nm`;
      reader.add(path, "table-too-short", message, "shorten the light, or lengthen the table");
      return undefined;
    }
    return { file: weight, wavelengthNm: wavelength_nm, efficiency };
  } catch (error) {
    if (!(error instanceof Refusal)) throw error;
    reader.problems.push(...error.problems);
    return undefined;
  }
}
