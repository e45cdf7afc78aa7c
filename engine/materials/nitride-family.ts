/**
 * Silicon nitride as one family of films keyed by its index at 632.8 nm, the number the plant measures and steers.
 *
 * Three films of one laboratory give n and k, one more gives n (`nitride-members.ts`); between and beyond them the rule of
 * `nitride-rule.ts` holds: n straight in the index at a fixed wavelength, so that the index at 632.8 nm comes out as asked;
 * k along the absorption edge, continuous everywhere. Interpolating measured films keeps the film physical;
 * interpolating oscillator parameters does not.
 *
 * How far to trust it: the film of index 2.088, predicted from its two neighbours, would absorb 0.24 mA/cm2 (75 nm, polished)
 * and absorbs 0.165; a film of another reactor (Beliaev et al., 2022, index 2.019) absorbs nothing above 291 nm. n is good to
 * some hundredths at 300 nm and some thousandths in the visible. Absorption in the film is a guide, not a measurement.
 *
 * Beyond the lowest and highest member the lines are carried on, to `nitrideIndexRange`, and the material says `extrapolated`.
 */
import { finite, refuse } from "../errors.ts";
import { type Material, type OpticalConstantsOnGrid, requireInRange } from "./material.ts";
import { nitrideMembers } from "./nitride-members.ts";
import { edgeAt, indexPair } from "./nitride-rule.ts";
import { photonEnergyEv } from "./photon-energy.ts";

export interface NitrideMaterial extends Material {
  /** Index at 632.8 nm, exactly as asked. */
  readonly index: number;
  /** True when the index lies beyond the measured members. */
  readonly extrapolated: boolean;
  along(wavelengthNm: ArrayLike<number>): OpticalConstantsOnGrid;
}

/** Indices at 632.8 nm the family answers for, extrapolated ends included. */
export const nitrideIndexRange: readonly [number, number] = [1.8, 2.3];

const name = "silicon nitride";

/** Index of every member along a grid, kept as long as the grid is: a wafer asks for dozens of films on the same one. */
const membersAlong = new WeakMap<object, readonly Float64Array[]>();

function membersOn(wavelengthNm: ArrayLike<number>): readonly Float64Array[] {
  const known = membersAlong.get(wavelengthNm);
  if (known) return known;
  const made = nitrideMembers().members.map(({ indexAt }) => Float64Array.from(wavelengthNm, indexAt));
  membersAlong.set(wavelengthNm, made);
  return made;
}

/** Indices at 632.8 nm of the measured members, increasing: where the family's lines join. */
export function nitrideMemberIndices(): number[] {
  return nitrideMembers().members.map((member) => member.index);
}

/**
 * Silicon nitride whose index at 632.8 nm is `index`.
 * Refuses an index outside `nitrideIndexRange` ("index-out-of-range") and, through `at`, a wavelength that is not covered by
 * every member (250 to 1240 nm, "outside-table").
 * Source: M. R. Vogt (2015) for n and k, H. R. Philipp (1973) for n; the rule between them is this project's.
 */
export function siliconNitride(index: number): NitrideMaterial {
  requireIndex(index);
  const { members, rangeNm, source } = nitrideMembers();
  const { first, second, share } = indexPair(members, index);
  const edge = edgeAt(members, index);
  return {
    name,
    source,
    rangeNm,
    index,
    extrapolated: index < members[0].index || index > members[members.length - 1].index,
    at(wavelengthNm) {
      requireInRange(name, rangeNm, wavelengthNm);
      const a = first.indexAt(wavelengthNm);
      const b = second.indexAt(wavelengthNm);
      return { n: a + share * (b - a), k: edge.extinctionAt(photonEnergyEv(wavelengthNm)) };
    },
    along(wavelengthNm) {
      const count = wavelengthNm.length;
      for (let i = 0; i < count; i++) requireInRange(name, rangeNm, wavelengthNm[i]);
      const known = membersOn(wavelengthNm);
      const a = known[members.indexOf(first)];
      const b = known[members.indexOf(second)];
      const n = new Float64Array(count);
      const k = new Float64Array(count);
      for (let i = 0; i < count; i++) {
        n[i] = a[i] + share * (b[i] - a[i]);
        k[i] = edge.extinctionAt(photonEnergyEv(wavelengthNm[i]));
      }
      return { n, k };
    },
  };
}

function requireIndex(index: number): void {
  finite(index, "silicon nitride index");
  if (index >= nitrideIndexRange[0] && index <= nitrideIndexRange[1]) return;
  refuse(
    "index-out-of-range",
    `silicon nitride of index ${index} at 632.8 nm: the measured family carries from ${nitrideIndexRange[0]} to ${nitrideIndexRange[1]}`,
    { hint: "give the film as a table of wavelength_nm,n,k instead" },
  );
}

/** Half the width of the difference that gives dk/dindex: small against a piece (0.04), large against rounding. */
const differenceStep = 1e-5;

/**
 * What one unit of index at 632.8 nm does to n and k along a grid of wavelengths (nm): dn/dindex exactly, it is constant in a
 * piece; dk/dindex from three films 1e-5 apart inside the piece (a parabola through them), accurate to 2e-6
 * where slopes reach 5.5. At a member, where the lines join, the slopes are those of the piece above it, at the highest
 * one those towards the extrapolated films, at the end of the range those from below. Refuses as `siliconNitride` does.
 */
export function nitrideSlopes(index: number, wavelengthNm: ArrayLike<number>): { n: Float64Array; k: Float64Array } {
  requireIndex(index);
  const { members, rangeNm } = nitrideMembers();
  const count = wavelengthNm.length;
  for (let i = 0; i < count; i++) requireInRange(name, rangeNm, wavelengthNm[i]);
  const known = membersOn(wavelengthNm);
  const { first, second } = indexPair(members, index);
  const [a, b] = [known[members.indexOf(first)], known[members.indexOf(second)]];
  const n = Float64Array.from(a, (value, i) => (b[i] - value) / (second.index - first.index));

  const joins = members.filter((member) => member.edge !== null).map((member) => member.index);
  const low = joins.filter((join) => join <= index).at(-1) ?? nitrideIndexRange[0];
  const high = joins.find((join) => join > index) ?? nitrideIndexRange[1];
  // At the end of the range the piece has no width above; there and at a join the three films lie to one side.
  const centre = Math.min(high - differenceStep, Math.max(low + differenceStep, index));
  const edges = [-1, 0, 1].map((side) => edgeAt(members, centre + side * differenceStep));
  const t = (index - centre) / differenceStep;
  const k = Float64Array.from(wavelengthNm, (nm) => {
    const [below, here, above] = edges.map((edge) => edge.extinctionAt(photonEnergyEv(nm)));
    return ((above - below) / 2 + t * (above - 2 * here + below)) / differenceStep;
  });
  return { n, k };
}
