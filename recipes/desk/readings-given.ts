/** Readings as people give them, typed or in JSON: checked, in canonical units, with gauge and place filled in. */
import { type Dimension, nearestWord, parseQuantity, refuse } from "../../engine/index.ts";
import { gaugeFor } from "../advice/expectation.ts";
import type { Gauge } from "../line/line.ts";
import type { Reading } from "../record/entries.ts";
import { type Spectrum, spectrumName } from "../record/spectra.ts";
import type { Workspace } from "./workspace.ts";

/** A number or a text with a unit, as typed or as given in JSON. */
export type Given = string | number;

/** What was measured. */
export interface ReadingGiven {
  index?: Given;
  thickness?: Given;
  weightedReflectance?: Given;
  reflectanceMinimum?: Given;
  on?: string;
  gauge?: string;
  /** Sites already read from a file: values and their place. */
  sites?: NonNullable<Reading["site_values"]>;
  /** A measured reflectance file, already read. */
  spectrum?: Spectrum;
}

const plausible: Record<string, [number, number]> = {
  index: [1.3, 4],
  thickness: [0.1, 2000],
  "weighted reflectance": [0, 100],
  "reflectance minimum": [200, 2000],
};

/** A reading's value in canonical unit, refused when not finite or beyond what a film can be. */
export function measured(
  what: string,
  given: Given | undefined,
  dimension: Dimension,
  unit: string,
): number | undefined {
  if (given === undefined || given === "-" || given === "") return undefined;
  const value =
    typeof given === "number"
      ? given
      : dimension === "number"
        ? plainNumber(what, given)
        : parseQuantity(given, dimension, { defaultUnit: unit }).value;
  const [low, high] = plausible[what];
  if (!Number.isFinite(value)) refuse("not-a-number", `${what} is ${given}, not a number`);
  if (value < low || value > high)
    refuse(
      "impossible-value",
      `${what} ${given} is impossible: it must lie in ${low} to ${high}${unit && ` ${unit}`}`,
      { hint: hintFor(what, value) },
    );
  return value;
}

const hintFor = (what: string, value: number) =>
  what === "index" && value > 4 ? "is it the thickness? The order is index, then thickness" : undefined;

/** A bare number could be a fraction as well as per cent, so text needs its unit; and no cell reflects under 0.1 %. */
function weightedGiven(given: Given | undefined): number | undefined {
  if (typeof given === "string" && given !== "-" && given !== "" && !/%\s*$/.test(given))
    refuse("missing-unit", `weighted reflectance ${given} has no unit`, {
      hint: "per cent, as 2.3%; a fraction of 0.023 is 2.3%",
    });
  const value = measured("weighted reflectance", given, "percent", "%");
  if (value !== undefined && value < 0.1)
    refuse("impossible-value", `weighted reflectance ${value} % is impossible on a coated cell`, {
      hint: "a fraction instead of per cent?",
    });
  return value;
}

function plainNumber(what: string, text: string): number {
  return parseQuantity(text.trim(), "number").value ?? refuse("not-a-number", `${what} "${text}" is not a number`);
}

export function wholeNumber(what: string, given: Given | undefined, least: number): number | undefined {
  if (given === undefined) return undefined;
  const value = typeof given === "number" ? given : Number(given);
  if (!Number.isInteger(value) || value < least || value > 1e6)
    refuse("not-a-count", `${what} is ${given}; a whole number from ${least} on is needed`);
  return value;
}

/**
 * What was measured of a film and its light, as readings: one of the film, one of the light, as far as given. Refuses
 * impossible values, `missing-unit`, `bad-on`, `unknown-gauge`, `index-on-texture`.
 */
export function readingsOf(ws: Workspace, run: ReadingGiven): Reading[] {
  const index = run.sites ? meanOf(run.sites.map((s) => s.index)) : measured("index", run.index, "number", "");
  const thickness = run.sites
    ? meanOf(run.sites.map((s) => s.thickness_nm))
    : measured("thickness", run.thickness, "length", "nm");
  const weighted = weightedGiven(run.weightedReflectance);
  const minimum = measured("reflectance minimum", run.reflectanceMinimum, "length", "nm");
  if (run.on !== undefined && run.on !== "polished" && run.on !== "cell")
    refuse("bad-on", `--on is polished or cell, not ${run.on}`);
  if (run.gauge !== undefined) gaugeNamed(ws, run.gauge);
  const out: Reading[] = [];
  const gaugeName = (on: "polished" | "cell", what: "film" | "light") =>
    run.gauge ?? gaugeFor(ws.line, on, what)?.name ?? "unnamed";
  if (index !== undefined || thickness !== undefined) {
    const on = run.on ?? "polished";
    if (on === "cell" && ws.line.wafer.surface === "pyramids" && index !== undefined)
      refuse(
        "index-on-texture",
        "an index read on a textured cell says nothing: reflectance there fixes index times thickness only",
        { hint: "read it on a polished witness" },
      );
    out.push({
      gauge: gaugeName(on as "polished" | "cell", "film"),
      on: on as "polished" | "cell",
      ...(index !== undefined ? { index } : {}),
      ...(thickness !== undefined ? { thickness_nm: thickness } : {}),
      ...(run.sites ? { sites: run.sites.length, site_values: run.sites } : {}),
    });
  }
  if (weighted !== undefined || minimum !== undefined) {
    const on = (run.on ?? (ws.line.wafer.surface === "pyramids" ? "cell" : "polished")) as "polished" | "cell";
    out.push({
      gauge: gaugeName(on, "light"),
      on,
      ...(weighted !== undefined ? { weighted_reflectance_percent: weighted } : {}),
      ...(minimum !== undefined ? { reflectance_minimum_nm: minimum } : {}),
    });
  }
  if (run.spectrum) addSpectrum(ws, run, out);
  return out;
}

/** A spectrum belongs to the reading of the light; where none was given it is a reading of its own, without a value so far. */
function addSpectrum(ws: Workspace, run: ReadingGiven, readings: Reading[]): void {
  const spectrum = spectrumName(run.spectrum as Spectrum);
  const light = readings.find((one) => "reflectance_minimum_nm" in one || "weighted_reflectance_percent" in one);
  if (light) {
    light.spectrum = spectrum;
    return;
  }
  const on = (run.on ?? (ws.line.wafer.surface === "pyramids" ? "cell" : "polished")) as "polished" | "cell";
  const gauge = run.gauge ?? gaugeFor(ws.line, on, "light")?.name ?? gaugeFor(ws.line, on, "film")?.name ?? "unnamed";
  readings.push({ gauge, on, spectrum });
}

/** A gauge of the line. Refuses `unknown-gauge`, with the nearest. */
export function gaugeNamed(ws: Workspace, name: string): Gauge {
  const gauge = ws.line.gauges.get(name);
  if (gauge) return gauge;
  const known = [...ws.line.gauges.keys()];
  const near = nearestWord(name, known);
  return refuse("unknown-gauge", `no gauge ${name} on this line`, {
    hint: near ? `did you mean ${near}?` : `gauges are ${known.join(", ")}`,
  });
}

function meanOf(values: (number | undefined)[]): number | undefined {
  const read = values.filter((v): v is number => v !== undefined);
  return read.length === 0 ? undefined : read.reduce((a, b) => a + b, 0) / read.length;
}
