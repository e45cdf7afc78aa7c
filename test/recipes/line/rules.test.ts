import { describe, expect, it } from "vitest";
import { changed, EXAMPLE, lineOf, placesOf, problemsOf } from "./given.ts";

/** First problem of the example with one passage changed. */
const first = (from: string, to: string) => problemsOf(() => lineOf(changed(from, to)))[0];

describe("the mistakes people make first have a message of their own, with the place and what would do", () => {
  it.each([
    ["{ range: 300..1200 sccm", "{range:300..1200 sccm", "missing-space", "18:22", "write range: 300..1200 sccm"],
    ["seen_from: air", "seen_from:air", "missing-space", "7:12", "write seen_from: air"],
    ["facet_angle: 52 deg", "facet_angle:52 deg", "missing-space", "5:14", "write facet_angle: 52 deg"],
    ["index: 0.003", "index: 0,003", "decimal-comma", "15:40", "write 0.003"],
    ["index: 2.06", "index: 2,06", "decimal-comma", "9:10", "write 2.06"],
    ["3000..9000 sccm", "3,000..9,000 sccm", "thousands-comma", "19:25", "write 3000..9000 sccm"],
    ["4..12 kW", ">= 3000", "comparison-sign", "21:25", "write at least 3000"],
    ["ammonia/silane: 5..14", "ammonia/silane: >= 5", "comparison-sign", "25:19", "write at least 5"],
    ["ammonia/silane: 5..14", "ammonia/silane: <= 14", "comparison-sign", "25:19", "write at most 14"],
    ["0.85 sd 0.05", "0.85 \u00b1 0.05", "plus-minus", "6:17", "0.85 sd 0.05"],
    ["thickness: 0.4 nm", "thickness: \u00b10.4 nm", "plus-minus", "15:58", "0.4 nm"],
    ["thickness: 0.4 nm", "thickness: 0 nm", "zero-gauge", "15:58", "standard deviation"],
    ["0.85 sd 0.05", "75 nm", "wrong-unit", "6:17", "75 nm beside 88 nm is 0.85"],
    ["  seen_from", "\tseen_from", "tab-indent", "7:1", "spaces"],
    ["seen_from: air", "seen_form: air", "unknown-key", "7:3", "did you mean seen_from?"],
    ["smallest: 1 sccm", "smallest: 1", "missing-unit", "18:51", "sccm"],
    ["range: 200..900 s,", "range: 200..900 sccm,", "wrong-unit", "20:25", "560 s"],
    ["tune: true", "tune: yes", "wrong-type", "18:88", ""],
    ["Europe/Lisbon", "Europe/Lisboa", "unknown-time-zone", "2:12", "Europe/Lisbon"],
    ["2.06 within 0.02", "2.06", "not-a-tolerance", "9:10", "within"],
    ["at most 2.5 %", "2.5 %", "not-a-limit", "11:25", "at most 2.5 %"],
    ["surface: pyramids", "surface: piramids", "wrong-value", "4:12", "pyramids"],
  ])("%j written as %j: %s at %s", (from, to, code, place, hint) => {
    const problems = problemsOf(() => lineOf(changed(from, to)));
    expect(problems).toHaveLength(1);
    const [problem] = problems;
    expect(`${problem.code} ${problem.row}:${problem.column}`).toBe(`${code} ${place}`);
    expect(problem.file).toBe("line.yaml");
    expect(problem.hint ?? "").toContain(hint);
  });

  it("and a plus-minus sign in a goal is read as within", () => {
    expect(lineOf(changed("2.06 within 0.02", "2.06 \u00b1 0.02")).goal.index).toEqual({ value: 2.06, within: 0.02 });
  });

  it("and all of them are reported in one pass, in file order", () => {
    let text = changed("index: 2.06 within 0.02", "index: 2,06 within 0.02");
    text = changed("thickness: 0.4 nm", "thickness: 0 nm", text);
    text = changed("{ range: 4..12 kW, smallest: 10 W }", "{ range: 4..12 sccm, smalest: 10 W }", text);
    text = changed("  time: 10 %", "  tme: 10", text);
    text = changed("  A2: {}", "  A 2: {}", text);
    expect(placesOf(text)).toEqual([
      "decimal-comma 9:10",
      "zero-gauge 15:58",
      "wrong-unit 21:25",
      "unknown-key 21:37",
      "unknown-setting 30:3",
      "bad-name 35:3",
    ]);
  });
});

describe("a setting", () => {
  it.each([
    ["smallest: 1 sccm, ", "", "missing-key"],
    ["full_scale: 2000 sccm", "full_scale: 1000 sccm", "beyond-full-scale"],
    ["full_scale: 2000 sccm", "full_scale: 70 slm", "below-floor"],
    ["smallest: 1 sccm", "smallest: 0 sccm", "out-of-bounds"],
    ["smallest: 1 sccm", "smallest: 1000 sccm", "out-of-bounds"],
    ["420..480 degC, smallest: 1 degC", "421..429 degC, smallest: 5 degC", "accepted"],
    ["420..480 degC, smallest: 1 degC", "421..425 degC, smallest: 3 degC", "accepted"],
    ["range: 300..1200 sccm", "range: 0..1200 sccm", "zero-range"],
    ["range: 180..260 Pa", "range: -5..260 Pa", "zero-range"],
    ["  pressure: ", "  presure: ", "unknown-meaning"],
    ["  pressure:    { range: 180..260 Pa,", "  lid_gap: { range: 1..5 nm, acts: linear,", "wrong-unit"],
    ["  pressure:    { ", "  p_1: { acts_as: pressure, ", "accepted"],
    ["  pressure:    { ", "  p_1: { acts_as: silane, ", "wrong-unit"],
    ["  pressure:    { ", "  p_1: { acts_as: presure, ", "unknown-meaning"],
    ["  pressure:    { ", "  pressure: { acts: log, ", "two-meanings"],
    ["  pressure:    { ", "  zone_2: { ", "wrong-unit"],
    ["  power:       { ", "  power: { power_is: peak, ", "accepted"],
    ["  pressure:    { ", "  pressure: { power_is: peak, ", "two-meanings"],
    [
      "  time:        { range: 200..900 s, smallest: 1 s",
      "  belt_speed: { range: 1..2 m/min, smallest: 1 mm/s",
      "unknown-setting",
    ],
    ["  pressure:    { range: 180..260 Pa, smallest: 1 Pa }", "  belt_speed: { range: 1..2 m/min }", "time-and-speed"],
    ["  temperature:", "  Power: { range: 1..2 kW }\n  temperature:", "name-clash"],
    ["  temperature:", "  9lives:", "bad-name"],
  ])("with %j written as %j is %s", (from, to, code) => {
    expect(first(from, to)?.code ?? "accepted").toBe(code);
  });

  it("needs no smallest step when it is never tuned, and gets a fine one", () => {
    const pressure = lineOf(changed("260 Pa, smallest: 1 Pa", "260 Pa")).settings.get("pressure");
    // a thousandth of the range or finer, decimal: 80 Pa wide
    expect(pressure?.smallest).toBe(0.01);
  });

  it("under the site's own name keeps the meaning it acts as, or how it acts", () => {
    const line = lineOf(
      changed("  pressure:    { ", "  throttle: { acts: log, ").replace(
        "  temperature: {",
        "  hot: { acts_as: temperature,",
      ),
    );
    expect(line.settings.get("throttle")).toMatchObject({ meaning: null, acts: "log", dimension: "pressure" });
    expect(line.settings.get("hot")).toMatchObject({ meaning: "temperature", acts: null });
  });

  it("in kelvin has its range in degrees and its step without the offset of the scale", () => {
    const kelvin = lineOf(changed("420..480 degC, smallest: 1 degC", "693.15..753.15 K, smallest: 1 K")).settings.get(
      "temperature",
    );
    expect(kelvin).toMatchObject({ low: 420, high: 480, smallest: 1, unit: "K" });
  });
});

describe("a chamber", () => {
  it.each([
    ["300..1000 sccm", "200..1000 sccm", "widened"],
    ["300..1000 sccm", "300..1300 sccm", "widened"],
    ["{ range: 300..1000 sccm }", "{ tune: false }", "accepted"],
    ["{ silane: { range: 300..1000 sccm } }", "{ power: { tune: true } }", "widened"],
    ["{ silane: { range: 300..1000 sccm } }", "{ silan: { range: 300..1000 sccm } }", "unknown-key"],
    ["300..1000 sccm", "300..1000 s", "wrong-unit"],
    ["300..1000 sccm", "300.2..300.8 sccm", "no-step-in-range"],
    ["{ range: 300..1000 sccm }", "{ full_scale: 100 slm }", "below-floor"],
    ["B1: { settings:", "B1: { setings:", "unknown-key"],
    ["  A2: {}", "  a1: {}", "name-clash"],
    ["  A2: {}", "  nul: {}", "bad-name"],
    ["  A2: {}", "  ../x: {}", "bad-name"],
    ["  A2: {}", "  a..b: {}", "bad-name"],
    ["  A2: {}", "  A2:", "accepted"],
    ["  A2: {}", "  A2: 5", "wrong-type"],
    ["  A2: {}", "  A1: {}", "duplicate-key"],
  ])("with %j written as %j is %s", (from, to, code) => {
    expect(first(from, to)?.code ?? "accepted").toBe(code);
  });

  it("with a larger controller starts at that controller's usable floor", () => {
    const line = lineOf(changed("{ range: 300..1000 sccm }", "{ full_scale: 20 slm }"));
    expect(line.chambers.get("B1")?.settings.get("silane")).toMatchObject({ low: 400, high: 1200 });
    expect(line.settings.get("silane")?.low).toBe(300);
  });
});

describe("a window or an anchor", () => {
  it.each([
    ["ammonia/silane: 5..14", "ammonia/silan: 5..14", "unknown-setting"],
    ["ammonia/silane: 5..14", "ammonia/silane: 5..14 sccm", "wrong-unit"],
    ["ammonia/silane: 5..14", "ammonia/time: 5..14", "mixed-dimensions"],
    ["ammonia/silane: 5..14", "ammonia*silane: 5..14", "not-an-expression"],
    ["ammonia/silane: 5..14", "ammonia/silane/time: 5..14", "not-an-expression"],
    ["ammonia/silane: 5..14", "silane/silane: 5..14", "not-an-expression"],
    ["ammonia/silane: 5..14", "ammonia/silane: 50..60", "empty-window"],
    // 3000/1200 = 2.5 is the lowest ratio the ranges allow
    ["ammonia/silane: 5..14", "ammonia/silane: 1..2.4", "empty-window"],
    ["ammonia/silane: 5..14", "ammonia/silane: 1..2.6", "accepted"],
    ["ammonia/silane: 5..14", "ammonia/silane: [5, 14]", "wrong-type"],
    ["silane+ammonia: at most 9500 sccm", "silane+ammonia: at most 9500", "missing-unit"],
    ["silane+ammonia: at most 9500 sccm", "silane + ammonia: at most 9.5 slm", "accepted"],
    ["silane+ammonia: at most 9500 sccm", "silane+ammonia: 9500 sccm", "not-a-limit"],
    ["silane+ammonia: at most 9500 sccm", "ammonia / silane: at most 9", "duplicate-key"],
    ["  time: 10 %", "  time: 10 s", "wrong-unit"],
    ["  time: 10 %", "  time: 0 %", "out-of-bounds"],
    ["  time: 10 %", "  silane+ammonia: 10 %", "not-an-expression"],
  ])("with %j written as %j is %s", (from, to, code) => {
    expect(first(from, to)?.code ?? "accepted").toBe(code);
  });
});

describe("other rules", () => {
  it.each([
    ["600 nm within 15 nm", "1090 nm within 15 nm", "minimum-outside-light"],
    ["2.06 within 0.02", "206 within 2", "out-of-bounds"],
    ["52 deg", "90 deg", "out-of-bounds"],
    ["0.85 sd 0.05", "85 sd 5", "out-of-bounds"],
    ["from: 300 nm, to: 1100 nm", "from: 1100 nm, to: 300 nm", "range-reversed"],
    ["from: 300 nm", "from: 200 nm", "out-of-bounds"],
    ["on: cell, ", "", "missing-key"],
    ["{ on: cell, reflectance_minimum: 1.5 nm, weighted_reflectance: 0.1 % }", "{ on: cell }", "gauge-reads-nothing"],
    ["approve: [ ]", "approve: Ana", "wrong-type"],
    ["approve: [ ]", 'approve: [ "a\\nb" ]', "control-character"],
    [
      "{ goal: { thickness: 80 nm within 2 nm } }",
      "{ goal: { thickness: 80 nm within 2 nm }, gaol: {} }",
      "unknown-key",
    ],
    ["{ goal: { thickness: 80 nm within 2 nm } }", "{ goal: {} }", "no-goal"],
    ["line: Saltmarsh 2", "line: ''", "empty-text"],
    ["line: Saltmarsh 2", "line: 2", "accepted"],
  ])("with %j written as %j is %s", (from, to, code) => {
    expect(first(from, to)?.code ?? "accepted").toBe(code);
  });

  it("a setting that could not be read is not reported again where it is used", () => {
    expect(placesOf(changed("range: 200..900 s,", "range: 200..900 sccm,", EXAMPLE))).toEqual(["wrong-unit 20:25"]);
  });
});
