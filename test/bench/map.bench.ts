/**
 * The plane of films a person looks over: weighted reflectance of 200 indices by 200 thicknesses of one nitride film on
 * polished silicon, light straight down, 81 wavelengths, beside C made for speed and numpy that turn the phase from one
 * thickness to the next as ours does, but work out every thickness where ours reads most between others (`rivals/map.h`,
 * `rivals/stack_numpy.py`). One piece of work is the whole map.
 */
import { join } from "node:path";
import { materialByName } from "../../engine/materials/library.ts";
import { onGrid } from "../../engine/materials/material.ts";
import { siliconNitride } from "../../engine/materials/nitride-family.ts";
import { type WeightedMapInput, weightedMap } from "../../engine/optics/weighted-map.ts";
import { gridWeights } from "../../engine/sunlight/weighting.ts";
import { coverLight } from "../../engine/surface/cover.ts";
import { pathSum } from "../../engine/surface/path-sum.ts";
import { pyramidPaths } from "../../engine/surface/pyramids.ts";
import { coatedWafer } from "../../engine/wafer.ts";
import { wavelengthGrid } from "../../engine/wavelength-grid.ts";
import type { Bench, Way } from "./harness.ts";
import { mapText } from "./rivals/problems.ts";
import { agree, compiledC, FASTEST_C, numpyProgram, type Program, rival } from "./rivals/rival.ts";

declare const BENCH_PROJECT: string;

const rivals = join(BENCH_PROJECT, "test", "bench", "rivals");
/** Blocks as long as the grid, to the next multiple of 8. */
const block = "-DBLOCK=88";
const plainC = compiledC(join(rivals, "stack.c"), ["-O3", block]);
const vectorC = compiledC(join(rivals, "stack.c"), [...FASTEST_C, block]);
const numpy = numpyProgram(join(rivals, "stack_numpy.py"));

/** Ours reads most columns between others, off by less than this (`weighted-map.ts`); theirs works out every one. */
const AGREE = 1e-10;
const SIDE = 200;

const wavelengthNm = wavelengthGrid(300, 1100, 10);
const { average: weight } = gridWeights(wavelengthNm, 300, 1100, "photons");
const input: WeightedMapInput = {
  wavelengthNm,
  weight,
  paths: pathSum([{ anglesRad: [0], fraction: 1, exitRad: 0 }]),
  cover: coverLight({ seenFrom: "air", wavelengthNm, exitsRad: [0] }),
  substrate: onGrid(materialByName("silicon"), wavelengthNm),
  films: Array.from({ length: SIDE }, (_, row) => onGrid(siliconNitride(1.95 + (0.18 * row) / SIDE), wavelengthNm)),
  fromNm: 40,
  stepNm: 0.4,
  columns: SIDE,
};
const problem = () =>
  mapText({
    wavelengthNm,
    incidenceIndex: input.cover.innerIndex,
    angleRad: 0,
    polarisation: "both",
    weight,
    substrate: input.substrate,
    firstNm: input.fromNm,
    stepNm: input.stepNm,
    steps: input.columns,
    films: input.films,
  });

let call = 0;
const ours: Way = {
  name: "weightedMap",
  run: () => weightedMap(input)[call++ % (SIDE * SIDE)],
};

function versus(name: string, program: Program, goes: number): Bench {
  const theirs = rival(name, program, problem, goes);
  return {
    title: "map of 200 indices by 200 thicknesses, 81 wavelengths, polished",
    a: ours,
    b: theirs,
    async check() {
      agree(weightedMap(input), await theirs.answer(), AGREE, name);
    },
    rounds: 51,
    skip: program.skip,
  };
}

const paths = pathSum(pyramidPaths("random", 52));
const exitsRad = paths.paths.map((path) => path.exitRad);
const onPyramids: WeightedMapInput = {
  ...input,
  paths,
  cover: coverLight({ seenFrom: "air", wavelengthNm, exitsRad }),
};

/** Six angles of incidence, two polarisations at each, where the polished one has one of each. */
const pyramids: Bench = {
  title: "the same map on random pyramids of 52 deg",
  a: { name: "pyramids", run: () => weightedMap(onPyramids)[call++ % (SIDE * SIDE)] },
  b: { name: "polished", run: () => weightedMap(input)[call++ % (SIDE * SIDE)] },
  check() {
    const wafer = coatedWafer({
      surface: { kind: "pyramids", facetAngleDeg: 52 },
      seenFrom: "air",
      fromNm: 300,
      toNm: 1100,
      weight: "photons",
    });
    const map = weightedMap(onPyramids);
    for (const [row, column] of [
      [0, 0],
      [SIDE / 2, SIDE / 3],
      [SIDE - 1, SIDE - 1],
    ].map((place) => place.map(Math.floor))) {
      const film = wafer.weightedReflectancePercent(1.95 + (0.18 * row) / SIDE, input.fromNm + column * input.stepNm);
      const difference = Math.abs(film / 100 - map[row * SIDE + column]);
      if (!(difference < AGREE)) throw new Error(`row ${row}, column ${column}: apart by ${difference}`);
    }
  },
  rounds: 21,
};

export const benches: Bench[] = [
  pyramids,
  versus("C", plainC, 1),
  versus("C with vectors", vectorC, 2),
  versus("numpy", numpy, 1),
];
