/**
 * The exact reference for light that bounces off pyramids: the electric field itself, as a complex vector in space, carried
 * from facet to facet. At each one it is split into the parts across and in the plane of incidence, which are reflected with
 * their own amplitude and phase; the turn of that plane between bounces comes by itself. Unpolarised light is half of each of
 * two crossed fields (Born and Wolf, Principles of Optics, sections 1.5.2 and 10.9). Shares only the facets' normals with the
 * engine. N = n - ik.
 */
import { type Facet, facetNormal, mirrored } from "../../engine/index.ts";

type Complex = readonly [re: number, im: number];
type Vector = readonly [number, number, number];

export interface FilmOnFacet {
  wavelengthNm: number;
  incidenceIndex: number;
  /** From the light inwards. */
  layers: readonly { n: number; k: number; thicknessNm: number }[];
  substrate: { n: number; k: number };
}

/** Part of unpolarised light, coming straight down, that is left after all bounces of a way; the facets must all be met. */
export function leftAfterWay(facets: readonly Facet[], facetAngleDeg: number, film: FilmOnFacet): number {
  const angleRad = (facetAngleDeg * Math.PI) / 180;
  let left = 0;
  for (const first of [
    [1, 0, 0],
    [0, 1, 0],
  ] as const) {
    let re: Vector = first;
    let im: Vector = [0, 0, 0];
    let direction: Vector = [0, 0, -1];
    for (const facet of facets) {
      const normal = facetNormal(facet, angleRad);
      const next = mirrored(direction, normal);
      const across = unit(cross(direction, normal));
      const inPlane = cross(direction, across);
      const inPlaneAfter = cross(next, across);
      const cosine = -dot(direction, normal);
      const rs = amplitude(film, cosine, "s");
      // The amplitude is that of the tangential field, which points the other way along `inPlane` after the mirror.
      const [pRe, pIm] = amplitude(film, cosine, "p");
      const s = times(rs, [dot(re, across), dot(im, across)]);
      const p = times([-pRe, -pIm], [dot(re, inPlane), dot(im, inPlane)]);
      re = add(scaled(across, s[0]), scaled(inPlaneAfter, p[0]));
      im = add(scaled(across, s[1]), scaled(inPlaneAfter, p[1]));
      direction = next;
    }
    left += (dot(re, re) + dot(im, im)) / 2;
  }
  return left;
}

/** Reflection coefficient of the tangential electric field, layer by layer from the substrate outwards. */
export function amplitude(film: FilmOnFacet, cosine: number, polarisation: "s" | "p"): Complex {
  const along = film.incidenceIndex * Math.sqrt(1 - cosine * cosine);
  const media: Complex[] = [
    [film.incidenceIndex, 0],
    ...film.layers.map(({ n, k }): Complex => [n, -k]),
    [film.substrate.n, -film.substrate.k],
  ];
  const q = media.map((index) => dyingRoot(minus(times(index, index), [along * along, 0])));
  const y = media.map((index, j) => (polarisation === "s" ? q[j] : over(times(index, index), q[j])));
  let below: Complex = [0, 0];
  for (let j = media.length - 2; j >= 0; j--) {
    if (j + 1 < media.length - 1) {
      const turn = (4 * Math.PI * film.layers[j].thicknessNm) / film.wavelengthNm;
      const size = Math.exp(turn * q[j + 1][1]);
      below = times(below, [size * Math.cos(turn * q[j + 1][0]), -size * Math.sin(turn * q[j + 1][0])]);
    }
    const r = over(minus(y[j], y[j + 1]), plus(y[j], y[j + 1]));
    below = over(plus(r, below), plus([1, 0], times(r, below)));
  }
  return below;
}

function dyingRoot([re, im]: Complex): Complex {
  const size = Math.hypot(re, im);
  const half = Math.atan2(im, re) / 2;
  const root: Complex = [Math.sqrt(size) * Math.cos(half), Math.sqrt(size) * Math.sin(half)];
  return root[1] > 0 ? [-root[0], -root[1]] : root;
}

const plus = (a: Complex, b: Complex): Complex => [a[0] + b[0], a[1] + b[1]];
const minus = (a: Complex, b: Complex): Complex => [a[0] - b[0], a[1] - b[1]];
const times = (a: Complex, b: Complex): Complex => [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]];
function over(a: Complex, b: Complex): Complex {
  const size = b[0] * b[0] + b[1] * b[1];
  return [(a[0] * b[0] + a[1] * b[1]) / size, (a[1] * b[0] - a[0] * b[1]) / size];
}

const dot = (a: Vector, b: Vector): number => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
const add = (a: Vector, b: Vector): Vector => [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
const scaled = (a: Vector, by: number): Vector => [a[0] * by, a[1] * by, a[2] * by];
const unit = (a: Vector): Vector => scaled(a, 1 / Math.sqrt(dot(a, a)));
const cross = (a: Vector, b: Vector): Vector => [
  a[1] * b[2] - a[2] * b[1],
  a[2] * b[0] - a[0] * b[2],
  a[0] * b[1] - a[1] * b[0],
];
