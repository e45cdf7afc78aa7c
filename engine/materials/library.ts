/**
 * The materials a person can name, in one table: to add one, put its numbers in `data/` and a line here.
 */
import { refuse } from "../errors.ts";
import { aluminaZhukovsky2015 } from "./data/alumina-zhukovsky-2015.ts";
import { amorphousSiliconPierce1972 } from "./data/amorphous-silicon-pierce-1972.ts";
import { encapsulantVogt2016 } from "./data/encapsulant-vogt-2016.ts";
import { glassVogt2016 } from "./data/glass-vogt-2016.ts";
import { silicaMalitson1965 } from "./data/sellmeier.ts";
import { siliconGreen2008 } from "./data/silicon-green-2008.ts";
import { titaniaSiefke2016 } from "./data/titania-siefke-2016.ts";
import { constantMaterial, sellmeierMaterial } from "./dispersion.ts";
import type { Material } from "./material.ts";
import { siliconNitride } from "./nitride-family.ts";
import { tabulated } from "./table.ts";

const makers: Readonly<Record<string, () => Material>> = {
  air: () => constantMaterial(1, 0, "air"),
  silicon: () => tabulated(siliconGreen2008),
  silica: () => sellmeierMaterial(silicaMalitson1965),
  alumina: () => tabulated(aluminaZhukovsky2015),
  titania: () => tabulated(titaniaSiefke2016),
  "amorphous silicon": () => tabulated(amorphousSiliconPierce1972),
  glass: () => tabulated(glassVogt2016),
  encapsulant: () => tabulated(encapsulantVogt2016),
};
const made = new Map<string, Material>();

const nitrideName = "silicon nitride";

/** Names that `materialByName` knows, in the order people meet them. */
export const materialNames: readonly string[] = [nitrideName, ...Object.keys(makers)];

/**
 * A material of the library by name. `index` (at 632.8 nm) belongs to silicon nitride, which cannot do without, and to no
 * other. Refuses an unknown name ("unknown-material") and an index missing or too many ("material-index").
 */
export function materialByName(name: string, options: { index?: number } = {}): Material {
  if (name === nitrideName) {
    if (options.index === undefined) {
      refuse("material-index", "silicon nitride needs its index at 632.8 nm", { hint: "for instance index: 2.09" });
    }
    return siliconNitride(options.index);
  }
  if (!Object.hasOwn(makers, name)) {
    refuse("unknown-material", `material "${name}" is not known`, { hint: `known: ${materialNames.join(", ")}` });
  }
  if (options.index !== undefined) {
    refuse("material-index", `${name} comes from a table and takes no index`, { hint: "only silicon nitride does" });
  }
  let material = made.get(name);
  if (!material) {
    material = makers[name]();
    made.set(name, material);
  }
  return material;
}
