/**
 * The measured films the silicon-nitride family rests on. Philipp's data carry no measured k and so join in n only: taken as
 * k = 0 they would wipe out absorption up to n = 2.09.
 */
import { indexWavelengthNm } from "../constants.ts";
import { absorptionEdge } from "./absorption-edge.ts";
import { nitrideVogt2015n191 } from "./data/nitride-vogt-2015-n191.ts";
import { nitrideVogt2015n209 } from "./data/nitride-vogt-2015-n209.ts";
import { nitrideVogt2015n213 } from "./data/nitride-vogt-2015-n213.ts";
import { nitridePhilipp1973 } from "./data/sellmeier.ts";
import { sellmeierMaterial } from "./dispersion.ts";
import type { Material } from "./material.ts";
import type { NitrideMember } from "./nitride-rule.ts";
import { type MaterialData, tabulated } from "./table.ts";

interface Members {
  /** In order of index. */
  readonly members: readonly NitrideMember[];
  /** Wavelengths at which every member is known, nm. */
  readonly rangeNm: readonly [number, number];
  readonly source: string;
}

let made: Members | null = null;

/** Built when first needed: most verbs of the program never ask. */
export function nitrideMembers(): Members {
  if (made) return made;
  const measured = [nitrideVogt2015n191, nitrideVogt2015n209, nitrideVogt2015n213];
  const films: [Material, MaterialData | null][] = measured.map((data) => [tabulated(data), data]);
  films.push([sellmeierMaterial(nitridePhilipp1973), null]);
  const members = films.map(([material, data]): NitrideMember => {
    const indexAt = (wavelengthNm: number) => material.indexAt?.(wavelengthNm) ?? material.at(wavelengthNm).n;
    return { name: material.name, index: indexAt(indexWavelengthNm), indexAt, edge: data && absorptionEdge(data) };
  });
  made = {
    members: members.sort((a, b) => a.index - b.index),
    rangeNm: [
      Math.max(...films.map(([{ rangeNm }]) => rangeNm[0])),
      Math.min(...films.map(([{ rangeNm }]) => rangeNm[1])),
    ],
    source: "M. R. Vogt, PhD thesis (2015); H. R. Philipp, J. Electrochem. Soc. 120, 295 (1973)",
  };
  return made;
}
