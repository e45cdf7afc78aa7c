/**
 * The absorption edge of a film known from a table: k against photon energy from the gap, where it begins, to the last row.
 * Role: between two measured films k is not mixed at equal energy but at equal place along the edge, so that the gap moves
 * with the mix, and nothing jumps where one film still absorbs and the other does not.
 *
 * The gap is where sqrt(k) of the last two absorbing rows, carried on, reaches zero: near the gap of an amorphous film
 * sqrt(k) grows straight with energy (J. Tauc, R. Grigorovici and A. Vancu, Phys. Status Solidi 15, 627 (1966)). Between rows
 * sqrt(k) is read by the monotone cubic, over energy.
 */
import { refuse } from "../errors.ts";
import { monotoneCubic } from "../numerics/interpolate.ts";
import { photonEnergyEv } from "./photon-energy.ts";
import type { MaterialData } from "./table.ts";

export interface AbsorptionEdge {
  /** k is zero at and below this photon energy, eV. */
  readonly gapEv: number;
  /** Highest photon energy known, eV. */
  readonly lastEv: number;
  /** k at a photon energy in eV up to `lastEv`, and held beyond (rounding only; callers check the wavelength). */
  extinctionAt(energyEv: number): number;
}

/**
 * The edge of a table. Refuses ("edge-table") a table that does not absorb in an unbroken run from its first row (the
 * shortest wavelength) down to zero, or whose last two absorbing rows do not point to a gap before the first row with k = 0.
 */
export function absorptionEdge({ name, rows }: MaterialData): AbsorptionEdge {
  const clear = rows.findIndex(([, , k]) => k === 0);
  if (clear < 2 || rows.slice(clear).some(([, , k]) => k !== 0)) {
    refuse("edge-table", `${name}: k does not fall to zero once, from its first row on`);
  }
  const energy = rows.slice(0, clear).map(([wavelengthNm]) => photonEnergyEv(wavelengthNm));
  const root = rows.slice(0, clear).map(([, , k]) => Math.sqrt(k));
  const slope = (root[clear - 2] - root[clear - 1]) / (energy[clear - 2] - energy[clear - 1]);
  const gapEv = energy[clear - 1] - root[clear - 1] / slope;
  if (!(gapEv < energy[clear - 1] && gapEv >= photonEnergyEv(rows[clear][0]))) {
    refuse("edge-table", `${name}: its last rows with k above 0 do not point to a gap before its first row without`);
  }
  const curve = monotoneCubic([gapEv, ...energy.reverse()], [0, ...root.reverse()]);
  const lastEv = energy[energy.length - 1];
  return {
    gapEv,
    lastEv,
    extinctionAt: (energyEv) => (energyEv <= gapEv ? 0 : curve(Math.min(energyEv, lastEv)) ** 2),
  };
}

/**
 * The edge a share of the way from one film to another (0 the first, 1 the second, beyond either carried on): gap and last
 * energy straight in the share, and ln k straight in it at equal place (energy - gap) / (last - gap). Both films vanish
 * together at place 0, so the logarithms never meet a zero alone. Refuses a share at which no edge is left ("edge-share").
 */
export function mixedEdge(first: AbsorptionEdge, second: AbsorptionEdge, share: number): AbsorptionEdge {
  const gapEv = first.gapEv + share * (second.gapEv - first.gapEv);
  const lastEv = first.lastEv + share * (second.lastEv - first.lastEv);
  if (!(gapEv > 0 && gapEv < lastEv)) refuse("edge-share", `at a share of ${share} the gap would be ${gapEv} eV`);
  return {
    gapEv,
    lastEv,
    extinctionAt(energyEv) {
      const place = Math.min(1, (energyEv - gapEv) / (lastEv - gapEv));
      if (place <= 0) return 0;
      const a = first.extinctionAt(first.gapEv + place * (first.lastEv - first.gapEv));
      const b = second.extinctionAt(second.gapEv + place * (second.lastEv - second.gapEv));
      // Within rounding of the gap one of the two may be zero already.
      return a > 0 && b > 0 ? a * (b / a) ** share : 0;
    },
  };
}
