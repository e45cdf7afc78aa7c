/**
 * Bruggeman's effective medium: a film that is an intimate mixture (voids in a film, silicon in a nitride), all components on
 * an equal footing. The mixture's eps solves sum f_i (e_i - eps) / (e_i + 2 eps) = 0, f_i the shares of volume.
 * Source: D. A. G. Bruggeman, Ann. Phys. 416, 636 (1935). It holds for grains much smaller than the wavelength.
 *
 * Of the roots one is physical: the one in the cone that the components span in the complex plane (a mixture turns the
 * field's phase no further than its extreme components do), which for k >= 0 and n > 0 lies within half a plane. For two
 * components the other root is -e1 e2 / (2 eps), a quarter turn or more away, so the choice is never in doubt.
 */
import { finite, refuse } from "../errors.ts";
import { angle, type Complex, modulus, product, quotient, scaled, squareRoot, sum } from "./complex.ts";
import { type Dielectric, dielectricOf, indexFrom } from "./complex-index.ts";
import type { Material, OpticalConstants } from "./material.ts";

/** A component of a mixture and its share of the volume, 0 to 1. */
export interface MixturePart {
  material: Material;
  share: number;
}

/** Two components: the quadratic 2 eps^2 - b eps - e1 e2 = 0, the physical root. */
function ofTwo([e1, e2]: readonly Complex[], [f1, f2]: readonly number[]): Complex {
  const b = sum(scaled(e1, 3 * f1 - 1), e2, 3 * f2 - 1);
  const both = product(e1, e2);
  const root = squareRoot(sum(product(b, b), both, 8));
  // The larger root first, the other by their product: no digits cancel.
  const away = b.re * root.re + b.im * root.im >= 0 ? 1 : -1;
  const one = scaled(sum(b, root, away), 1 / 4);
  const other = quotient(scaled(both, -1 / 2), one);
  const middle = (angle(e1) + angle(e2)) / 2;
  const turned = (a: Complex): number => Math.abs(Math.atan2(Math.sin(angle(a) - middle), Math.cos(angle(a) - middle)));
  return turned(one) <= turned(other) ? one : other;
}

/** sum f (e - eps) / (e + 2 eps), and its slope in eps. */
function balance(eps: readonly Complex[], shares: readonly number[], at: Complex): { value: Complex; slope: Complex } {
  let value: Complex = { re: 0, im: 0 };
  let slope: Complex = { re: 0, im: 0 };
  eps.forEach((e, i) => {
    const inverse = quotient({ re: 1, im: 0 }, sum(e, at, 2));
    value = sum(value, product(sum(e, at, -1), inverse), shares[i]);
    slope = sum(slope, product(product(e, inverse), inverse), -3 * shares[i]);
  });
  return { value, slope };
}

/** Rounds of averaging at most before Newton takes over (a dozen for films, hundreds for nearly lossless metals), and of Newton. */
const averagings = 2000;
const newtonSteps = 30;

/**
 * Any number of components: averaging, eps + 2 eps' = 1 / sum(f / (e + 2 eps')), which stays in the components' cone, brings
 * eps near; Newton's method finishes. Refuses ("mixture-root") when that ends outside the cone or short of the root.
 */
function ofMany(eps: readonly Complex[], shares: readonly number[]): Complex {
  let at = eps.reduce((total, e, i) => sum(total, e, shares[i]), { re: 0, im: 0 });
  for (let round = 0; round < averagings; round++) {
    const inverse = eps.reduce((total, e, i) => sum(total, quotient({ re: shares[i], im: 0 }, sum(e, at, 2))), {
      re: 0,
      im: 0,
    });
    const next = sum(quotient({ re: 1, im: 0 }, inverse), at, -2);
    const moved = modulus(sum(next, at, -1));
    at = next;
    if (moved < 1e-6 * modulus(at)) break;
  }
  for (let step = 0; step < newtonSteps; step++) {
    const { value, slope } = balance(eps, shares, at);
    const change = quotient(value, slope);
    at = sum(at, change, -1);
    if (modulus(change) < 1e-15 * modulus(at)) break;
  }
  const angles = eps.map(angle);
  const slack = 1e-9;
  const inCone = angle(at) >= Math.min(...angles) - slack && angle(at) <= Math.max(...angles) + slack;
  if (!(inCone && modulus(balance(eps, shares, at).value) < 1e-10)) {
    refuse("mixture-root", "the effective medium of these components was not found");
  }
  return at;
}

/**
 * Effective dielectric function of components in these shares of the volume. Refuses lists of different length or empty
 * ("bad-mixture"), shares that are not finite ("not-a-number"), negative or not summing to 1 within 1e-9 ("mixture-shares").
 */
export function bruggeman(components: readonly Dielectric[], shares: readonly number[]): Dielectric {
  checkShares(components.length, shares);
  const present = components.map((_, i) => i).filter((i) => shares[i] > 0);
  const eps = present.map((i) => ({ re: components[i].eps1, im: -components[i].eps2 }));
  const parts = present.map((i) => shares[i]);
  if (eps.length === 1) return components[present[0]];
  const { re, im } = eps.length === 2 ? ofTwo(eps, parts) : ofMany(eps, parts);
  // Transparent components leave an im of rounding size at most.
  return { eps1: re, eps2: Math.max(0, -im) };
}

/** The same by the solver for many, also for two: the two ways check each other. */
export function bruggemanByIteration(components: readonly Dielectric[], shares: readonly number[]): Dielectric {
  checkShares(components.length, shares);
  const eps = components.map(({ eps1, eps2 }) => ({ re: eps1, im: -eps2 }));
  const { re, im } = ofMany(eps, shares);
  return { eps1: re, eps2: Math.max(0, -im) };
}

function checkShares(count: number, shares: readonly number[]): void {
  if (count === 0 || shares.length !== count) {
    refuse("bad-mixture", `a mixture needs a share for each component: ${count} components, ${shares.length} shares`);
  }
  for (const share of shares) {
    finite(share, "share");
    if (share < 0) refuse("mixture-shares", `a share of ${share} is negative`);
  }
  const total = shares.reduce((before, share) => before + share, 0);
  if (Math.abs(total - 1) > 1e-9) refuse("mixture-shares", `the shares add up to ${total}, not to 1`);
}

/**
 * A mixture of materials, known where all of them are. Refuses as `bruggeman`, and ("mixture-range") components that are
 * known at no common wavelength.
 */
export function mixtureMaterial(parts: readonly MixturePart[], name?: string): Material {
  const shares = parts.map((part) => part.share);
  checkShares(parts.length, shares);
  const rangeNm: readonly [number, number] = [
    Math.max(...parts.map(({ material }) => material.rangeNm[0])),
    Math.min(...parts.map(({ material }) => material.rangeNm[1])),
  ];
  if (!(rangeNm[0] < rangeNm[1])) {
    refuse("mixture-range", `the components of the mixture are known at no common wavelength`);
  }
  const percent = (share: number): string => `${Number((100 * share).toPrecision(4))} %`;
  const called = name ?? `mixture of ${parts.map((part) => `${part.material.name} ${percent(part.share)}`).join(", ")}`;
  const extrapolations = parts.flatMap(({ material }) => material.extrapolations ?? []);
  const sources = [...new Set(parts.map(({ material }) => material.source))].join("; ");
  const at = (wavelengthNm: number): OpticalConstants => {
    const components = parts.map(({ material }) => dielectricOf(material.at(wavelengthNm)));
    return indexFrom(bruggeman(components, shares), called);
  };
  return {
    name: called,
    source: `effective medium of D. A. G. Bruggeman (1935) from: ${sources}`,
    rangeNm,
    ...(extrapolations.length > 0 ? { extrapolations } : {}),
    at,
  };
}
