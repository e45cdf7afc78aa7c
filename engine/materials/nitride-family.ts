/**
 * Silicon nitride as one family of films keyed by its index at 632.8 nm, the number the plant measures and steers.
 *
 * Between two measured members, at a fixed wavelength: n is linear in n(632.8), and so is ln k (k itself where either
 * member has k = 0). Interpolating measured tables keeps the film physical; interpolating oscillator parameters does not.
 * Philipp's data carry no measured k and so join in n only: taken as k = 0 they would wipe out absorption up to n = 2.13.
 * Reactors differ by a factor 1.5 to 2 in k at equal n, so absorption in the film is a guide, not a measurement.
 *
 * n is combined at any wavelength, so the index at 632.8 nm comes out as asked; k is combined at the rows of the tables and
 * then read as every table is. Where the lower member's k drops under its detection limit (480 nm) the rule changes from
 * logarithms to straight lines, and k of films in between steps up there, at n 2.05 from 0.001 to 0.005: a known flaw.
 *
 * Below the lowest and above the highest member the same lines are carried on from the last two members, to the limits in
 * `nitrideIndexRange`, and the material says `extrapolated`; k is never negative.
 */
import { indexWavelengthNm } from "../constants.ts";
import { finite, refuse } from "../errors.ts";
import { wavelengthGrid } from "../wavelength-grid.ts";
import { nitrideVogt2015n191 } from "./data/nitride-vogt-2015-n191.ts";
import { nitrideVogt2015n213 } from "./data/nitride-vogt-2015-n213.ts";
import { nitridePhilipp1973 } from "./data/sellmeier.ts";
import { sellmeierMaterial } from "./dispersion.ts";
import { type Material, requireInRange } from "./material.ts";
import { extinctionCurve, tabulated } from "./table.ts";

export interface NitrideMaterial extends Material {
  /** Index at 632.8 nm, exactly as asked. */
  readonly index: number;
  /** True when the index lies beyond the measured members. */
  readonly extrapolated: boolean;
}

/** Spacing of the rows of the measured tables, nm; k is combined at these. */
const rowNm = 10;

/** Indices at 632.8 nm the family answers for, extrapolated ends included. */
export const nitrideIndexRange: readonly [number, number] = [1.8, 2.3];

interface Member {
  material: Material;
  index: number;
}

function member(material: Material): Member {
  return { material, index: material.at(indexWavelengthNm).n };
}

interface Family {
  /** In order of index. */
  withIndex: readonly Member[];
  /** Those with a measured k. */
  withExtinction: readonly Member[];
  rangeNm: readonly [number, number];
  /** Wavelengths of the tables' rows within the range, nm. */
  rows: Float64Array;
  /** k of those with a measured k, at the rows. */
  extinction: readonly Float64Array[];
}

let made: Family | null = null;

/** Built when first needed: most verbs of the program never ask. */
function family(): Family {
  if (made) return made;
  const low = member(tabulated(nitrideVogt2015n191));
  const middle = member(sellmeierMaterial(nitridePhilipp1973));
  const high = member(tabulated(nitrideVogt2015n213));
  const ranges = [low, middle, high].map((m) => m.material.rangeNm);
  const first = Math.max(...ranges.map((r) => r[0]));
  const last = Math.min(...ranges.map((r) => r[1]));
  const rows = wavelengthGrid(first, last, rowNm);
  made = {
    withIndex: [low, middle, high],
    withExtinction: [low, high],
    rangeNm: [first, last],
    rows,
    extinction: [low, high].map((m) => rows.map((row) => m.material.at(row).k)),
  };
  return made;
}

const indexOf = (material: Material, wavelengthNm: number): number =>
  material.indexAt ? material.indexAt(wavelengthNm) : material.at(wavelengthNm).n;

/** Index of every member along a grid, kept as long as the grid is: a wafer asks for dozens of films on the same one. */
const membersAlong = new WeakMap<object, Float64Array[]>();

function membersOn(wavelengthNm: ArrayLike<number>): Float64Array[] {
  let known = membersAlong.get(wavelengthNm);
  if (!known) {
    known = family().withIndex.map(({ material }) => Float64Array.from(wavelengthNm, (nm) => indexOf(material, nm)));
    membersAlong.set(wavelengthNm, known);
  }
  return known;
}

/** Indices at 632.8 nm of the measured members, increasing: where the family's lines join. */
export function nitrideMemberIndices(): number[] {
  return family().withIndex.map((m) => m.index);
}

/** The two neighbouring members for an index, or the nearest two beyond the ends. */
function neighbours(members: readonly Member[], index: number): [Member, Member] {
  let i = 0;
  while (i < members.length - 2 && index > members[i + 1].index) i++;
  return [members[i], members[i + 1]];
}

/**
 * Silicon nitride whose index at 632.8 nm is `index`.
 * Refuses an index outside `nitrideIndexRange` ("index-out-of-range") and, through `at`, a wavelength that is not covered by
 * every member (250 to 1240 nm, "outside-table").
 * Source: M. R. Vogt (2015) for n and k, H. R. Philipp (1973) for n; the rule between them is this project's.
 */
export function siliconNitride(index: number): NitrideMaterial {
  finite(index, "silicon nitride index");
  if (index < nitrideIndexRange[0] || index > nitrideIndexRange[1]) {
    refuse(
      "index-out-of-range",
      `silicon nitride of index ${index} at 632.8 nm: the measured family carries from ${nitrideIndexRange[0]} to ${nitrideIndexRange[1]}`,
      { hint: "give the film as a table of wavelength_nm,n,k instead" },
    );
  }
  const { withIndex, withExtinction, rangeNm, rows, extinction } = family();
  const [n0, n1] = neighbours(withIndex, index);
  const [k0, k1] = neighbours(withExtinction, index);
  const nShare = (index - n0.index) / (n1.index - n0.index);
  const kShare = (index - k0.index) / (k1.index - k0.index);
  const [lower, upper] = [withExtinction.indexOf(k0), withExtinction.indexOf(k1)].map((i) => extinction[i]);
  const kRows: number[] = [];
  for (let i = 0; i < rows.length; i++) kRows.push(mixedExtinction(lower[i], upper[i], kShare));
  const kCurve = extinctionCurve(rows, kRows);
  return {
    name: "silicon nitride",
    source: "M. R. Vogt, PhD thesis (2015); H. R. Philipp, J. Electrochem. Soc. 120, 295 (1973)",
    rangeNm,
    index,
    extrapolated: index < withIndex[0].index || index > withIndex[withIndex.length - 1].index,
    at(wavelengthNm) {
      requireInRange("silicon nitride", rangeNm, wavelengthNm);
      const a = indexOf(n0.material, wavelengthNm);
      const b = indexOf(n1.material, wavelengthNm);
      return { n: a + nShare * (b - a), k: kCurve(wavelengthNm) };
    },
    along(wavelengthNm) {
      const count = wavelengthNm.length;
      for (let i = 0; i < count; i++) requireInRange("silicon nitride", rangeNm, wavelengthNm[i]);
      const members = membersOn(wavelengthNm);
      const a = members[withIndex.indexOf(n0)];
      const b = members[withIndex.indexOf(n1)];
      const n = new Float64Array(count);
      const k = new Float64Array(count);
      for (let i = 0; i < count; i++) {
        n[i] = a[i] + nShare * (b[i] - a[i]);
        k[i] = kCurve(wavelengthNm[i]);
      }
      return { n, k };
    },
  };
}

/** k of two films mixed: by logarithms where both absorb, straight and never negative where one does not. */
function mixedExtinction(a: number, b: number, share: number): number {
  return a > 0 && b > 0 ? Math.exp(Math.log(a) + share * Math.log(b / a)) : Math.max(0, a + share * (b - a));
}
