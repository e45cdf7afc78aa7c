/**
 * Dielectric function and complex index, one into the other, for the materials that are reckoned in the first. Both follow
 * the house's sign: eps = eps1 - i eps2 = (n - ik)^2 with eps2 >= 0.
 */
import { refuse } from "../errors.ts";
import type { OpticalConstants } from "./material.ts";

export interface Dielectric {
  eps1: number;
  /** Absorbs when positive. */
  eps2: number;
}

/** (n - ik)^2. */
export function dielectricOf({ n, k }: OpticalConstants): Dielectric {
  return { eps1: (n - k) * (n + k), eps2: 2 * n * k };
}

/**
 * n - ik from eps1 - i eps2, the small one of n and k by division so that no digits cancel. Refuses ("material-value") eps2 < 0
 * and what leaves no n above 0 (an ideal metal without loss); `name` is for the message.
 */
export function indexFrom({ eps1, eps2 }: Dielectric, name: string): OpticalConstants {
  const modulus = Math.hypot(eps1, eps2);
  const large = Math.sqrt((modulus + Math.abs(eps1)) / 2);
  const small = large > 0 ? eps2 / (2 * large) : 0;
  const [n, k] = eps1 >= 0 ? [large, small] : [small, large];
  if (!(n > 0 && eps2 >= 0)) {
    refuse("material-value", `${name}: a dielectric function of ${eps1} - ${eps2}i leaves no index`);
  }
  return { n, k };
}
