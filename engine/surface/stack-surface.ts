/**
 * Any stack on a polished or textured surface, behind any cover, over a wavelength grid: reflectance and transmittance into the
 * substrate, with their exact derivatives with respect to every thickness, index and extinction. The fast route for searches
 * (`film-stack.ts` is the plain one, with the absorptance of each layer).
 *
 * Derivatives go through the sum over ways of bouncing by the product rule, and through the cover's closed form
 * R = front + enters S_L / (1 - S_B), T' = enters T / (1 - S_B) of `cover.ts`.
 */
import { refuse } from "../errors.ts";
import type { OpticalConstantsOnGrid } from "../materials/material.ts";
import type { Polarisation } from "../optics/fresnel.ts";
import { StackDerivative, type StackSlopes, stackSlopes } from "../optics/stack-slopes.ts";
import { StackSpectrum } from "../optics/stack-spectrum.ts";
import { type CoverLight, coverLight, uncovered } from "./cover.ts";
import { type PathSum, pathSum } from "./path-sum.ts";
import { type Arrangement, pyramidPaths } from "./pyramids.ts";
import type { SeenFrom } from "./seen-from.ts";

export interface StackSurfaceInput {
  wavelengthNm: Float64Array;
  seenFrom: SeenFrom;
  surface: { kind: "polished" } | { kind: "pyramids"; facetAngleDeg: number; arrangement?: Arrangement };
  /** In the outermost medium; 0 when left out, and on pyramids. */
  angleRad?: number;
  /** Of light aslant on a polished surface; "both" when left out. */
  polarisation?: Polarisation | "both";
  /** From the light inwards. */
  film: readonly OpticalConstantsOnGrid[];
  substrate: OpticalConstantsOnGrid;
  /** True: the cover is taken off, the medium that touches the film stays. */
  coverOff?: boolean;
}

/** The surface in one polarisation (in the mean of both, where no cover tells them apart). */
interface View {
  paths: PathSum;
  cover: CoverLight;
  /** One a distinct angle of `paths`. */
  stacks: StackSpectrum[];
}

export class StackSurface {
  readonly wavelengths: number;
  readonly layers: number;
  /** Results of the last `evaluate` or `slopes`: fractions of the incident light, one number a wavelength. */
  readonly reflectance: Float64Array;
  /** Into the substrate. */
  readonly transmittance: Float64Array;
  /** Results of the last `slopes`, parameters as in `StackSlopes`, at [parameter * wavelengths + i]. */
  readonly reflectanceSlopes: Float64Array;
  readonly transmittanceSlopes: Float64Array;
  private readonly views: readonly View[];
  /** A view and angle each, made when slopes are first asked. */
  private derivatives: StackDerivative[][] | null = null;
  private readonly bounceR: Float64Array[];
  private readonly bounceT: Float64Array[];
  private bounceSlopes: Required<StackSlopes>[] = [];

  /** Refuses as `coverLight`, `pyramidPaths` and `StackSpectrum` do, and light aslant on pyramids ("angle-on-pyramids"). */
  constructor(input: StackSurfaceInput) {
    const { film, wavelengthNm } = input;
    if (input.surface.kind === "pyramids" && (input.angleRad ?? 0) !== 0)
      refuse(
        "angle-on-pyramids",
        "light aslant on pyramids is not computed; their bounce paths are known for 0 deg only",
      );
    this.views = viewsOf(input);
    this.wavelengths = wavelengthNm.length;
    this.layers = film.length;
    this.reflectance = new Float64Array(this.wavelengths);
    this.transmittance = new Float64Array(this.wavelengths);
    this.reflectanceSlopes = new Float64Array(3 * this.layers * this.wavelengths);
    this.transmittanceSlopes = new Float64Array(3 * this.layers * this.wavelengths);
    const angles = this.views[0].stacks;
    this.bounceR = angles.map(() => new Float64Array(this.wavelengths));
    this.bounceT = angles.map(() => new Float64Array(this.wavelengths));
  }

  /** New optical constants of one layer (0 is the outermost) on the same grid. */
  setLayer(layer: number, constants: OpticalConstantsOnGrid): void {
    this.views.forEach(({ stacks }, v) => {
      stacks.forEach((stack, angle) => {
        stack.setLayer(layer, constants);
        this.derivatives?.[v][angle].refresh(layer);
      });
    });
  }

  /** Reflectance and transmittance for thicknesses in nm, one a layer. Refuses as `StackSpectrum` does. */
  evaluate(thicknessNm: ArrayLike<number>): void {
    const { reflectance, transmittance, bounceR, bounceT } = this;
    const share = 1 / this.views.length;
    reflectance.fill(0);
    transmittance.fill(0);
    for (const view of this.views) {
      view.stacks.forEach((stack, angle) => {
        stack.evaluate(thicknessNm, bounceR[angle], bounceT[angle]);
      });
      for (let i = 0; i < this.wavelengths; i++) {
        let leaving = 0;
        let returning = 0;
        let entered = 0;
        for (let way = 0; way < view.paths.paths.length; way++) {
          const { fraction, bounces } = view.paths.paths[way];
          let left = fraction;
          for (const angle of bounces) {
            entered += left * bounceT[angle][i];
            left *= bounceR[angle][i];
          }
          leaving += left * view.cover.leaves[way][i];
          returning += left * view.cover.returns[way][i];
        }
        const reach = view.cover.enters[i] / (1 - returning);
        reflectance[i] += share * (view.cover.front[i] + reach * leaving);
        transmittance[i] += share * reach * entered;
      }
    }
  }

  /** The same with the derivatives of both, per nm of thickness, per unit of n and of k on the grid's own wavelength. */
  slopes(thicknessNm: ArrayLike<number>): void {
    const { views, wavelengths, layers } = this;
    this.derivatives ??= views.map(({ stacks }) => stacks.map((stack) => new StackDerivative(stack)));
    if (this.bounceSlopes.length === 0) this.bounceSlopes = views[0].stacks.map(stackSlopes);
    const share = 1 / views.length;
    for (const array of [this.reflectance, this.transmittance, this.reflectanceSlopes, this.transmittanceSlopes])
      array.fill(0);
    views.forEach((view, v) => {
      this.derivatives?.[v].forEach((derivative, angle) => {
        derivative.evaluate(thicknessNm, this.bounceSlopes[angle]);
      });
      for (let i = 0; i < wavelengths; i++) this.addWavelength(view, i, share, 3 * layers);
    });
  }

  private addWavelength({ paths, cover }: View, i: number, share: number, parameters: number): void {
    const { wavelengths, bounceSlopes: b } = this;
    let leaving = 0;
    let returning = 0;
    let entered = 0;
    for (let way = 0; way < paths.paths.length; way++) {
      const { fraction, bounces } = paths.paths[way];
      let left = fraction;
      for (const angle of bounces) {
        entered += left * b[angle].transmittance[i];
        left *= b[angle].reflectance[i];
      }
      leaving += left * cover.leaves[way][i];
      returning += left * cover.returns[way][i];
    }
    const reach = cover.enters[i] / (1 - returning);
    this.reflectance[i] += share * (cover.front[i] + reach * leaving);
    this.transmittance[i] += share * reach * entered;
    for (let parameter = 0; parameter < parameters; parameter++) {
      const at = parameter * wavelengths + i;
      let dLeaving = 0;
      let dReturning = 0;
      let dEntered = 0;
      for (let way = 0; way < paths.paths.length; way++) {
        const { fraction, bounces } = paths.paths[way];
        let left = fraction;
        let dLeft = 0;
        for (const angle of bounces) {
          const one = b[angle];
          dEntered += dLeft * one.transmittance[i] + left * one.transmittanceSlopes[at];
          dLeft = dLeft * one.reflectance[i] + left * one.reflectanceSlopes[at];
          left *= one.reflectance[i];
        }
        dLeaving += dLeft * cover.leaves[way][i];
        dReturning += dLeft * cover.returns[way][i];
      }
      const dReach = (reach * dReturning) / (1 - returning);
      this.reflectanceSlopes[at] += share * (dReach * leaving + reach * dLeaving);
      this.transmittanceSlopes[at] += share * (dReach * entered + reach * dEntered);
    }
  }
}

function viewsOf(input: StackSurfaceInput): View[] {
  const { wavelengthNm, seenFrom, surface, film: layers, substrate, angleRad = 0, polarisation = "both" } = input;
  const bare = (light: Parameters<typeof coverLight>[0]): CoverLight =>
    input.coverOff ? uncovered(coverLight(light)) : coverLight(light);
  if (surface.kind === "pyramids") {
    const paths = pathSum(pyramidPaths(surface.arrangement ?? "random", surface.facetAngleDeg));
    const cover = bare({ seenFrom, wavelengthNm, exitsRad: paths.paths.map((path) => path.exitRad) });
    // At each bounce on pyramids the light counts as unpolarised.
    const stacks = paths.anglesRad.map(
      (bounceRad) =>
        new StackSpectrum({
          wavelengthNm,
          incidenceIndex: cover.innerIndex,
          angleRad: bounceRad,
          polarisation: "both",
          layers,
          substrate,
        }),
    );
    return [{ paths, cover, stacks }];
  }
  const kinds: readonly Polarisation[] = polarisation !== "both" ? [polarisation] : angleRad === 0 ? ["s"] : ["s", "p"];
  return kinds.map((kind) => {
    const cover = bare({ seenFrom, wavelengthNm, exitsRad: "mirror", angleRad, polarisation: kind });
    const stack = new StackSpectrum({
      wavelengthNm,
      incidenceIndex: cover.innerIndex,
      angleRad: cover.innerAngleRad,
      polarisation: kind,
      layers,
      substrate,
    });
    return {
      paths: { anglesRad: [angleRad], paths: [{ fraction: 1, bounces: [0], exitRad: 0 }] },
      cover,
      stacks: [stack],
    };
  });
}
