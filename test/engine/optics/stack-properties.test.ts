/**
 * What holds for every coherent stack, whatever its layers, tried on random ones: reciprocity, layers that must not show, scaling
 * and dualities of Maxwell's equations in plane layers (Born and Wolf, Principles of Optics, 1.6; P. Yeh, Optical Waves in Layered
 * Media, chapters 4 and 5, from memory). Energy, and agreement with the matrices multiplied out, are in stack.test.ts.
 */
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { type StackLayer, type StackLight, type StackQuestion, stackLight } from "../../../engine/index.ts";
import { expectClose } from "../../support/close.ts";

const between = (min: number, max: number) => fc.double({ min, max, noNaN: true });
const clearLayer = fc.record({ n: between(1, 4), k: fc.constant(0), thicknessNm: between(0, 300) });
const anyLayer = fc.record({ n: between(0.05, 6), k: between(0, 4), thicknessNm: between(0, 60) });
const polarisation = fc.constantFrom("s" as const, "p" as const);
const light = { wavelengthNm: between(300, 1200), angleRad: between(0, 1.5), polarisation };
const stackOf = (layer: fc.Arbitrary<StackLayer>) =>
  fc.record({
    ...light,
    incidenceIndex: between(1, 2),
    layers: fc.array(layer, { minLength: 1, maxLength: 5 }),
    substrate: fc.record({ n: between(1, 5), k: fc.constant(0) }),
  });
const clearStack = stackOf(clearLayer);
const lossyStack = stackOf(anyLayer);
const onAbsorber = fc.record({
  ...light,
  incidenceIndex: between(1, 2),
  layers: fc.array(anyLayer, { maxLength: 5 }),
  substrate: fc.record({ n: between(0.1, 6), k: between(0, 4) }),
});

const close = {
  absolute: 1e-10,
  because: "a few hundred roundings, some amplified near grazing incidence and resonances",
};
const sum = (values: readonly number[]): number => values.reduce((total, value) => total + value, 0);

function expectSame(one: StackLight, other: StackLight): void {
  expectClose(one.reflectance, other.reflectance, close);
  expectClose(one.transmittance, other.transmittance, close);
  expectClose(sum(one.absorptance), sum(other.absorptance), close);
}

/** The same stack lit from its substrate along the same ray; null where no ray comes out there (or hardly: sin > 0.98). */
function turnedRound(question: StackQuestion): StackQuestion | null {
  const { incidenceIndex, substrate, layers, angleRad } = question;
  const sine = (incidenceIndex * Math.sin(angleRad)) / substrate.n;
  if (sine > 0.98) return null;
  return {
    ...question,
    incidenceIndex: substrate.n,
    angleRad: Math.asin(sine),
    layers: [...layers].reverse(),
    substrate: { n: incidenceIndex, k: 0 },
  };
}

/** Checks a claim on random stacks; the same ones each time. */
function always(stacks: fc.Arbitrary<StackQuestion>, claim: (question: StackQuestion) => void, seed: number): void {
  fc.assert(fc.property(stacks, claim), { numRuns: 300, seed });
}

describe("seen from both sides", () => {
  test("any stack between two clear media transmits the same, absorbing or not (reciprocity)", () => {
    always(
      lossyStack,
      (question) => {
        const back = turnedRound(question);
        fc.pre(back !== null);
        expectClose(stackLight(back).transmittance, stackLight(question).transmittance, close);
      },
      21,
    );
  });

  test("a clear stack reflects the same too, and an absorbing one does not", () => {
    always(
      clearStack,
      (question) => {
        const back = turnedRound(question);
        fc.pre(back !== null);
        expectClose(stackLight(back).reflectance, stackLight(question).reflectance, close);
      },
      22,
    );
    const metalOnGlass: StackQuestion = {
      wavelengthNm: 600,
      angleRad: 0,
      incidenceIndex: 1,
      layers: [{ n: 0.2, k: 3, thicknessNm: 20 }],
      substrate: { n: 1.5, k: 0 },
      polarisation: "s",
    };
    const back = turnedRound(metalOnGlass);
    expect(back && stackLight(back).reflectance).not.toBeCloseTo(stackLight(metalOnGlass).reflectance, 2);
  });

  test("turning the layers over between like media keeps T", () => {
    always(
      lossyStack,
      (question) => {
        const like = { ...question, substrate: { n: question.incidenceIndex, k: 0 } };
        const over = { ...like, layers: [...like.layers].reverse() };
        expectClose(stackLight(over).transmittance, stackLight(like).transmittance, close);
      },
      23,
    );
  });
});

describe("layers that must not show", () => {
  test("a layer cut in two is the same layer, and its parts share what it absorbs", () => {
    fc.assert(
      fc.property(onAbsorber, anyLayer, between(0, 1), fc.nat(5), (question, layer, cut, at) => {
        const place = Math.min(at, question.layers.length);
        const put = (...layers: StackLayer[]) =>
          stackLight({ ...question, layers: question.layers.toSpliced(place, 0, ...layers) });
        const whole = put(layer);
        const parts = put(
          { ...layer, thicknessNm: cut * layer.thicknessNm },
          { ...layer, thicknessNm: (1 - cut) * layer.thicknessNm },
        );
        expectSame(parts, whole);
        expectClose(parts.absorptance[place] + parts.absorptance[place + 1], whole.absorptance[place], close);
      }),
      { numRuns: 300, seed: 24 },
    );
  });

  test("a layer of the substrate's index is part of the substrate: what it absorbs was to arrive there", () => {
    fc.assert(
      fc.property(onAbsorber, between(0, 200), (question, thicknessNm) => {
        const without = stackLight(question);
        const under = stackLight({ ...question, layers: [...question.layers, { ...question.substrate, thicknessNm }] });
        expectClose(under.reflectance, without.reflectance, close);
        expectClose(under.transmittance + under.absorptance[question.layers.length], without.transmittance, close);
      }),
      { numRuns: 300, seed: 25 },
    );
  });

  test("a layer of the outer medium's index is only a longer way", () => {
    fc.assert(
      fc.property(onAbsorber, between(0, 1000), (question, thicknessNm) => {
        const layers = [{ n: question.incidenceIndex, k: 0, thicknessNm }, ...question.layers];
        expectSame(stackLight({ ...question, layers }), stackLight(question));
      }),
      { numRuns: 300, seed: 26 },
    );
  });

  test("a clear layer half a wave thick along the ray is not there, at any angle and anywhere in the stack", () => {
    fc.assert(
      fc.property(onAbsorber, between(1.1, 4), fc.nat(5), fc.integer({ min: 1, max: 3 }), (question, n, at, orders) => {
        const along = question.incidenceIndex * Math.sin(question.angleRad);
        fc.pre(n > 1.02 * along);
        const halfWave = {
          n,
          k: 0,
          thicknessNm: (orders * question.wavelengthNm) / (2 * Math.sqrt(n * n - along * along)),
        };
        const layers = question.layers.toSpliced(Math.min(at, question.layers.length), 0, halfWave);
        expectSame(stackLight({ ...question, layers }), stackLight(question));
      }),
      { numRuns: 300, seed: 27 },
    );
  });
});

describe("scales and dualities", () => {
  test("wavelength and thicknesses scaled together change nothing", () => {
    fc.assert(
      fc.property(onAbsorber, between(0.01, 100), (question, scale) => {
        const layers = question.layers.map((layer) => ({ ...layer, thicknessNm: scale * layer.thicknessNm }));
        expectSame(
          stackLight({ ...question, wavelengthNm: scale * question.wavelengthNm, layers }),
          stackLight(question),
        );
      }),
      { numRuns: 300, seed: 28 },
    );
  });

  test("only ratios of indices count: all indices times a number, thicknesses divided by it", () => {
    fc.assert(
      fc.property(onAbsorber, between(0.5, 3), (question, times) => {
        const scaled = {
          ...question,
          incidenceIndex: times * question.incidenceIndex,
          substrate: { n: times * question.substrate.n, k: times * question.substrate.k },
          layers: question.layers.map(({ n, k, thicknessNm }) => ({
            n: times * n,
            k: times * k,
            thicknessNm: thicknessNm / times,
          })),
        };
        expectSame(stackLight(scaled), stackLight(question));
      }),
      { numRuns: 300, seed: 29 },
    );
  });

  test("a clear stack of reciprocal indices and the same phases reflects the same at normal incidence", () => {
    // Electric and magnetic fields change places: every admittance y becomes 1/y, every r becomes -r.
    always(
      clearStack,
      (question) => {
        const upright = { ...question, angleRad: 0 };
        const swapped = {
          ...upright,
          incidenceIndex: 1 / question.incidenceIndex,
          substrate: { n: 1 / question.substrate.n, k: 0 },
          layers: question.layers.map(({ n, thicknessNm }) => ({ n: 1 / n, k: 0, thicknessNm: thicknessNm * n * n })),
        };
        expectSame(stackLight(swapped), stackLight(upright));
      },
      30,
    );
  });

  test("s and p are the same light at normal incidence, and unpolarised light is their mean at any other", () => {
    always(
      onAbsorber,
      (question) => {
        const upright = { ...question, angleRad: 0 };
        expectSame(stackLight({ ...upright, polarisation: "s" }), stackLight({ ...upright, polarisation: "p" }));
        const [s, p, both] = (["s", "p", "both"] as const).map((which) =>
          stackLight({ ...question, polarisation: which }),
        );
        expectClose(both.reflectance, (s.reflectance + p.reflectance) / 2, close);
        expectClose(both.transmittance, (s.transmittance + p.transmittance) / 2, close);
      },
      31,
    );
  });

  test("a trace of extinction absorbs in proportion to itself, and takes no more from R and T than it absorbs", () => {
    fc.assert(
      fc.property(clearStack, fc.nat(4), (question, at) => {
        const place = at % question.layers.length;
        const along = question.incidenceIndex * Math.sin(question.angleRad);
        // Away from a layer in which the wave hardly goes inwards: there the response is not straight.
        fc.pre(question.layers.every(({ n }) => Math.abs(n - along) > 0.05));
        const traced = (k: number) =>
          stackLight({
            ...question,
            layers: question.layers.map((layer, j) => (j === place ? { ...layer, k } : layer)),
          }).absorptance[place];
        const once = traced(1e-8);
        expect(once).toBeGreaterThanOrEqual(-1e-13);
        expectClose(traced(2e-8), 2 * once, {
          absolute: 1e-11,
          because: "differences of powers near 1, and k squared",
        });
      }),
      { numRuns: 300, seed: 32 },
    );
  });
});

describe("under total reflection", () => {
  const beyond = fc.record({
    ...light,
    incidenceIndex: between(1.4, 2),
    layers: fc.array(anyLayer, { maxLength: 4 }),
    substrate: fc.constant({ n: 1, k: 0 }),
    angleRad: between(0.9, 1.5),
  });

  test("nothing arrives in a clear thinner substrate, and R is never over 1", () => {
    always(
      beyond,
      (question) => {
        const { reflectance, transmittance } = stackLight(question);
        expect(reflectance).toBeLessThanOrEqual(1 + 1e-12);
        expectClose(transmittance, 0, { absolute: 1e-11, because: "rounding" });
      },
      33,
    );
  });

  test("clear layers in between change nothing of R = 1", () => {
    always(
      beyond,
      (question) => {
        const layers = question.layers.map((layer) => ({ ...layer, k: 0 }));
        expectClose(stackLight({ ...question, layers }).reflectance, 1, close);
      },
      34,
    );
  });
});
