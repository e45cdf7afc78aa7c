/** Competitors are worth beating only if they do the work asked: their protocol, and their answers beside ours. */
import { fileURLToPath } from "node:url";
import { afterAll, afterEach, describe, expect, it } from "vitest";
import { stackLight } from "../../../engine/optics/stack.ts";
import { plainReflectance } from "../../support/characteristic-matrix.ts";
import { time, usedResults } from "../harness.ts";
import { type MapProblem, mapText, type StackProblem, stackText } from "./problems.ts";
import { agree, compiledC, FASTEST_C, numpyProgram, type Program, type Rival, rival } from "./rival.ts";

const beside = (name: string) => fileURLToPath(new URL(name, import.meta.url));
const inC = beside("stack.c");
const C: [string, Program][] = [
  ["C", compiledC(inC, ["-O1"])],
  ["C with vectors", compiledC(inC, [...FASTEST_C, "-DBLOCK=8"])],
];
const NUMPY: [string, Program][] = [["numpy", numpyProgram(beside("stack_numpy.py"))]];

const open: Rival[] = [];
const started = (...words: Parameters<typeof rival>) => {
  const made = rival(...words);
  open.push(made);
  return made;
};
afterEach(() => {
  for (const one of open.splice(0)) one.close();
});
// A test worker is ended without exiting.
afterAll(() => {
  for (const [, program] of C) if (program.skip === undefined) program.remove?.();
});

/** Keeps the protocol: the problem is one line, every go "takes" 4 ms, and results are 1, 2, 3. */
const obedient: Program = {
  command: process.execPath,
  args: [
    "-e",
    `let seen = 0;
     require("node:readline").createInterface({ input: process.stdin }).on("line", (line) => {
       if (seen++ === 0) return;
       const [word, goes] = line.split(" ");
       console.log(word === "go" ? goes * 4e6 + " 6" : "1 2 3 ");
     });`,
  ],
};

describe("a competitor in a process of its own", () => {
  it("is timed by its own clock, for the work done once, and its result counts as used", async () => {
    const theirs = started("obedient", obedient, () => "a problem\n", 5, 2);
    const before = usedResults();
    let now = 0;
    const ours = {
      name: "ours",
      repeats: 4,
      run() {
        now += 8;
        return 1;
      },
    };
    const check = async () => agree([1, 2, 3], await theirs.answer(), 1e-12, "obedient");
    const timing = await time({ title: "", a: ours, b: theirs, check, rounds: 3 }, () => now);
    // 8 ms for 4 pieces of work; 4 ms a go of 2 pieces.
    expect(timing.aMedianMs).toBe(2);
    expect(timing.bMedianMs).toBe(2);
    expect(usedResults() - before).toBe(5 * (1 + 6));
  });

  it("that ends early says why instead of being fast", async () => {
    const broken: Program = {
      command: process.execPath,
      args: ["-e", "console.error('out of order'); process.exit(3)"],
    };
    await expect(started("broken", broken, () => "", 1).run()).rejects.toThrow(
      /without an answer to "go 1".*out of order/,
    );
    await expect(started("nowhere", { command: "no-such-program", args: [] }, () => "", 1).run()).rejects.toThrow(
      /ENOENT/,
    );
  });

  it("that cannot be started here is not started", async () => {
    await expect(started("absent", { skip: "gcc is not installed" }, () => "", 1).run()).rejects.toThrow(
      "not installed",
    );
  });

  it("with another answer, or another number of them, is told apart from an equal one", () => {
    agree([1, 2], [1, 2 + 1e-13], 1e-12, "near");
    expect(() => agree([1, 2], [1, 2 + 1e-11], 1e-12, "off")).toThrow("off at 1");
    expect(() => agree([1], [Number.NaN], 1e-12, "none")).toThrow("none at 0");
    expect(() => agree([1, 2], [1], 1e-12, "short")).toThrow("1 results for 2");
  });
});

/** Nine wavelengths: one more than a block of eight, so that the last block is mostly padding. */
const wavelengthNm = Array.from({ length: 9 }, (_, i) => 300 + 100 * i);
const along = (at: (wavelengthNm: number) => number) => wavelengthNm.map(at);
const silicon = { n: along((w) => 3.5 + 3e5 / w ** 2), k: along((w) => 3 * Math.exp((300 - w) / 80)) };
const clear = { n: along((w) => 1.46 + 3000 / w ** 2), k: along(() => 0) };
const lossy = { n: along((w) => 2 + 9000 / w ** 2), k: along((w) => (w < 700 ? 0.05 : 0)) };

const base = { wavelengthNm, incidenceIndex: along(() => 1), substrate: silicon };
const cases: [string, StackProblem][] = [
  ["no film", { ...base, angleRad: 0.3, polarisation: "p", layers: [], thicknessNm: [[]] }],
  [
    "straight down",
    {
      ...base,
      angleRad: 0,
      polarisation: "both",
      layers: [clear, lossy],
      thicknessNm: [
        [90, 70],
        [0, 65],
      ],
    },
  ],
  ["s", { ...base, angleRad: 0.95, polarisation: "s", layers: [clear, lossy], thicknessNm: [[90, 70]] }],
  ["p", { ...base, angleRad: 0.95, polarisation: "p", layers: [clear, lossy], thicknessNm: [[90, 70]] }],
  [
    // The root of the dying wave matters only in the substrate: a layer does the same with either.
    "total reflection by the substrate",
    {
      ...base,
      incidenceIndex: along(() => 1.5),
      angleRad: 0.95,
      polarisation: "both",
      layers: [lossy],
      substrate: { n: along(() => 1), k: along(() => 0) },
      thicknessNm: [[80]],
    },
  ],
  [
    "total reflection in a layer, an angle a wavelength, five layers",
    {
      ...base,
      incidenceIndex: along((w) => 1.5 + 2000 / w ** 2),
      angleRad: along((w) => w / 1000),
      polarisation: "both",
      layers: [{ n: along(() => 1), k: along(() => 0) }, lossy, clear, lossy, clear],
      thicknessNm: [
        [300, 70, 90, 2000, 40],
        [20, 30, 40, 50, 60],
      ],
    },
  ],
];

function expected({ angleRad, polarisation, layers, substrate, incidenceIndex, thicknessNm }: StackProblem): number[] {
  return thicknessNm.flatMap((thickness) =>
    wavelengthNm.map((wavelength, i) => {
      const angle = typeof angleRad === "number" ? angleRad : angleRad[i];
      const film = layers.map(({ n, k }, j) => ({ n: n[i], k: k[i], thicknessNm: thickness[j] }));
      const below = { n: substrate.n[i], k: substrate.k[i] };
      const kinds = polarisation === "both" ? (["s", "p"] as const) : [polarisation];
      const each = kinds.map((kind) => plainReflectance(wavelength, angle, incidenceIndex[i], film, below, kind));
      return each.reduce((sum, value) => sum + value, 0) / kinds.length;
    }),
  );
}

const map: MapProblem = {
  ...base,
  angleRad: 0.95,
  polarisation: "both",
  weight: along((w) => w / 6300),
  firstNm: 40,
  stepNm: 0.7,
  steps: 97,
  films: [lossy, clear, { n: lossy.n.map((n) => n + 0.1), k: lossy.k }],
};

/** Rounding in some twenty products of numbers near 1, and 1e-16 a step along a row of the map. */
const AGREE = 1e-12;

/** Beside the plain 2x2 matrices, which share nothing with them nor with the engine. */
describe("the optics competitors give what plain matrices give", () => {
  const answers = async (name: string, program: Program, text: string) =>
    started(name, program, () => text, 1).answer();
  /** Starting Python takes long; the hardest problem is enough where the array program is the same. */
  const spectra: Record<string, [Parameters<typeof stackText>[0], typeof cases][]> = {
    C: [
      ["whole", cases],
      ["thicknesses", cases],
    ],
    numpy: [
      ["whole", [cases[1], cases[4], cases[5]]],
      ["batch", [cases[5]]],
      ["thicknesses", [cases[5]]],
    ],
  };

  for (const [name, program] of [...C, ...NUMPY]) {
    const tested = it.skipIf(program.skip !== undefined);
    for (const [kind, problems] of spectra[name.split(" ")[0]]) {
      tested(`${name}, spectra, ${kind}`, async () => {
        for (const [what, problem] of problems) {
          const given = await answers(name, program, stackText(kind, problem));
          agree(expected(problem), given, AGREE, `${name}, ${kind}, ${what}`);
        }
      });
    }
    tested(`${name}, map, straight down and aslant`, async () => {
      for (const angleRad of [0, 0.95]) {
        const given = await answers(name, program, mapText({ ...map, angleRad }));
        const want = map.films.flatMap((film) => {
          const thicknessNm = Array.from({ length: map.steps }, (_, step) => [map.firstNm + map.stepNm * step]);
          const spectra = expected({ ...base, angleRad, polarisation: "both", layers: [film], thicknessNm });
          return thicknessNm.map((_, step) =>
            wavelengthNm.reduce((sum, __, i) => sum + map.weight[i] * spectra[step * wavelengthNm.length + i], 0),
          );
        });
        agree(want, given, AGREE, `${name}, map at ${angleRad}`);
      }
    });
  }

  it("which give what the engine gives", () => {
    const problem = cases[5][1];
    const ours = problem.thicknessNm.flatMap((thickness) =>
      wavelengthNm.map(
        (wavelength, i) =>
          stackLight({
            wavelengthNm: wavelength,
            angleRad: (problem.angleRad as number[])[i],
            incidenceIndex: problem.incidenceIndex[i],
            layers: problem.layers.map(({ n, k }, j) => ({ n: n[i], k: k[i], thicknessNm: thickness[j] })),
            substrate: { n: silicon.n[i], k: silicon.k[i] },
            polarisation: "both",
          }).reflectance,
      ),
    );
    agree(expected(problem), ours, AGREE, "the engine");
  });
});
