/**
 * Stacks beside outside competitors that do the same work on the same numbers: C as from the textbook and C made for speed
 * (`rivals/stack.c`), compiled plainly and for this machine's vector instructions, and numpy (`rivals/stack_numpy.py`). A spectrum is silica on silicon
 * nitride on silicon at 91 wavelengths, straight down and aslant, both polarisations; once with everything worked out from n,
 * k, thickness and wavelength each time, once with only the thicknesses new. One piece of work is one spectrum.
 */
import { join } from "node:path";
import { radians } from "../../engine/constants.ts";
import { materialByName } from "../../engine/materials/library.ts";
import { onGrid } from "../../engine/materials/material.ts";
import { stackLight } from "../../engine/optics/stack.ts";
import { StackSpectrum } from "../../engine/optics/stack-spectrum.ts";
import { wavelengthGrid } from "../../engine/wavelength-grid.ts";
import type { Bench, Way } from "./harness.ts";
import { type StackProblem, stackText } from "./rivals/problems.ts";
import { agree, compiledC, FASTEST_C, numpyProgram, type Program, rival } from "./rivals/rival.ts";

declare const BENCH_PROJECT: string;

const rivals = join(BENCH_PROJECT, "test", "bench", "rivals");
const inC = join(rivals, "stack.c");
/** The C is compiled for blocks as long as the grid, to the next multiple of 8: what makes most of it vectors. */
const block = "-DBLOCK=96";
const plainC = compiledC(inC, ["-O3", block]);
const vectorC = compiledC(inC, [...FASTEST_C, block]);
const numpy = numpyProgram(join(rivals, "stack_numpy.py"));

/** Rounding in some twenty products of numbers near 1. */
const AGREE = 1e-12;

/** Stacks of a problem; slow ways do the first few, fast ways all of them several times, so that a round takes milliseconds. */
const STACKS = 200;
const FEW = 20;

const wavelengthNm = wavelengthGrid(300, 1200, 10);
const incidenceIndex = new Float64Array(wavelengthNm.length).fill(1);
const layers = [
  onGrid(materialByName("silica"), wavelengthNm),
  onGrid(materialByName("silicon nitride", { index: 2.08 }), wavelengthNm),
];
const substrate = onGrid(materialByName("silicon"), wavelengthNm);
/** Thicknesses that repeat at no simple interval, so that no phase is met twice. */
const thicknessNm = Array.from({ length: STACKS }, (_, s) => [
  60 + 60 * ((s * 0.618034) % 1),
  50 + 50 * ((s * 0.754878) % 1),
]);

function stackProblem(angleDeg: number, stacks = STACKS): StackProblem {
  return {
    wavelengthNm,
    incidenceIndex,
    angleRad: radians(angleDeg),
    polarisation: "both",
    layers,
    substrate,
    thicknessNm: thicknessNm.slice(0, stacks),
  };
}

/** Writes the spectrum of one stack to `out`. */
type Spectrum = (thicknessNm: readonly number[], out: Float64Array) => void;

interface OurWay extends Way {
  /** The spectra of the first so many stacks, one after the other. */
  answer(stacks: number): number[];
}

/** Our way over the first `stacks` stacks, `goes` times. */
function ourWay(name: string, spectrum: Spectrum, stacks: number, goes: number): OurWay {
  const out = new Float64Array(wavelengthNm.length);
  return {
    name,
    repeats: stacks * goes,
    run() {
      let sum = 0;
      for (let go = 0; go < goes; go++) {
        for (let s = 0; s < stacks; s++) {
          spectrum(thicknessNm[s], out);
          sum += out[s % out.length];
        }
      }
      return sum;
    },
    answer: (count) =>
      thicknessNm.slice(0, count).flatMap((thickness) => {
        spectrum(thickness, out);
        return Array.from(out);
      }),
  };
}

function byWavelength(problem: StackProblem): Spectrum {
  const angleRad = problem.angleRad as number;
  return (thickness, out) => {
    for (let i = 0; i < out.length; i++) {
      out[i] = stackLight({
        wavelengthNm: wavelengthNm[i],
        angleRad,
        incidenceIndex: incidenceIndex[i],
        layers: layers.map(({ n, k }, j) => ({ n: n[i], k: k[i], thicknessNm: thickness[j] })),
        substrate: { n: substrate.n[i], k: substrate.k[i] },
        polarisation: "both",
      }).reflectance;
    }
  };
}

const built = (problem: StackProblem) =>
  new StackSpectrum({
    wavelengthNm,
    incidenceIndex,
    angleRad: problem.angleRad as number,
    polarisation: "both",
    layers,
    substrate,
  });

/** All optical constants put in again, and everything worked out from them; memory is kept, as the competitors keep theirs. */
function anew(problem: StackProblem): Spectrum {
  const spectrum = built(problem);
  return (thickness, out) => {
    spectrum.restack(layers, substrate);
    spectrum.reflectance(thickness, out);
  };
}

function kept(problem: StackProblem): Spectrum {
  const spectrum = built(problem);
  return (thickness, out) => spectrum.reflectance(thickness, out);
}

interface Opponent {
  name: string;
  program: Program;
  kind: "whole" | "plain" | "batch" | "thicknesses";
  goes: number;
  stacks?: number;
}

function versus(title: string, angleDeg: number, ours: OurWay, opponent: Opponent): Bench {
  const { name, program, kind, goes, stacks = STACKS } = opponent;
  const theirs = rival(name, program, () => stackText(kind, stackProblem(angleDeg, stacks)), goes, stacks);
  return {
    title,
    a: ours,
    b: theirs,
    async check() {
      agree(ours.answer(stacks), await theirs.answer(), AGREE, name);
    },
    rounds: 51,
    skip: program.skip,
  };
}

function spectrumBenches(how: string, angleDeg: number): Bench[] {
  const problem = stackProblem(angleDeg);
  const everything = `two layers, 91 wavelengths, ${how}, everything anew`;
  const thicknesses = `two layers, 91 wavelengths, ${how}, new thicknesses only`;
  const plain = ourWay("stackLight", byWavelength(problem), FEW, 1);
  const whole = ourWay("StackSpectrum", anew(problem), 100, 1);
  const again = ourWay("StackSpectrum kept", kept(problem), STACKS, 3);
  return [
    versus(everything, angleDeg, plain, { name: "C made for speed", program: plainC, kind: "whole", goes: 3 }),
    versus(everything, angleDeg, whole, { name: "C from the textbook", program: plainC, kind: "plain", goes: 2 }),
    versus(everything, angleDeg, whole, { name: "C made for speed", program: plainC, kind: "whole", goes: 3 }),
    versus(everything, angleDeg, whole, { name: "C with vectors", program: vectorC, kind: "whole", goes: 10 }),
    versus(everything, angleDeg, whole, { name: "numpy", program: numpy, kind: "whole", goes: 3, stacks: FEW }),
    versus(everything, angleDeg, whole, { name: "numpy, 200 stacks at once", program: numpy, kind: "batch", goes: 1 }),
    versus(thicknesses, angleDeg, again, { name: "C made for speed", program: plainC, kind: "thicknesses", goes: 3 }),
    versus(thicknesses, angleDeg, again, { name: "C with vectors", program: vectorC, kind: "thicknesses", goes: 15 }),
    versus(thicknesses, angleDeg, again, { name: "numpy, 200 at once", program: numpy, kind: "thicknesses", goes: 2 }),
  ];
}

export const benches: Bench[] = [
  ...spectrumBenches("straight down", 0),
  ...spectrumBenches("54.74 deg unpolarised", 54.74),
];
