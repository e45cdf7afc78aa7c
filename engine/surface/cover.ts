/**
 * Thick incoherent layers in front of a surface, for each way light leaves that surface: what comes in, what gets back out,
 * and what is sent down again.
 *
 * A polished surface mirrors light at the angle it came. Pyramids send it up in a few known directions, one a way of bouncing,
 * so it passes the layers aslant, partly or totally reflected at the outer face and at every interface between. Within the flat
 * layers s and p light keep apart, so the sums over all passes are made for each and then averaged.
 *
 * With f_i the fraction of way i, rho_i the product of its bounce reflectances and T the transmittance of the surface,
 *
 *   R = front + enters S_L / (1 - S_B),   T' = enters T / (1 - S_B),   S_L = sum f_i rho_i leaves_i,   S_B = sum f_i rho_i returns_i.
 *
 * On a polished surface this is exact. On pyramids it holds two approximations, measured under glass for facets of 50 to 56 deg
 * (test/engine/surface/cover-limits.test.ts):
 * - light the layers send back is taken to meet the texture as the first light did, straight down, though it comes aslant: off by
 *   at most 0.1 % absolute at any wavelength on bare silicon, 0.02 % under a film (the light was followed by ray tracing);
 * - light leaves a pyramid unpolarised, as `pyramids.ts` takes it at each bounce, though after two facing facets it is mostly s,
 *   which leaves less: R too high by up to 0.3 % absolute weighted on bare silicon (at 54.74 deg), 0.02 % under a film.
 */
import { finite, refuse } from "../errors.ts";
import type { Polarisation } from "../optics/fresnel.ts";
import { ThickLayers, type ThickLight } from "../optics/thick-layers.ts";
import { innermostIndex, type SeenFrom, thickLayersOf } from "./seen-from.ts";

export interface CoverLight {
  /** Real index of the innermost thick layer, or of the medium without layers: what the film sees. One a wavelength. */
  readonly innerIndex: Float64Array;
  /** Angle in it, radians, for the light going in. */
  readonly innerAngleRad: Float64Array;
  /** Reflected without ever having reached the surface below. */
  readonly front: Float64Array;
  /** Of the incident light, what arrives at the surface for the first time. */
  readonly enters: Float64Array;
  /** One array a way of leaving the surface (the order of PathSum.paths): of light leaving that way, what gets out ... */
  readonly leaves: readonly Float64Array[];
  /** ... and what comes back down to the surface. The rest is absorbed in the thick layers. */
  readonly returns: readonly Float64Array[];
  /** How many thick layers there are; 0 means that nothing is in front, and the other arrays say so. */
  readonly layers: number;
  /** Of the incident light, absorbed in each thick layer (outermost first) before any reached the surface: [layer]. */
  readonly absorbedGoingIn: readonly Float64Array[];
  /** Of light leaving the surface by a way, absorbed in each thick layer before it is out or down again: [way][layer]. */
  readonly absorbedLeaving: readonly (readonly Float64Array[])[];
}

export interface CoverQuestion {
  seenFrom: SeenFrom;
  wavelengthNm: Float64Array;
  /**
   * Polar angle (radians, from the wafer's normal, under pi/2) of each way light leaves a textured surface; "mirror" for a
   * polished one, whose only way is the mirrored direction.
   */
  exitsRad: readonly number[] | "mirror";
  /** In the outermost medium, radians; 0 when left out, and for textured surfaces. */
  angleRad?: number;
  /** Of light aslant on a polished surface; it makes no difference at 0. */
  polarisation?: Polarisation;
}

/**
 * The cover along a wavelength grid (nm). Refuses an incidence index that is not positive, thick layers that are not clear, an
 * exit that does not go up, light aslant on ways of a texture ("stack-value"), wavelengths a layer is not known at
 * ("outside-table"), an empty list of thick layers ("no-layers").
 */
export function coverLight(question: CoverQuestion): CoverLight {
  const { seenFrom, wavelengthNm, exitsRad, angleRad = 0, polarisation = "s" } = question;
  finite(angleRad, "angle");
  if (exitsRad !== "mirror") {
    if (angleRad !== 0) refuse("stack-value", `light at ${angleRad} rad on a texture; only 0 is known`);
    for (const exit of exitsRad) {
      if (!(exit >= 0 && exit < Math.PI / 2))
        refuse("stack-value", `light leaves a texture at ${exit} rad, not upwards`);
    }
  }
  const ways = exitsRad === "mirror" ? 1 : exitsRad.length;
  const layers = thickLayersOf(seenFrom);
  if (layers === null) return openView(seenFrom, wavelengthNm, ways, angleRad);
  const count = wavelengthNm.length;
  const thick = new ThickLayers(wavelengthNm, layers);
  const arrays = (many: number) => Array.from({ length: many }, () => new Float64Array(count));
  const front = new Float64Array(count);
  const enters = new Float64Array(count);
  const leaves = arrays(ways);
  const returns = arrays(ways);
  const absorbedGoingIn = arrays(layers.length);
  const absorbedLeaving = leaves.map(() => arrays(layers.length));
  const alongOutside = Math.sin(angleRad);
  for (let i = 0; i < count; i++) {
    const going = thick.down(i, alongOutside, polarisation);
    front[i] = going.back;
    enters[i] = going.through;
    write(absorbedGoingIn, i, going.absorbed);
    for (let way = 0; way < ways; way++) {
      const coming =
        exitsRad === "mirror"
          ? thick.up(i, alongOutside, polarisation)
          : unpolarised(thick, i, thick.innerIndex[i] * Math.sin(exitsRad[way]));
      leaves[way][i] = coming.through;
      returns[way][i] = coming.back;
      write(absorbedLeaving[way], i, coming.absorbed);
    }
  }
  return {
    innerIndex: thick.innerIndex,
    innerAngleRad: thick.innerIndex.map((n) => Math.asin(alongOutside / n)),
    front,
    enters,
    leaves,
    returns,
    layers: layers.length,
    absorbedGoingIn,
    absorbedLeaving,
  };
}

/** The same medium and angle with the layers taken off: what the coated surface does by itself. */
export function uncovered(cover: CoverLight): CoverLight {
  return cover.layers === 0 ? cover : nothingInFront(cover.innerIndex, cover.innerAngleRad, cover.leaves.length);
}

function openView(seenFrom: SeenFrom, wavelengthNm: Float64Array, ways: number, angleRad: number): CoverLight {
  return nothingInFront(
    wavelengthNm.map(innermostIndex(seenFrom)),
    new Float64Array(wavelengthNm.length).fill(angleRad),
    ways,
  );
}

function nothingInFront(innerIndex: Float64Array, innerAngleRad: Float64Array, ways: number): CoverLight {
  const none = new Float64Array(innerIndex.length);
  const all = new Float64Array(innerIndex.length).fill(1);
  return {
    innerIndex,
    innerAngleRad,
    front: none,
    enters: all,
    leaves: new Array<Float64Array>(ways).fill(all),
    returns: new Array<Float64Array>(ways).fill(none),
    layers: 0,
    absorbedGoingIn: [],
    absorbedLeaving: new Array<Float64Array[]>(ways).fill([]),
  };
}

/** Half the light in each polarisation, each added up on its own. */
function unpolarised(thick: ThickLayers, i: number, along: number): ThickLight {
  const s = thick.up(i, along, "s");
  if (along === 0) return s;
  const p = thick.up(i, along, "p");
  return {
    through: (s.through + p.through) / 2,
    back: (s.back + p.back) / 2,
    absorbed: s.absorbed.map((value, j) => (value + p.absorbed[j]) / 2),
  };
}

function write(to: readonly Float64Array[], i: number, values: readonly number[]): void {
  for (let j = 0; j < values.length; j++) to[j][i] = values[j];
}
