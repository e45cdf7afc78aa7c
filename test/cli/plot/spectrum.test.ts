import { describe, expect, test } from "vitest";
import { lowest, type Spectrum, spectrumMargin, spectrumRows, spectrumSummary } from "../../../cli/plot/spectrum.ts";
import { rowText } from "../../../cli/text/rows.ts";

/** A dip at `minimum` nm, `floor` deep, sampled every 10 nm from 300 to 1100. */
function dip(minimum: number, floor = 0.01): Spectrum {
  const wavelengthNm = Array.from({ length: 81 }, (_, i) => 300 + 10 * i);
  const reflectance = wavelengthNm.map((nm) => floor + ((nm - minimum) / 1000) ** 2);
  return { wavelengthNm, reflectance, low: reflectance.map((r) => r * 0.9), high: reflectance.map((r) => r * 1.1) };
}
const base = {
  width: 60,
  height: 16,
  look: { colour: "none", ascii: false } as const,
  goal: { reflectanceMinimumNm: { value: 600, within: 15 } },
};
const draw = (more: object) => spectrumRows({ ...base, now: null, after: null, ...more }).map(rowText);

describe("the reflectance plot", () => {
  test("marks the minimum of each curve under its own wavelength", () => {
    const lines = draw({ now: dip(500), after: dip(620) });
    // 56 columns over 800 nm: 500 nm in column 14, 620 nm in column 22
    expect(lines[14][spectrumMargin + 14]).toBe("●");
    expect(lines[14][spectrumMargin + 22]).toBe("◆");
  });

  test("draws the goal for the minimum on the axis, where it lies", () => {
    const lines = draw({ now: dip(400) });
    // 585 to 615 nm: columns 19 to 22
    expect(lines[14].slice(spectrumMargin + 18, spectrumMargin + 24)).toBe("─━━━━─");
  });

  test("leaves a gap where the curve is not a number", () => {
    const curve = dip(500);
    const holed = {
      ...curve,
      reflectance: curve.reflectance.map((r, i) => (i > 30 && i < 50 ? Number.NaN : r)),
      low: [],
      high: [],
    };
    const column = (lines: string[], at: number) =>
      lines
        .slice(0, 14)
        .map((line) => line[spectrumMargin + at] ?? " ")
        .join("")
        .trim();
    expect(column(draw({ now: { ...curve, low: [], high: [] } }), 28)).not.toBe("");
    expect(column(draw({ now: holed }), 28)).toBe("");
  });

  test("marks at the upper edge what runs out of the picture, and nothing when all is inside", () => {
    const steep = dip(600);
    const high = { ...steep, reflectance: steep.reflectance.map((r, i) => (i < 3 ? 0.9 : r)) };
    expect(draw({ now: high })[0].slice(spectrumMargin, spectrumMargin + 2)).toContain("▴");
    expect(draw({ now: { ...steep, reflectance: steep.reflectance.map(() => 0.02) } }).join("")).not.toContain("▴");
  });

  test("says that there is nothing to show when there is nothing", () => {
    expect(draw({})[0]).toContain("the film is not known");
  });

  test("names the units of both axes and holds nothing but ASCII where asked", () => {
    const lines = draw({ now: dip(500), after: dip(620), look: { colour: "none", ascii: true } });
    expect(lines.at(-1)).toMatch(/^%.* nm$/);
    expect(lines.join("")).toMatch(/^[ -~]*$/);
  });

  test("says the picture in one sentence", () => {
    expect(spectrumSummary({ ...base, now: dip(500), after: dip(620, 0.02) })).toBe(
      "reflectance now lowest at 500 nm (1.00 %); with the settings asked about lowest at 620 nm (2.00 %); goal 600 within 15 nm.",
    );
  });

  test("an end of the range is no minimum", () => {
    expect(lowest(dip(100))?.wavelengthNm).toBe(310);
    expect(lowest({ ...dip(500), reflectance: dip(500).reflectance.map(() => Number.NaN) })).toBeNull();
  });
});
