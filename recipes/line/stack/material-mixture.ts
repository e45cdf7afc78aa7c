/** A mixture of materials in a stack file: a list of materials, each with its share of the volume, that add up to 100 %. */
import { type Material, mixtureMaterial, parseQuantity } from "../../../engine/index.ts";
import { within } from "../goal-shape.ts";
import { type Reader, read } from "../shape.ts";
import type { YamlPath } from "../yaml.ts";

/** A component as it comes back from the reader of materials. */
export interface ReadPart {
  material: Material;
  given: { share?: unknown };
}

/** The keys a component has beside its material. */
export const PART_KEYS = { share: read((text) => within(parseQuantity(text, "percent").value, 0, 100, "%")) };

const HINT = "as in mixture: [ { material: silica, share: 30 % }, { index: 2.4, share: 70 % } ]";
/** Shares are typed in percent with a few decimals; what they miss of 100 % by rounding of the sum is far below this. */
const SLACK_PERCENT = 1e-6;

/**
 * Reads the mixture at a path (that of the list); undefined when it is wrong, with the problems kept in the reader.
 * `readPart` reads one component with the keys of `PART_KEYS`.
 */
export function readMixture(
  reader: Reader,
  path: YamlPath,
  readPart: (path: YamlPath) => ReadPart | undefined,
): { material: Material; parts: { material: Material; share: number }[] } | undefined {
  const list = reader.at(path);
  if (!Array.isArray(list)) {
    reader.add(path, "wrong-type", "mixture must be a list of materials with shares", HINT);
    return undefined;
  }
  if (list.length < 2) {
    reader.add(path, "mixture-parts", "a mixture needs at least two materials", HINT);
    return undefined;
  }
  const read = list.map((part, i) => {
    const place = [...path, i];
    if (typeof part === "object" && part !== null && Object.hasOwn(part, "mixture")) {
      const hint = "write its materials into this mixture, with their shares of the whole";
      reader.add([...place, "mixture"], "nested-mixture", "a mixture in a mixture is not read", hint, "key");
      return undefined;
    }
    return readPart(place);
  });
  if (read.some((part) => part === undefined)) return undefined;
  const parts = (read as ReadPart[]).map(({ material, given }) => ({ material, share: Number(given.share) }));
  const sum = parts.reduce((total, { share }) => total + share, 0);
  if (Math.abs(sum - 100) > SLACK_PERCENT) {
    const shown = Number(sum.toPrecision(8));
    reader.add(path, "mixture-shares", `the shares of the mixture add up to ${shown} %, not to 100 %`, HINT);
    return undefined;
  }
  const fractions = parts.map(({ material, share }) => ({ material, share: share / sum }));
  const material = reader.attempt(path, () => mixtureMaterial(fractions));
  return material && { material, parts: fractions };
}
