/**
 * Stacks of many layers, tunnelling, metals and sheets against closed forms of the literature, each written out here from its
 * own formula. Formulas marked "from memory" were not at hand in print; each was derived or checked by a limit as well.
 */
import { describe, expect, test } from "vitest";
import { radians, type StackLayer, stackLight } from "../../engine/index.ts";
import { expectClose } from "../support/close.ts";
import { add, type Complex, over, subtract, times } from "../support/matrix-stack.ts";

const rounding = { absolute: 1e-12, because: "a few hundred roundings" };
const wavelengthNm = 600;
const upright = (incidenceIndex: number, layers: readonly StackLayer[], substrate: { n: number; k: number }) =>
  stackLight({ wavelengthNm, angleRad: 0, incidenceIndex, layers, substrate, polarisation: "s" });
const clear = (n: number, thicknessNm: number): StackLayer => ({ n, k: 0, thicknessNm });
const quarter = (n: number): StackLayer => clear(n, wavelengthNm / (4 * n));

describe("one clear film, aslant (Born and Wolf, Principles of Optics, 1.6.4: R = (r01^2 + r12^2 + 2 r01 r12 cos 2 beta)/(1 + ...))", () => {
  test.each([
    [1, 1.38, 1.52, 0],
    [1, 2.05, 3.9, 30],
    [1.5, 2.05, 3.9, 54.74],
    [1, 1.46, 3.9, 78.9],
    [1, 2.3, 1.5, 86],
  ])("%f / %f / %f at %f deg", (n0, n1, n2, angleDeg) => {
    const along = n0 * Math.sin(radians(angleDeg));
    const cosines = [n0, n1, n2].map((n) => Math.sqrt(1 - (along / n) ** 2));
    for (let thicknessNm = 0; thicknessNm <= 400; thicknessNm += 37) {
      const beta = (2 * Math.PI * n1 * thicknessNm * cosines[1]) / wavelengthNm;
      for (const polarisation of ["s", "p"] as const) {
        const power = polarisation === "s" ? 1 : -1;
        const y = [n0, n1, n2].map((n, j) => n * cosines[j] ** power);
        const r01 = (y[0] - y[1]) / (y[0] + y[1]);
        const r12 = (y[1] - y[2]) / (y[1] + y[2]);
        const mixed = 2 * r01 * r12 * Math.cos(2 * beta);
        const R = (r01 ** 2 + r12 ** 2 + mixed) / (1 + r01 ** 2 * r12 ** 2 + mixed);
        const question = { wavelengthNm, angleRad: radians(angleDeg), incidenceIndex: n0, polarisation };
        const light = stackLight({ ...question, layers: [clear(n1, thicknessNm)], substrate: { n: n2, k: 0 } });
        expectClose(light.reflectance, R, rounding);
        expectClose(light.transmittance, 1 - R, rounding);
      }
    }
  });
});

describe("quarter-wave mirrors", () => {
  const pairs = (high: number, low: number, count: number) =>
    Array.from({ length: count }, () => [quarter(high), quarter(low)]).flat();

  test("of N pairs reflect ((1 - x)/(1 + x))^2, x = (ns/n0)(low/high)^2N; with one more high layer, x = (high^2/(n0 ns))(high/low)^2N (Born and Wolf, 1.6.5)", () => {
    const [n0, high, low, ns] = [1, 2.3, 1.35, 1.52];
    for (let count = 0; count <= 12; count++) {
      // High next to the light: ... high, low, high, low on glass.
      const even = ns * (high / low) ** (2 * count);
      const odd = (high ** 2 / (n0 * ns)) * (high / low) ** (2 * count);
      const mirror = [...pairs(high, low, count)];
      expectClose(upright(n0, mirror, { n: ns, k: 0 }).reflectance, ((n0 - even) / (n0 + even)) ** 2, rounding);
      const closed = upright(n0, [...mirror, quarter(high)], { n: ns, k: 0 }).reflectance;
      expectClose(closed, ((1 - odd) / (1 + odd)) ** 2, rounding);
    }
  });

  test("of 2.5 and 1.5 on glass of 1.5 need 6.94, so 7 pairs for 99.5 % (University of Tennessee, optics 507, assignment 3)", () => {
    const reflectance = (count: number) => upright(1, pairs(2.5, 1.5, count), { n: 1.5, k: 0 }).reflectance;
    expect(reflectance(6)).toBeLessThan(0.995);
    expect(reflectance(7)).toBeGreaterThan(0.995);
  });
});

describe("p equal plates as far apart as they are thick, in optical thickness (J. Exp. Biol. 48, 227 (1968), abstract)", () => {
  // r: amplitude reflected at one face; phi: phase through a plate or a space. Glassy plates in water, as in animal reflectors.
  const [plate, medium] = [1.83, 1.33];
  const r2 = ((plate - medium) / (plate + medium)) ** 2;
  const stack = (count: number, phi: number) => {
    const layer = (n: number) => clear(n, (phi * wavelengthNm) / (2 * Math.PI * n));
    const layers = Array.from({ length: count }, (_, i) => (i === 0 ? [layer(plate)] : [layer(medium), layer(plate)]));
    return upright(medium, layers.flat(), { n: medium, k: 0 }).reflectance;
  };

  test("inside the band, cos^2 phi < r^2: 1/(1 + 4 m^2 (r^2 - cos^2 phi)/(r^2 (1 - m^2)^2))", () => {
    for (const count of [1, 2, 5, 10]) {
      for (const share of [0, 0.3, 0.9]) {
        const cosine = share * Math.sqrt(r2);
        const phi = Math.acos(cosine);
        const root = Math.sqrt(r2 - cosine ** 2) / Math.sin(phi);
        const m = ((1 - root) / (1 + root)) ** count;
        const R = 1 / (1 + (4 * m * m * (r2 - cosine ** 2)) / (r2 * (1 - m * m) ** 2));
        expectClose(stack(count, phi), R, rounding);
      }
    }
  });

  test("outside it: 1/(1 + (cos^2 phi - r^2)/(r^2 sin^2 2 p theta)), cos^2 theta = (cos^2 phi - r^2)/(1 - r^2)", () => {
    for (const count of [1, 2, 5, 10]) {
      for (const phi of [0.2, 0.7, 1.1, 2.2, 2.9]) {
        const above = Math.cos(phi) ** 2 - r2;
        expect(above).toBeGreaterThan(0);
        const theta = Math.acos(Math.sqrt(above / (1 - r2)));
        const R = 1 / (1 + above / (r2 * Math.sin(2 * count * theta) ** 2));
        expectClose(stack(count, phi), R, rounding);
      }
    }
  });

  test("and of very many plates is the mean 1 - sqrt(1 - r^2/cos^2 phi) outside the band, and all of it inside", () => {
    const phi = 0.9;
    let mean = 0;
    const most = 250;
    for (let count = 1; count <= most; count++) mean += stack(count, phi) / most;
    const because = "the mean over 250 numbers of plates, of a phase that never closes: about 1/250";
    expectClose(mean, 1 - Math.sqrt(1 - r2 / Math.cos(phi) ** 2), { absolute: 4e-3, because });
    expectClose(stack(60, Math.PI / 2), 1, { absolute: 1e-12, because: "(1.33/1.83)^240 of the light is left" });
  });
});

describe("frustrated total reflection through an air gap in glass", () => {
  test("T = 1/(1 + ((x^2 + y^2)/(2 x y))^2 sinh^2(2 pi d kappa/lambda)), kappa^2 = n^2 sin^2 - 1 (the barrier of wave mechanics; from memory)", () => {
    const n = 1.5;
    for (const angleDeg of [42, 45, 60, 80]) {
      const kappa = Math.sqrt((n * Math.sin(radians(angleDeg))) ** 2 - 1);
      const q = n * Math.cos(radians(angleDeg));
      for (const thicknessNm of [10, 100, 300, 1000]) {
        for (const [polarisation, y] of [
          ["s", q],
          ["p", q / n ** 2],
        ] as const) {
          const rise =
            ((kappa ** 2 + y ** 2) / (2 * kappa * y)) * Math.sinh((2 * Math.PI * thicknessNm * kappa) / wavelengthNm);
          const light = stackLight({
            wavelengthNm,
            angleRad: radians(angleDeg),
            incidenceIndex: n,
            layers: [clear(1, thicknessNm)],
            substrate: { n, k: 0 },
            polarisation,
          });
          expectClose(light.transmittance, 1 / (1 + rise ** 2), rounding);
        }
      }
    }
  });
});

describe("metals and thin absorbing sheets", () => {
  test.each([
    // n, k at 632.8 nm from straight lines between rows of the tables; reflectance by the Fresnel formula written out.
    ["silver of P. B. Johnson and R. W. Christy (1972)", 0.0563, 4.28],
    ["aluminium of A. D. Rakic (1995)", 1.4482, 7.54],
  ])("%s reflects ((1 - n)^2 + k^2)/((1 + n)^2 + k^2), however thick it is beyond a few skin depths", (_, n, k) => {
    const R = ((1 - n) ** 2 + k ** 2) / ((1 + n) ** 2 + k ** 2);
    expectClose(upright(1, [], { n, k }).reflectance, R, rounding);
    expectClose(upright(1, [{ n, k, thicknessNm: 500 }], { n: 1.5, k: 0 }).reflectance, R, rounding);
  });

  test("evaporated aluminium reflects near 91 % of red light (handbooks, from memory: 90.8 to 91.5)", () => {
    expectClose(upright(1, [], { n: 1.4482, k: 7.54 }).reflectance, 0.911, {
      absolute: 0.005,
      because: "films differ",
    });
  });

  /** A sheet of conductance `y` in units of free space: 2 pi d/lambda (N^2 - 1) is -iy for N^2 = 1 - 2i n^2, d to 0. */
  const sheet = (y: number): StackLayer => {
    const n = 3000;
    // (n - ik)^2 with k = sqrt(n^2 - 1) has real part 1: pure conduction.
    const k = Math.sqrt(n * n - 1);
    return { n, k, thicknessNm: (y * wavelengthNm) / (2 * Math.PI * 2 * n * k) };
  };
  const thin = { absolute: 2e-3, because: "the sheet is y/(2n) of a wavelength/2 pi thick, not 0" };

  test("a free sheet of conductance y takes 4y/(2 + y)^2: half of the light at y = 2 (W. Woltersdorff, Z. Phys. 91, 230 (1934), from memory)", () => {
    for (const y of [0.1, 1, 2, 5]) {
      const light = upright(1, [sheet(y)], { n: 1, k: 0 });
      expectClose(light.absorptance[0], (4 * y) / (2 + y) ** 2, thin);
      expectClose(light.transmittance, 4 / (2 + y) ** 2, thin);
      expectClose(light.reflectance, y ** 2 / (2 + y) ** 2, thin);
    }
  });

  test("a sheet of y = 1 a quarter wave before a perfect mirror takes everything (Salisbury's screen, from memory)", () => {
    const mirror = { n: 1e-3, k: 1e6 };
    const light = upright(1, [sheet(1), clear(1, wavelengthNm / 4)], mirror);
    expectClose(light.reflectance, 0, thin);
    expectClose(light.absorptance[0], 1, thin);
    // And nothing where the sheet lies on the mirror, in the node of the field.
    expectClose(upright(1, [sheet(1), clear(1, wavelengthNm / 2)], mirror).absorptance[0], 0, thin);
  });
});

describe("one interface with an absorber, aslant, by the other sign convention (S. J. Byrnes, arXiv:1603.02720: N = n + ik, from memory)", () => {
  // r_s, t_s, r_p, t_p in n cos(theta), and T = |t|^2 Re(n2 cos2)/Re(n1 cos1) for s, |t|^2 Re(n2 conj(cos2))/Re(n1 cos1) for p.
  const size2 = ([re, im]: Complex): number => re * re + im * im;
  const root = ([re, im]: Complex): Complex => {
    const size = Math.hypot(re, im);
    return [Math.sqrt((size + re) / 2), Math.sign(im) * Math.sqrt((size - re) / 2)];
  };
  test.each([
    [1, 3.88, 0.018, 30],
    [1, 5.57, 0.387, 54.74],
    [1.5, 4.98, 4.23, 71],
    [1, 0.0563, 4.28, 60],
    [1.5, 1.45, 7.54, 86],
  ])("%f to %f + %f i at %f deg", (n0, n, k, angleDeg) => {
    const c0 = Math.cos(radians(angleDeg));
    const N: Complex = [n, k];
    const sine = over([n0 * Math.sin(radians(angleDeg)), 0], N);
    const c: Complex = root(subtract([1, 0], times(sine, sine)));
    const scaled = (factor: number, z: Complex): Complex => [factor * z[0], factor * z[1]];
    const Nc = times(N, c);
    const expected = {
      s: {
        r: over(subtract([n0 * c0, 0], Nc), add([n0 * c0, 0], Nc)),
        t: over([2 * n0 * c0, 0], add([n0 * c0, 0], Nc)),
        through: Nc[0] / (n0 * c0),
      },
      p: {
        r: over(subtract(scaled(c0, N), scaled(n0, c)), add(scaled(c0, N), scaled(n0, c))),
        t: over([2 * n0 * c0, 0], add(scaled(c0, N), scaled(n0, c))),
        through: times(N, [c[0], -c[1]])[0] / (n0 * c0),
      },
    };
    for (const polarisation of ["s", "p"] as const) {
      const { r, t, through } = expected[polarisation];
      const question = { wavelengthNm, angleRad: radians(angleDeg), incidenceIndex: n0, polarisation };
      const light = stackLight({ ...question, layers: [], substrate: { n, k } });
      expectClose(light.reflectance, size2(r), rounding);
      expectClose(light.transmittance, through * size2(t), rounding);
    }
  });
});

describe("the critical angle (Born and Wolf, 1.5.4)", () => {
  test("is asin(n2/n1): all light is reflected above it, not all below, from glass and from silicon", () => {
    for (const n of [1.5, 3.5]) {
      const critical = Math.asin(1 / n);
      for (const polarisation of ["s", "p"] as const) {
        const at = (angleRad: number) =>
          stackLight({ wavelengthNm, angleRad, incidenceIndex: n, layers: [], substrate: { n: 1, k: 0 }, polarisation })
            .reflectance;
        expectClose(at(critical + 1e-4), 1, rounding);
        expect(at(critical - 1e-4)).toBeLessThan(0.98);
        expect(at(critical - 0.05)).toBeLessThan(0.7);
      }
    }
  });
});
