/**
 * Where the reflectance minimum of a stack lies, and how it moves with each unknown. Position as the `film` verb shows it: the
 * main dip of one film, the lowest valley of several, the cover taken off.
 *
 * Slopes by implicit differentiation: at the minimum dR/dl = 0 whatever the unknowns are, so
 *
 *   dl/dp = - (d2R / dl dp) / (d2R / dl2),
 *
 * with dR/dp exact and the derivatives along wavelength l as central differences of half a nm, narrow against any dip.
 *
 * The lowest valley of several films jumps from one valley to another, which no slope foresees. A goal is therefore sought as
 * two smooth things: the valley nearest to it in place, and that valley not higher than the others.
 */
import type { FilmStackDescription } from "../film-stack.ts";
import { onGrid } from "../materials/material.ts";
import { minimise } from "../numerics/minimise.ts";
import { mainMinimum, valleys } from "../optics/reflectance-minimum.ts";
import { type FilmUnknown, type Piece, stackWith, VariedStack } from "./varied-stack.ts";

const halfNm = 0.5;

/** Newton's steps end when one is shorter than this, nm: the next would be 1e-6 nm. */
const closeNm = 1e-3;
const mostSteps = 8;
/** Width, nm, to which the place is closed in on where Newton's steps leave the valley. */
const closedNm = 0.005;

export interface Sloped {
  value: number;
  slopes: Float64Array;
}

/** The valley nearest to a wavelength: its place, nm, and how far it lies above the lowest other valley on the grid, if any. */
export interface NearestValley {
  nm: Sloped;
  above: Sloped | null;
}

export class MinimumPlace {
  private readonly stack: VariedStack;

  constructor(
    private readonly description: FilmStackDescription,
    private readonly unknowns: readonly FilmUnknown[],
    private readonly gridNm: Float64Array,
  ) {
    this.stack = new VariedStack(description, unknowns, gridNm, true);
  }

  /** Position in nm; null when there is none inside the range. */
  at(values: ArrayLike<number>): number | null {
    this.stack.evaluate(values);
    const { reflectance } = this.stack;
    const all = this.candidates(values);
    if (all.length === 0) return null;
    const lowest = all.reduce((best, i) => (reflectance[i] < reflectance[best] ? i : best));
    return this.sharp(lowest, values).nm;
  }

  /** The valley nearest to `wantedNm`; null when there is none inside the range. */
  nearest(values: ArrayLike<number>, pieces: readonly Piece[], wantedNm: number): NearestValley | null {
    const { stack, gridNm } = this;
    stack.evaluate(values);
    const all = this.candidates(values);
    if (all.length === 0) return null;
    const far = (i: number): number => Math.abs(gridNm[i] - wantedNm);
    const near = all.reduce((best, i) => (far(i) < far(best) ? i : best));
    const { nm, bend } = this.sharp(near, values);
    const none = new Float64Array(values.length);
    const place = { value: nm, slopes: none };
    // Where the curve does not bend upwards there is nothing to differentiate.
    if (bend > 0) {
      const spots = this.on(around(nm));
      spots.slopes(values, pieces);
      const across = spots.slopesOf([-1 / (2 * halfNm), 0, 1 / (2 * halfNm)], "reflectance");
      place.slopes = across.map((slope) => -slope / bend);
    }
    const others = all.filter((i) => i !== near);
    if (others.length === 0) return { nm: place, above: null };
    const other = others.reduce((best, i) => (stack.reflectance[i] < stack.reflectance[best] ? i : best));
    const pair = this.on(Float64Array.of(gridNm[near], gridNm[other]));
    pair.slopes(values, pieces);
    return {
      nm: place,
      above: {
        value: pair.reflectance[0] - pair.reflectance[1],
        slopes: pair.slopesOf([1, -1], "reflectance"),
      },
    };
  }

  /** Grid points the minimum may be at: the valleys of several films, the main dip of one. */
  private candidates(values: ArrayLike<number>): number[] {
    const { gridNm, stack } = this;
    const { film } = stackWith(this.description, this.unknowns, values);
    if (film.length > 1) return valleys(stack.reflectance);
    const [{ material, thicknessNm }] = film;
    const { n } = onGrid(material, gridNm);
    // Which valley it is does not depend on the curve between grid points; the parabola is only a cheap one.
    const curve = (wavelengthNm: number): number => parabola(gridNm, stack.reflectance, wavelengthNm);
    const nm = mainMinimum(gridNm, stack.reflectance, (i) => n[i] * thicknessNm, curve);
    if (nm === null) return [];
    const all = valleys(stack.reflectance);
    return [all.reduce((best, i) => (Math.abs(gridNm[i] - nm) < Math.abs(gridNm[best] - nm) ? i : best))];
  }

  /** By Newton steps from the parabola's vertex; closed in on without slopes, and then without bend, where they go astray. */
  private sharp(valley: number, values: ArrayLike<number>): { nm: number; bend: number } {
    const { stack, gridNm } = this;
    const low = gridNm[valley - 1];
    const high = gridNm[valley + 1];
    let nm = vertex(gridNm, stack.reflectance, valley);
    for (let step = 0; step < mostSteps && nm > low && nm < high; step++) {
      if (nm - halfNm < gridNm[0] || nm + halfNm > gridNm[gridNm.length - 1]) break;
      const spots = this.on(around(nm));
      spots.evaluate(values);
      const [before, here, after] = spots.reflectance;
      const bend = (before - 2 * here + after) / halfNm ** 2;
      if (!(bend > 0)) break;
      const move = -(after - before) / (2 * halfNm) / bend;
      nm += move;
      if (Math.abs(move) < closeNm) return { nm, bend };
    }
    const curve = (wavelengthNm: number): number => {
      const spot = this.on(Float64Array.of(wavelengthNm));
      spot.evaluate(values);
      return spot.reflectance[0];
    };
    return { nm: minimise(curve, low, high, closedNm).x, bend: 0 };
  }

  private on(wavelengthNm: Float64Array): VariedStack {
    return new VariedStack(this.description, this.unknowns, wavelengthNm, true);
  }
}

const around = (nm: number): Float64Array => Float64Array.of(nm - halfNm, nm, nm + halfNm);

/** Slopes of the two stretches beside grid point i, and the second difference. */
function bentAt(gridNm: Float64Array, values: Float64Array, i: number): [first: number, second: number] {
  const first = (values[i] - values[i - 1]) / (gridNm[i] - gridNm[i - 1]);
  const next = (values[i + 1] - values[i]) / (gridNm[i + 1] - gridNm[i]);
  return [first, (next - first) / (gridNm[i + 1] - gridNm[i - 1])];
}

/** The parabola through the grid point nearest to a wavelength and its two neighbours. */
function parabola(gridNm: Float64Array, values: Float64Array, wavelengthNm: number): number {
  let i = 1;
  while (i < gridNm.length - 2 && gridNm[i + 1] - wavelengthNm < wavelengthNm - gridNm[i]) i++;
  const [first, second] = bentAt(gridNm, values, i);
  return values[i - 1] + (wavelengthNm - gridNm[i - 1]) * (first + second * (wavelengthNm - gridNm[i]));
}

function vertex(gridNm: Float64Array, values: Float64Array, valley: number): number {
  const [first, second] = bentAt(gridNm, values, valley);
  const nm = (gridNm[valley - 1] + gridNm[valley]) / 2 - first / (2 * second);
  return Number.isFinite(nm) ? nm : gridNm[valley];
}
